"""The frozen values that one stage hands to the next. Times are Unix seconds (UTC)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
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


@dataclass(frozen=True, slots=True)
class Topic:
    """One of an item's own terms.

    Attributes:
        weight: theta of the term, its share of the item's own distribution.
        own_share: The part of its occurrences that is the item's own, in 0..1.
        count: Occurrences in the item.
    """

    term: str
    weight: float
    own_share: float
    count: int


@dataclass(frozen=True, slots=True)
class Reading:
    """What a desk made of an item; the four shares sum to one unless the item is empty.

    Attributes:
        words: Terms in the item, with repetition.
        bits_per_word: Mean -log2 of the desk's background for its words (0 when empty).
    """

    item_id: int
    words: int
    standing: float
    running: float
    house: float
    own: float
    bits_per_word: float
    topics: tuple[Topic, ...]


@dataclass(frozen=True, slots=True)
class Evidence:
    """Why a term counts as newly distinctive.

    Attributes:
        bits: -log2 P(X >= seen) were nothing new.
        seen: Independent items with an own mention in the span.
        expected: The mean number that the history predicts.
        span_s: The span that scored highest, in seconds.
        shape: The predictive distribution's shape.
    """

    term: str
    bits: float
    seen: int
    expected: float
    span_s: float
    shape: float


@dataclass(frozen=True, slots=True)
class StoryTerm:
    """A leading term of a story with its best evidence so far."""

    term: str
    bits: float
    seen: int
    expected: float
    joined_s: float


@dataclass(frozen=True, slots=True)
class StoryItem:
    """An item of a story and when it was added."""

    item_id: int
    added_s: float


@dataclass(frozen=True, slots=True)
class StoryRecord:
    """A story as it stands after a pulse, whole.

    Attributes:
        number: Counts a desk's stories from 1; with the desk's name it is the story's key.
        raised_s: When it passed the threshold, or None while it is only noted.
        cleared_s: When it had been quiet for the clearing time, or None while it runs.
        bits: The surprise of its two strongest terms that keep company, at its highest.
        threshold_bits: The threshold in force when it was raised, else when it was noted.
    """

    desk: str
    number: int
    noted_s: float
    raised_s: float | None
    last_activity_s: float
    cleared_s: float | None
    headline_item_id: int
    bits: float
    threshold_bits: float
    terms: tuple[StoryTerm, ...]
    items: tuple[StoryItem, ...]


@dataclass(frozen=True, slots=True)
class StoryLine:
    """A story as a person sees it in a mail, a digest or on the terminal.

    Attributes:
        story_id: The database's number; for an alert it is the alert's number too.
        state: `raised`, `cleared` or `noted`.
        items: Newest last; may be shortened, `item_count` is the whole number.
    """

    story_id: int
    desk: str
    state: str
    noted_s: float
    raised_s: float | None
    cleared_s: float | None
    last_activity_s: float
    headline: str
    bits: float
    item_count: int
    source_count: int
    terms: tuple[StoryTerm, ...]
    items: tuple[ItemLine, ...]


@dataclass(frozen=True, slots=True)
class ItemLine:
    """An item as a person sees it in a list."""

    item_id: int
    guid: str
    source: str
    title: str
    url: str | None
    published_s: float


@dataclass(frozen=True, slots=True)
class SourceVolume:
    """How much a source brought in a digest's time, against its usual amount.

    Attributes:
        usual: Items that a time of this length brought in the 14 days before, or None
            where the source is younger than that.
        last_item_s: When its latest item was received, or None.
        quiet: Whether it is silent though it usually is not.
    """

    source: str
    items: int
    usual: float | None
    last_item_s: float | None
    quiet: bool


@dataclass(frozen=True, slots=True)
class DigestContent:
    """All that a digest says; composing it into text needs nothing else.

    Attributes:
        local_slot: The scheduled local date and time as YYYY-MM-DDTHH:MM.
        raised: Alerts raised within the digest's time, oldest first.
        noted: Stories noted within it that stayed below the threshold, strongest first.
        cleared: Alerts that cleared within it.
    """

    desk: str
    schedule: str
    local_slot: str
    timezone: str
    scheduled_s: float
    covers_from_s: float
    covers_until_s: float
    raised: tuple[StoryLine, ...]
    noted: tuple[StoryLine, ...]
    cleared: tuple[StoryLine, ...]
    volumes: tuple[SourceVolume, ...]


@dataclass(frozen=True, slots=True)
class Message:
    """An outgoing mail, composed once and kept until it is handed over.

    Attributes:
        key: Tells whether this message exists already; also its Message-ID's left part.
        not_after_s: Unix seconds after which it is stale and no longer sent, or None.
    """

    key: str
    desk: str
    recipients: tuple[str, ...]
    subject: str
    body_text: str
    body_html: str
    created_s: float
    not_after_s: float | None = None
    headers: Mapping[str, str] = field(default_factory=dict)
