"""The way from what a source gave to an item that may be accepted."""

from __future__ import annotations

from vanner.errors import RejectedItemError
from vanner.intake.clean import clean_line, clean_text
from vanner.intake.fields import (
    DATE_CHARACTERS,
    SOURCE_CHARACTERS,
    date_of,
    digest_of,
    guid_of,
    language_of,
    url_of,
)
from vanner.intake.html import read_page
from vanner.records import Item, RawItem
from vanner.sources.decoding import decode

TEXT_BYTES = 1_000_000
TITLE_CHARACTERS = 1000


def take_in(raw: RawItem, source: str, now_s: float) -> Item:
    """Decode, tidy and bound what a source gave.

    Args:
        raw: The entry as found.
        source: The name of the polled source, used where the entry names none itself.
        now_s: Unix seconds, the date of an entry without a credible one.

    Raises:
        RejectedItemError: It has neither a title nor a text.
    """
    title, text = _title_and_text(raw)
    title = clean_line(title, TITLE_CHARACTERS)
    text = clean_text(text, TEXT_BYTES)
    source = clean_line(raw.source or "", SOURCE_CHARACTERS) or source
    if not title and not text:
        called = clean_line(raw.guid or raw.url or "", 100)
        entry = f'entry "{called}"' if called else "entry without an id"
        raise RejectedItemError(f"An {entry} of {source} has neither title nor text: left out.")
    url = url_of(raw.url)
    published_s, credible = date_of(raw.published_s, now_s)
    return Item(
        source=source,
        guid=guid_of(raw.guid, title, text, url),
        title=title,
        content_text=text,
        url=url,
        language=language_of(raw.language),
        date_raw=clean_line(raw.date_raw or "", DATE_CHARACTERS) or None,
        published_s=published_s,
        date_credible=credible,
        content_digest=digest_of(title, text),
    )


def _title_and_text(raw: RawItem) -> tuple[str, str]:
    """Both as text; a page's own title is taken where the entry has none."""
    title = _as_text(raw.title, raw.charset)
    if raw.title_is_html:
        title = read_page(title).text
    text = _as_text(raw.content_text, raw.charset)
    if text.strip() or raw.content_html is None:
        return title, text
    page = read_page(_as_text(raw.content_html, raw.charset, html=True))
    return (title if title.strip() else page.title), page.text


def _as_text(found: str | bytes | None, charset: str | None, *, html: bool = False) -> str:
    if isinstance(found, bytes):
        return decode(found, charset, html=html)
    return found or ""
