"""One entry of an RSS or Atom feed as a raw item."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from typing import Any
from urllib.parse import urljoin, urlsplit

from vanner.records import RawItem
from vanner.sources.feed.dates import seconds_of

_HTML_TYPES = ("text/html", "application/xhtml+xml")
_LANGUAGE = re.compile(r"[A-Za-z]{2,3}(-[A-Za-z0-9]{1,8})*")
_DATES = ("published", "updated", "created")


def raw_item(
    entry: Mapping[str, Any], *, is_atom: bool, base_url: str, language: str | None
) -> RawItem:
    """What an entry says, without judging it.

    Args:
        entry: As feedparser gives it.
        is_atom: Whether the feed tells text from HTML; in RSS all text may hold HTML.
        base_url: What relative links start from.
        language: The language where the entry tells none.
    """
    content_text, content_html = _content(entry, is_atom=is_atom)
    date_raw, published_s = _date(entry)
    link = _text(entry.get("link"))
    return RawItem(
        guid=_text(entry.get("id")) or link,
        title=_text(entry.get("title")) or "",
        title_is_html=not is_atom or _type(entry.get("title_detail")) in _HTML_TYPES,
        content_text=content_text,
        content_html=content_html,
        url=absolute(base_url, link),
        language=_language(entry) or language,
        date_raw=date_raw,
        published_s=published_s,
    )


def absolute(base_url: str, link: str | None) -> str | None:
    """A link as an absolute http or https address, or None where it is none."""
    if not link:
        return None
    try:
        address = urljoin(base_url, link)
        parts = urlsplit(address)
    except ValueError:
        return None
    return address if parts.scheme in ("http", "https") and parts.netloc else None


def language_tag(value: object) -> str | None:
    """A BCP 47 tag of the usual shape, or None."""
    tag = value.strip().replace("_", "-") if isinstance(value, str) else ""
    return tag if _LANGUAGE.fullmatch(tag) else None


def in_time_order(items: Sequence[RawItem]) -> tuple[RawItem, ...]:
    """Oldest first.

    Feeds list the newest first, so an item without a date takes the time of the one below
    it; where no item has a date the order is simply turned round.
    """
    latest_s = float("-inf")
    timed = []
    for item in reversed(items):
        latest_s = item.published_s if item.published_s is not None else latest_s
        timed.append((latest_s, item))
    return tuple(item for _, item in sorted(timed, key=lambda pair: pair[0]))


def _content(entry: Mapping[str, Any], *, is_atom: bool) -> tuple[str | None, str | None]:
    """Text and HTML, one of them None: the whole content first, else the summary."""
    for detail in (*(entry.get("content") or ()), entry.get("summary_detail")):
        value = _text(detail.get("value")) if detail else None
        kind = _type(detail)
        if value and (not is_atom or kind in _HTML_TYPES):
            return None, value
        if value and kind.startswith("text/"):
            return value, None
    summary = _text(entry.get("summary"))
    if summary is None:
        return None, None
    return (summary, None) if is_atom else (None, summary)


def _date(entry: Mapping[str, Any]) -> tuple[str | None, float | None]:
    """The first of the entry's dates that can be read, else the first that it has."""
    found = None
    for name in _DATES:
        # Membership first: feedparser warns when it is asked for a date that is not there.
        raw = _text(entry.get(name)) if name in entry else None
        if raw is None:
            continue
        parsed = entry.get(f"{name}_parsed") if f"{name}_parsed" in entry else None
        time_s = seconds_of(raw, parsed)
        if time_s is not None:
            return raw, time_s
        found = found or raw
    return found, None


def _language(entry: Mapping[str, Any]) -> str | None:
    details = (*(entry.get("content") or ()), entry.get("title_detail"))
    told = [detail.get("language") for detail in details if detail]
    return next((tag for tag in map(language_tag, (entry.get("language"), *told)) if tag), None)


def _type(detail: Mapping[str, Any] | None) -> str:
    return str(detail.get("type") or "").lower() if detail else ""


def _text(value: object) -> str | None:
    text = value.strip() if isinstance(value, str) else ""
    return text or None
