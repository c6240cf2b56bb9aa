"""JSON Feed 1.0 and 1.1 (jsonfeed.org): entries and how to read one as a raw item."""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping

from vanner.records import RawItem
from vanner.sources.feed.dates import seconds_of
from vanner.sources.feed.entries import absolute, language_tag

_VERSION = "https://jsonfeed.org/version/"


class JsonFeedError(Exception):
    """JSON that is no feed, or no JSON at all; the message is a clause."""


def is_json(body: bytes) -> bool:
    """Whether a body begins as a JSON object, in any of JSON's encodings."""
    return body[:256].lstrip(b"\xef\xbb\xbf\xff\xfe\0 \t\r\n").startswith(b"{")


def json_entries(
    body: bytes, *, base_url: str, language: str | None
) -> tuple[list[object], Callable[[object], RawItem]]:
    """The feed's entries as they stand, and the function that reads one of them.

    That function raises ValueError for an entry that is no JSON Feed item.

    Raises:
        JsonFeedError: The body is no JSON Feed.
    """
    try:
        feed = json.loads(body.decode(json.detect_encoding(body), "replace"))
    except (ValueError, RecursionError) as error:
        raise JsonFeedError("it begins like JSON and is none") from error
    if not isinstance(feed, dict) or not str(feed.get("version", "")).startswith(_VERSION):
        raise JsonFeedError("it is JSON and no JSON Feed")
    entries = feed.get("items")
    if not isinstance(entries, list):
        raise JsonFeedError("it is a JSON Feed without a list of items")
    spoken = language_tag(feed.get("language")) or language
    return entries, lambda entry: _raw_item(entry, base_url, spoken)


def _raw_item(entry: object, base_url: str, language: str | None) -> RawItem:
    if not isinstance(entry, Mapping):
        raise ValueError("it is no JSON object")  # noqa: TRY004 - foreign input, no slip of ours
    link = _text(entry.get("url")) or _text(entry.get("external_url"))
    html, text = _text(entry.get("content_html")), _text(entry.get("content_text"))
    published = _text(entry.get("date_published"))
    modified = _text(entry.get("date_modified"))
    published_s = seconds_of(published)
    if published_s is None and modified is not None:
        published_s = seconds_of(modified)
        published = modified if published_s is not None or published is None else published
    return RawItem(
        guid=_text(entry.get("id")) or link,
        title=_text(entry.get("title")) or "",
        content_text=(text or _text(entry.get("summary"))) if html is None else None,
        content_html=html,
        url=absolute(base_url, link),
        language=language_tag(entry.get("language")) or language,
        date_raw=published,
        published_s=published_s,
    )


def _text(value: object) -> str | None:
    """A string, or a number as one (an id often is); None for all else and for blanks."""
    if isinstance(value, bool) or not isinstance(value, str | int | float):
        return None
    # JSON can name half a surrogate pair, which no encoding can write.
    text = str(value).encode("utf-16", "surrogatepass").decode("utf-16", "replace").strip()
    return text or None
