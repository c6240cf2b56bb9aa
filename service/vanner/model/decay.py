"""Forward decay: sums whose old parts fade, kept without touching the old parts.

An occurrence at time t adds 2^((t - L) / h) to a stored sum, with landmark L and half-life h;
the sum read at time T is the stored one times 2^(-(T - L) / h) (Cormode, Shkapenyuk,
Srivastava and Xu, Forward Decay, ICDE 2009). Multiplying every stored sum at each step
(backward exponential decay) was not taken: it touches all terms each pulse, and an item that
comes late would get the weight of its arrival and not that of its time.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

# The landmark moves once newer items weigh more than 2^64; a float64 holds 2^1023.
_REBASE_HALF_LIVES = 64


@dataclass(slots=True)
class Decay:
    """The clock of one family of decayed sums that share landmark and half-life.

    Attributes:
        half_life_s: Time after which an occurrence counts half, in seconds.
        landmark_s: The time whose occurrences have stored weight one, or None before the first.
        growth: The function g of an occurrence's age in half-lives at the landmark; its weight
            at T is g(t - L) / g(T - L). Only for the exponential, Vanner's own, may the
            landmark move.
    """

    half_life_s: float
    landmark_s: float | None = None
    growth: Callable[[Floats], Floats] = np.exp2

    def stored_weight(self, times_s: Floats) -> Floats:
        """Stored weight of occurrences at `times_s`, (n,) float64 seconds -> (n,) float64."""
        if self.landmark_s is None:
            return np.ones_like(times_s)
        return self.growth((times_s - self.landmark_s) / self.half_life_s)

    def factor_at(self, now_s: float) -> float:
        """What turns a stored sum into its value at `now_s`; 1 before the first occurrence."""
        if self.landmark_s is None:
            return 1.0
        with np.errstate(over="ignore"):  # beyond 2^1023 nothing is left of the stored sum
            growth = self.growth(np.asarray((now_s - self.landmark_s) / self.half_life_s))
        return 1.0 / float(growth)

    def move_landmark(self, now_s: float) -> float:
        """Move the landmark up to `now_s` if it is far behind; the factor to rescale sums by.

        The landmark moves by whole half-lives, so the factor is a power of two and rescaling
        is exact (but for sums that underflow to zero, which weigh nothing by then).
        """
        if self.landmark_s is None:
            self.landmark_s = now_s
            return 1.0
        behind = int((now_s - self.landmark_s) / self.half_life_s)
        if behind < _REBASE_HALF_LIVES:
            return 1.0
        self.landmark_s += behind * self.half_life_s
        return float(np.exp2(-float(behind)))


@dataclass(slots=True)
class DecayedCounts:
    """Decayed counts of terms, with their total.

    Attributes:
        stored: (capacity,) or (capacity, cells) float64, stored sums by term number.
        total: The stored sum of everything added; float or (cells,) float64.
    """

    decay: Decay
    stored: Floats = field(default_factory=lambda: np.zeros(0))
    total: Floats = field(default_factory=lambda: np.zeros(1))

    def reserve(self, terms: int) -> None:
        """Make room for `terms` term numbers, doubling so that growth costs little."""
        have = self.stored.shape[0]
        if terms > have:
            shape = (max(terms, 2 * have, 1024), *self.stored.shape[1:])
            grown = np.zeros(shape)
            grown[:have] = self.stored
            self.stored = grown

    def advance(self, now_s: float) -> None:
        """Move the landmark where due and rescale; values read afterwards are unchanged."""
        factor = self.decay.move_landmark(now_s)
        if factor != 1.0:
            self.stored *= factor
            self.total *= factor

    def at(self, terms: Ints, now_s: float) -> Floats:
        """Decayed counts of `terms`, (n,) int64 -> (n,) float64; zero for unknown numbers."""
        values = np.zeros((terms.size, *self.stored.shape[1:]))
        known = terms < self.stored.shape[0]
        values[known] = self.stored[terms[known]]
        return values * self.decay.factor_at(now_s)

    def total_at(self, now_s: float) -> Floats:
        """The decayed total at `now_s`, (cells,) or (1,) float64."""
        return self.total * self.decay.factor_at(now_s)
