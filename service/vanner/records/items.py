"""Items on their way: as a source gives them, after intake, and as stored."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Protocol, TypeAlias

Json: TypeAlias = "bool | int | float | str | list[Json] | dict[str, Json] | None"
Cursor: TypeAlias = "Mapping[str, Json]"


@dataclass(frozen=True, slots=True)
class RawItem:
    """One piece of text as its source gave it, before intake.

    Attributes:
        guid: The source's own identifier; None lets intake derive one from the content.
        title: Plain text or HTML-escaped text as found; may be empty.
        content_text: The text, or bytes still to be decoded, or None.
        content_html: The same as HTML; used where `content_text` is None.
        url: Where the item can be read, or None.
        language: BCP 47 tag as given, or None.
        date_raw: The date as it stood in the source, or None.
        published_s: That date in Unix seconds, or None where it could not be read.
        charset: The charset that was declared for bytes, or None.
        title_is_html: Whether `title` holds HTML (entities, tags) still to be taken out.
        source: The source that an archive line names, or None for the polled source's own.
    """

    guid: str | None
    title: str | bytes = ""
    content_text: str | bytes | None = None
    content_html: str | bytes | None = None
    url: str | None = None
    language: str | None = None
    date_raw: str | None = None
    published_s: float | None = None
    charset: str | None = None
    title_is_html: bool = False
    source: str | None = None


@dataclass(frozen=True, slots=True)
class Poll:
    """What one poll of a source brought.

    Attributes:
        items: What was found, oldest first where the source tells.
        cursor: The state to hand to the next poll; stored with the items or not at all.
        teaches: Whether the items teach the background only and may raise nothing.
        more: Whether polling again at once would bring more.
        faults: One sentence for each entry, line or file that was left out, and why.
        stopped: Why this source will not be polled again (a feed that is gone), or None.
        retry_at_s: Unix seconds before which the source asked not to be polled, or None.
    """

    items: tuple[RawItem, ...]
    cursor: Cursor
    teaches: bool = False
    more: bool = False
    faults: tuple[str, ...] = ()
    stopped: str | None = None
    retry_at_s: float | None = None


class Source(Protocol):
    """Where text comes from. `poll` is a function of the cursor and what is out there."""

    @property
    def name(self) -> str:
        """The source's name in the settings."""

    def poll(self, cursor: Cursor, now_s: float) -> Poll:
        """Look once and return what is new since `cursor` (an empty mapping at first).

        Raises:
            SourceError: Nothing could be had this time; the cursor stays as it was.
        """

    def close(self) -> None:
        """Let go of connections and files."""


@dataclass(frozen=True, slots=True)
class Item:
    """An item that passed intake and may be accepted. Its key is (source, guid).

    Attributes:
        content_digest: Hex digest of title and text; another one under the same key is a
            new revision.
        published_s: The source's date where it was credible, else the first-seen time.
        date_credible: Whether `published_s` is the source's own date.
    """

    source: str
    guid: str
    title: str
    content_text: str
    url: str | None
    language: str | None
    date_raw: str | None
    published_s: float
    date_credible: bool
    content_digest: str


@dataclass(frozen=True, slots=True)
class StoredItem:
    """An accepted revision of an item, as the model reads it.

    Attributes:
        item_id: The database's number of the item.
        revision: 1 for the item as first received; a later one is no new support.
        received_s: When it was accepted.
        teaches: Whether it teaches the background only.
    """

    item_id: int
    revision: int
    source: str
    guid: str
    title: str
    content_text: str
    language: str | None
    published_s: float
    received_s: float
    teaches: bool
