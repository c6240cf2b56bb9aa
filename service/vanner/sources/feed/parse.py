"""From the body of a feed to raw items, whatever its format and however broken it is."""

from __future__ import annotations

import io
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import TypeVar

import feedparser

from vanner.records import RawItem
from vanner.sources.feed.charset import to_utf8
from vanner.sources.feed.entries import in_time_order, language_tag, raw_item
from vanner.sources.feed.jsonfeed import JsonFeedError, is_json, json_entries
from vanner.sources.feed.markup import MarkupError, harmless

Entry = TypeVar("Entry")
# A log needs no more of them to show what is wrong with a feed.
_MAX_FAULTS = 20


@dataclass(frozen=True, slots=True)
class ParsedFeed:
    """What a feed holds.

    Attributes:
        items: Oldest first.
        faults: A clause for each thing that was wrong with it or left out of it.
    """

    items: tuple[RawItem, ...]
    faults: tuple[str, ...] = ()


class UnreadableFeedError(Exception):
    """No feed can be read from a body; the message is a clause that says why."""


def parse_feed(
    body: bytes, *, content_type: str | None, base_url: str, language: str | None = None
) -> ParsedFeed:
    """Read RSS 0.9x, 1.0 or 2.0, Atom or JSON Feed from bytes, asking for nothing elsewhere.

    An empty feed gives no items; one that is cut off before its first gives a fault as well.

    Args:
        body: The feed as it was sent, decompressed.
        content_type: The header of that name, for its charset.
        base_url: The feed's own address, from which relative links start.
        language: The language of items where the feed tells none.

    Raises:
        UnreadableFeedError: The body is empty, no feed, or out of all proportion.
    """
    if not body.strip():
        raise UnreadableFeedError("its body is empty")
    if is_json(body):
        return _json(body, base_url, language)
    utf8, mismatch = to_utf8(body, content_type)
    try:
        document, notes = harmless(utf8)
    except MarkupError as error:
        raise UnreadableFeedError(str(error)) from error
    faults = [*((mismatch,) if mismatch else ()), *notes]
    feed = _read(document)
    if not feed.entries and not feed.version:
        reason = f" ({_reason(feed)})" if feed.bozo else ""
        raise UnreadableFeedError(f"it is neither RSS nor Atom nor JSON Feed{reason}")
    if feed.bozo:
        faults.append(f"it is not well-formed ({_reason(feed)}), so entries may be missing")
    is_atom = str(feed.version).startswith("atom")
    spoken = language_tag(feed.feed.get("language")) or language
    items, lost = _each(
        feed.entries,
        lambda entry: raw_item(entry, is_atom=is_atom, base_url=base_url, language=spoken),
    )
    return ParsedFeed(in_time_order(items), (*faults, *lost))


def _read(document: bytes) -> feedparser.FeedParserDict:
    try:
        # A stream: text or a path would be taken for something to open.
        return feedparser.parse(
            io.BytesIO(document),
            response_headers={"content-type": "application/xml; charset=utf-8"},
            sanitize_html=False,
            resolve_relative_uris=False,
        )
    except Exception as error:  # a foreign parser may raise anything
        raise UnreadableFeedError(f"it cannot be parsed ({_clean(error)})") from error


def _json(body: bytes, base_url: str, language: str | None) -> ParsedFeed:
    try:
        entries, read = json_entries(body, base_url=base_url, language=language)
    except JsonFeedError as error:
        raise UnreadableFeedError(str(error)) from error
    items, lost = _each(entries, read)
    return ParsedFeed(in_time_order(items), lost)


def _each(
    entries: Iterable[Entry], read: Callable[[Entry], RawItem]
) -> tuple[list[RawItem], tuple[str, ...]]:
    """Each entry by itself, so that a bad one does not take its neighbours with it."""
    items: list[RawItem] = []
    faults: list[str] = []
    lost = 0
    for number, entry in enumerate(entries, start=1):
        item: RawItem | None
        try:
            item = read(entry)
        except Exception as error:  # noqa: BLE001 - foreign input; the fault is reported below
            item, reason = None, _clean(error)
        else:
            reason = "it holds no text and no link"
        if item is not None and _holds_something(item):
            items.append(item)
            continue
        lost += 1
        if lost <= _MAX_FAULTS:
            faults.append(f"its entry {number} was left out ({reason})")
    if lost > _MAX_FAULTS:
        faults.append(f"{lost - _MAX_FAULTS} more of its entries were left out")
    return items, tuple(faults)


def _holds_something(item: RawItem) -> bool:
    return bool(item.guid or item.title or item.content_text or item.content_html)


def _reason(feed: feedparser.FeedParserDict) -> str:
    return _clean(feed.get("bozo_exception") or "unknown")


def _clean(reason: object) -> str:
    return " ".join(str(reason).replace("<unknown>:", "at ").split())[:120]
