"""The live minute: sources that give out prepared items as they fall due."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from vanner.records import Cursor, Poll, RawItem
from vanner.sources.demo.archive import in_order, routine_items
from vanner.sources.demo.compose import seeded
from vanner.sources.demo.desks import NEWSROOM, OPERATIONS, OUTLETS
from vanner.sources.demo.planted import live_items

# Routine items a second; with the stories it comes to about one and a half over both desks.
_ITEMS_PER_SECOND = {NEWSROOM: 0.68, OPERATIONS: 0.54}


@dataclass(frozen=True, slots=True)
class DripSource:
    """A source whose items are known beforehand, each of which falls due at its date.

    Attributes:
        name: The source's name.
        items: In order of `published_s`; one without a date is due at once.
    """

    name: str
    items: tuple[RawItem, ...]

    def poll(self, cursor: Cursor, now_s: float) -> Poll:
        """The items that have fallen due since `cursor`, which counts those given out.

        A count that makes no sense is taken as none: the items' keys tell what is known.
        """
        given = cursor.get("given", 0)
        first = given if type(given) is int and given >= 0 else 0
        last = first
        while last < len(self.items) and (self.items[last].published_s or 0.0) <= now_s:
            last += 1
        return Poll(self.items[first:last], {"given": last})

    def close(self) -> None:
        """Nothing is held open."""


def demo_live(start_s: float, seconds: float, random_state: int) -> tuple[RawItem, ...]:
    """All items of the live time [start_s, start_s + seconds), by publication time.

    The same outlets go on as in the archive, and one more story a desk unfolds within the
    first half.

    Raises:
        ValueError: `seconds` is not above zero.
    """
    items = [item for _, told in live_items(start_s, seconds, random_state) for item in told]
    for desk, per_second in _ITEMS_PER_SECOND.items():
        rng = seeded(random_state, f"live/{desk}")
        count = round(per_second * seconds)
        # One moment in each of `count` equal steps: random, but never a long silence.
        step_s = seconds / max(count, 1)
        moments = [start_s + (n + rng.random() * 0.99) * step_s for n in range(count)]
        items.extend(routine_items(desk, moments, "live", random_state, rng, by_night=True))
    return tuple(in_order(items))


def demo_drip(start_s: float, seconds: float, random_state: int) -> tuple[DripSource, ...]:
    """One source for each outlet of the demo, giving out `demo_live`'s items as they fall due.

    Start it where the archive ends: `start_s` is the archive's start plus its days.

    Raises:
        ValueError: `seconds` is not above zero.
    """
    items: Sequence[RawItem] = demo_live(start_s, seconds, random_state)
    return tuple(
        DripSource(outlet.name, tuple(item for item in items if item.source == outlet.name))
        for outlet in OUTLETS
    )
