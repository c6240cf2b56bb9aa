"""The threshold: how many bits a story needs to be worth an interruption.

Two levels. The floor holds what chance may raise: the sum of the tests' levels bounds the
expected number of false alerts whatever the tests' dependence (Boole's inequality), so with T
tests a day and f false alerts a day accepted, a term needs log2(T / f) bits. The ceiling
holds the workload: the level that the stories of the last 14 days passed `alerts_per_day`
times a day. Both must be met.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field

import numpy as np

from vanner.clock import DAY_S

CEILING_DAYS = 14.0
# The number of tests a day is itself a decayed count, so that a desk's growth is followed.
TESTS_HALF_LIFE_S = 7 * DAY_S
NOTED_FRACTION = 0.6  # of the floor: what a story needs to be noted at all


@dataclass(slots=True)
class Budget:
    """What the two levels are computed from.

    Attributes:
        since_s: When the desk began to test, or None while it warms up.
        tests: Decayed number of tests at `tests_at_s`.
        peaks: (first noted, story number) -> highest bits of the last 14 days' stories.
    """

    alerts_per_day: float
    false_alerts_per_day: float
    since_s: float | None = None
    tests: float = 0.0
    tests_at_s: float = 0.0
    peaks: dict[int, tuple[float, float]] = field(default_factory=dict)
    order: deque[int] = field(default_factory=deque)

    def count_tests(self, number: int, now_s: float) -> None:
        """Note that so many tests were made in the pulse that closes now."""
        if self.since_s is None:
            self.since_s = now_s
            self.tests_at_s = now_s
        self.tests = self.tests * self._fading(now_s) + number
        self.tests_at_s = now_s

    def _fading(self, now_s: float) -> float:
        return float(np.exp2(-(now_s - self.tests_at_s) / TESTS_HALF_LIFE_S))

    def tests_per_day(self, now_s: float) -> float:
        """Tests a day of late; at least one.

        A steady stream of T a day holds T h / ln 2 decayed tests (h in days); a young desk's
        sum covers only its age, so it is divided by the decayed length of that.
        """
        if self.since_s is None:
            return 1.0
        half_life_days = TESTS_HALF_LIFE_S / DAY_S
        age_days = max((now_s - self.since_s) / DAY_S, 1.0)
        covered = half_life_days / np.log(2.0) * (1.0 - np.exp2(-age_days / half_life_days))
        return max(float(self.tests * self._fading(now_s) / covered), 1.0)

    def floor_bits(self, now_s: float) -> float:
        """Bits that a term needs so that chance raises no more than accepted."""
        return max(float(np.log2(self.tests_per_day(now_s) / self.false_alerts_per_day)), 1.0)

    def ceiling_bits(self, now_s: float) -> float:
        """The story level passed `alerts_per_day` times a day of late; 0 while fewer were.

        Before 14 days have passed, those that have count, but at least one.
        """
        if self.since_s is None:
            return 0.0
        days = min(max((now_s - self.since_s) / DAY_S, 1.0), CEILING_DAYS)
        allowed = int(self.alerts_per_day * days)
        values = sorted((bits for _, bits in self.peaks.values()), reverse=True)
        return values[allowed] if len(values) > allowed else 0.0

    def note_story(self, number: int, noted_s: float, bits: float) -> None:
        """Keep a story's highest bits for the ceiling."""
        if number not in self.peaks:
            self.order.append(number)
        self.peaks[number] = (noted_s, bits)

    def forget(self, now_s: float) -> None:
        """Let go of stories begun more than 14 days ago."""
        while self.order and self.peaks[self.order[0]][0] < now_s - CEILING_DAYS * DAY_S:
            del self.peaks[self.order.popleft()]
