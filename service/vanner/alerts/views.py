"""Stories worded for a template: every text is one line, every time local, every link safe."""

from __future__ import annotations

from dataclasses import dataclass
from zoneinfo import ZoneInfo

from vanner.alerts.lines import cut, one_line
from vanner.alerts.wording import amount, counted, full_time, near_time, web_link
from vanner.records import ItemLine, StoryLine, StoryTerm

_TITLE_CELLS = 300  # what HTML shows of a title; a text line is cut far shorter


@dataclass(frozen=True, slots=True)
class TermView:
    """A leading term and what speaks for it."""

    term: str
    seen: int
    expected: str
    bits: str


@dataclass(frozen=True, slots=True)
class ItemView:
    """An item as one line; `url` is None where there is no address to follow."""

    title: str
    source: str
    time: str
    url: str | None


@dataclass(frozen=True, slots=True)
class StoryView:
    """A story as one paragraph.

    Attributes:
        noted, raised, cleared: Local times; None where it has not come to that.
        support: How many items and sources, in words.
        items_short: How many items, in words.
        more: How many items are not among `items`.
    """

    story_id: int
    headline: str
    noted: str
    raised: str | None
    cleared: str | None
    bits: str
    support: str
    items_short: str
    terms: tuple[TermView, ...]
    items: tuple[ItemView, ...]
    more: int


def story_view(
    story: StoryLine,
    zone: ZoneInfo,
    beside_s: float | None,
    most_terms: int | None = None,
    most_items: int | None = None,
) -> StoryView:
    """Word a story.

    Args:
        story: The story.
        zone: The desk's time zone.
        beside_s: Times on this one's day are written without the day; None writes them full.
        most_terms: Its strongest terms, at most that many; None for all.
        most_items: The first of its listed items, at most that many; None for all.
    """

    def when(time_s: float) -> str:
        return full_time(time_s, zone) if beside_s is None else near_time(time_s, zone, beside_s)

    items = story.items[:most_items]
    return StoryView(
        story_id=story.story_id,
        headline=headline_of(story),
        noted=when(story.noted_s),
        raised=None if story.raised_s is None else when(story.raised_s),
        cleared=None if story.cleared_s is None else when(story.cleared_s),
        bits=f"{story.bits:.0f} bits",
        support=f"{counted(story.item_count, 'item')} from {counted(story.source_count, 'source')}",
        items_short=counted(story.item_count, "item"),
        terms=tuple(map(_term_view, story.terms[:most_terms])),
        items=tuple(_item_view(item, when(item.published_s)) for item in items),
        more=max(story.item_count - len(items), 0),
    )


def headline_of(story: StoryLine) -> str:
    """A story's headline as one line, its terms where it has none, else its number."""
    return (
        cut(story.headline, _TITLE_CELLS)
        or one_line(", ".join(term.term for term in story.terms[:4]))
        or f"Story {story.story_id}"
    )


def _term_view(term: StoryTerm) -> TermView:
    return TermView(one_line(term.term), term.seen, amount(term.expected), f"{term.bits:.0f} bits")


def _item_view(item: ItemLine, time: str) -> ItemView:
    return ItemView(
        title=cut(item.title, _TITLE_CELLS) or "(no title)",
        source=one_line(item.source),
        time=time,
        url=web_link(item.url),
    )
