"""The planted stories: when they happen and which items tell them."""

from __future__ import annotations

import math
import random
from collections.abc import Sequence
from dataclasses import dataclass

from vanner.clock import DAY_S, HOUR_S
from vanner.records import RawItem
from vanner.sources.demo.compose import LEXICON, in_manner, seeded, whole_item
from vanner.sources.demo.desks import NEWSROOM, outlet_named
from vanner.sources.demo.grammar import Phrasing
from vanner.sources.demo.script import StoryScript
from vanner.sources.demo.stories_live import LIVE_STORIES
from vanner.sources.demo.stories_newsroom import NEWSROOM_STORIES
from vanner.sources.demo.stories_operations import OPERATIONS_STORIES

LEAST_DAYS = 2.0
# The archive's part before the first story, in which the desks learn their language.
_QUIET_SHARE = 1 / 3
_LAST_STORY_BEFORE_END_DAYS = 0.5
_CALM_END_S = HOUR_S / 2
# News breaks in office hours (UTC), trouble in a harbour at any hour.
_NEWS_HOURS = (7.0, 13.0)
# A live story begins after 5 per cent of the live time and has been told after 48.
_LIVE_FROM, _LIVE_UNTIL = 0.05, 0.48


@dataclass(frozen=True, slots=True)
class PlantedStory:
    """A story that the demo plants and that its desk should raise.

    Attributes:
        start_s: When its first item was published, in Unix seconds.
        end_s: When its last item was.
        guids: Its items in order of publication.
        sources: The sources that tell it.
        words: Its distinctive words, lower case, which the routine topics never use.
    """

    name: str
    desk: str
    start_s: float
    end_s: float
    guids: tuple[str, ...]
    sources: tuple[str, ...]
    words: tuple[str, ...]


def planted_stories(start_s: float, days: float, random_state: int) -> tuple[PlantedStory, ...]:
    """The stories of the archive that `demo_archive` makes of the same arguments, by time.

    They lie between a third of the archive and half a day before its end.

    Raises:
        ValueError: `days` is below 2, too short for desks to learn before the first story.
    """
    return _described(archive_items(start_s, days, random_state))


def planted_live(start_s: float, seconds: float, random_state: int) -> tuple[PlantedStory, ...]:
    """The stories of the live time that `demo_drip` makes of the same arguments: one a desk.

    Raises:
        ValueError: `seconds` is not above zero.
    """
    return _described(live_items(start_s, seconds, random_state))


def archive_items(
    start_s: float, days: float, random_state: int
) -> list[tuple[StoryScript, tuple[RawItem, ...]]]:
    """The archive's stories with their items; see `planted_stories`."""
    if days < LEAST_DAYS:
        raise ValueError(f"days is {days}; the demo's archive takes at least {LEAST_DAYS:g} days")
    told = []
    for scripts in (NEWSROOM_STORIES, OPERATIONS_STORIES):
        rng = seeded(random_state, f"planted/{scripts[0].desk}")
        for place, story in enumerate(scripts):
            first_s = _first_moment(story, place / len(scripts), start_s, days, rng)
            told.append((story, _told(story, _archive_moments(story, first_s, rng), random_state)))
    return sorted(told, key=lambda pair: _moment(pair[1][0]))


def live_items(
    start_s: float, seconds: float, random_state: int
) -> list[tuple[StoryScript, tuple[RawItem, ...]]]:
    """The live stories with their items; see `planted_live`."""
    if seconds <= 0:
        raise ValueError(f"seconds is {seconds}; the demo's live time takes more than none")
    told = []
    for story in LIVE_STORIES:
        steps = len(story.items) - 1
        shares = [_LIVE_FROM + (_LIVE_UNTIL - _LIVE_FROM) * n / steps for n in range(steps + 1)]
        moments = [round(start_s + seconds * share, 3) for share in shares]
        told.append((story, _told(story, moments, random_state)))
    return told


def _first_moment(
    story: StoryScript, place: float, start_s: float, days: float, rng: random.Random
) -> float:
    """When a story begins: `place` (0 to 1) of the way through the time for stories."""
    from_s = start_s + days * DAY_S * _QUIET_SHARE
    until_s = start_s + (days - _LAST_STORY_BEFORE_END_DAYS) * DAY_S
    first_s = from_s + (until_s - from_s) * place
    if story.desk == NEWSROOM:
        first_s = first_s // DAY_S * DAY_S + rng.uniform(*_NEWS_HOURS) * HOUR_S
        if first_s < from_s:
            first_s += DAY_S
    else:
        first_s += rng.uniform(0.0, 12.0) * HOUR_S
    end_s = start_s + days * DAY_S
    return math.ceil(min(first_s, end_s - _CALM_END_S - story.span_h * HOUR_S))


def _archive_moments(story: StoryScript, first_s: float, rng: random.Random) -> list[float]:
    """Whole seconds, the first at `first_s`, the last within the story's span.

    The early items follow one another a little faster, as they do when news breaks.
    """
    steps = len(story.items) - 1
    shares = [0.0] + [((n - 0.4 * rng.random()) / steps) ** 1.2 for n in range(1, steps + 1)]
    return [float(math.floor(first_s + share * story.span_h * HOUR_S)) for share in shares]


def _told(story: StoryScript, moments: Sequence[float], random_state: int) -> tuple[RawItem, ...]:
    rng = seeded(random_state, f"manner/{story.name}")
    items = []
    for number, (entry, time_s) in enumerate(zip(story.items, moments, strict=True)):
        outlet = outlet_named(entry.source)
        text = in_manner(outlet, entry.text, Phrasing(rng, LEXICON))
        items.append(
            whole_item(
                outlet,
                f"{story.name}/{number}",
                random_state=random_state,
                title=entry.title,
                text=text,
                time_s=time_s,
            )
        )
    return tuple(items)


def _moment(item: RawItem) -> float:
    return item.published_s or 0.0


def _described(
    told: Sequence[tuple[StoryScript, tuple[RawItem, ...]]],
) -> tuple[PlantedStory, ...]:
    return tuple(
        PlantedStory(
            name=story.name,
            desk=story.desk,
            start_s=_moment(items[0]),
            end_s=_moment(items[-1]),
            guids=tuple(str(item.guid) for item in items),
            sources=tuple(sorted({entry.source for entry in story.items})),
            words=story.words,
        )
        for story, items in told
    )
