"""When items come: how many an hour by the hour of the day and the day of the week, in UTC."""

from __future__ import annotations

import math
import random
from dataclasses import dataclass

from vanner.clock import DAY_S, HOUR_S

# 1 January 1970 was a Thursday; Monday counts 0.
_EPOCH_WEEKDAY = 3


@dataclass(frozen=True, slots=True)
class Rhythm:
    """A desk's rhythm.

    Attributes:
        weekday_items: Items on a day from Monday to Friday.
        weekend_items: Items on a Saturday or Sunday.
        hours: 24 relative weights, by hour UTC.
    """

    weekday_items: float
    weekend_items: float
    hours: tuple[float, ...]

    def items_per_hour(self, time_s: float) -> float:
        """The rate at a moment, in items an hour."""
        day = self.weekend_items if weekday_of(time_s) >= 5 else self.weekday_items
        return day * self.hours[hour_of(time_s)] / sum(self.hours)

    def moments(self, start_s: float, end_s: float, rng: random.Random) -> list[float]:
        """Moments of items in [start_s, end_s) in Unix seconds, in order.

        Each hour takes its expected number rounded up or down at random, so that a day's
        total stays near the rhythm. Empty where the span is empty.
        """
        found: list[float] = []
        for step in range(math.ceil((end_s - start_s) / HOUR_S)):
            from_s = start_s + step * HOUR_S
            length_s = min(HOUR_S, end_s - from_s)
            expected = self.items_per_hour(from_s + length_s / 2) * length_s / HOUR_S
            count = int(expected + rng.random())
            found.extend(from_s + rng.random() * length_s for _ in range(count))
        return sorted(found)


def hour_of(time_s: float) -> int:
    """The hour of the day in UTC, 0 to 23."""
    return int(time_s // HOUR_S) % 24


def weekday_of(time_s: float) -> int:
    """The day of the week in UTC, 0 for Monday to 6 for Sunday."""
    return (int(time_s // DAY_S) + _EPOCH_WEEKDAY) % 7


NEWSROOM_RHYTHM = Rhythm(
    weekday_items=129.0,
    weekend_items=92.0,
    hours=(
        1,
        1,
        0.7,
        0.7,
        1.2,
        3,
        5,
        7,
        9,
        9,
        9,
        8.5,
        7,
        7.5,
        8,
        8,
        7.5,
        7,
        6,
        5,
        4,
        3.5,
        2.5,
        1.5,
    ),
)
OPERATIONS_RHYTHM = Rhythm(
    weekday_items=98.0,
    weekend_items=78.0,
    hours=(3, 3, 3, 3, 3.5, 4, 6, 5, 5, 5, 5, 4.5, 4, 4.5, 6, 5, 4.5, 4, 4, 3.5, 3.5, 3.5, 5, 3.5),
)
