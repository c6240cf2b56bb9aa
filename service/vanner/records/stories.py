"""Stories as the model tells them, and as a person sees them."""

from __future__ import annotations

from dataclasses import dataclass


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
class ItemLine:
    """An item as a person sees it in a list."""

    item_id: int
    guid: str
    source: str
    title: str
    url: str | None
    published_s: float


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
