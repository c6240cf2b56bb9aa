"""A background: a decaying word distribution shrunk to a base distribution.

    B(w) = (c(w) + m q(w)) / (C + m)

with decayed counts c of total C and m words of strength for the base q (a Dirichlet prior's
predictive mean; Zhai and Lafferty, A Study of Smoothing Methods for Language Models, 2004).
q reserves mass for words never seen. Adding a constant to every known word was not taken for
running text: the mass it reserves would grow with the vocabulary and never fade.

With nothing counted, B equals q.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from vanner.model.decay import Decay, DecayedCounts, Floats, Ints

# The base of the standing background: uniform over so many words. A language's word forms in
# print number about a million (common practice, from memory); the exact figure only sets how
# rare a word never seen is taken to be.
UNSEEN_WORDS = 1_000_000.0


@dataclass(slots=True)
class Background:
    """Decayed word counts and the strength of their base distribution in words."""

    counts: DecayedCounts
    base_words: float

    @classmethod
    def empty(cls, half_life_s: float, base_words: float) -> Background:
        """A background that has seen nothing."""
        return cls(DecayedCounts(Decay(half_life_s)), base_words)

    def probabilities(self, terms: Ints, base: Floats | float, now_s: float) -> Floats:
        """B of `terms` at `now_s`.

        Args:
            terms: (n,) int64 term numbers.
            base: (n,) float64 or a scalar, q of those terms.
            now_s: Unix seconds.

        Returns:
            (n,) float64, each above zero where q is.
        """
        total = float(self.counts.total_at(now_s)[0])
        seen = self.counts.at(terms, now_s)
        result: Floats = (seen + self.base_words * base) / (total + self.base_words)
        return result

    def fold_in(self, terms: Ints, counts: Floats, times_s: Floats, now_s: float) -> None:
        """Add occurrences.

        Args:
            terms: (n,) int64 term numbers; one may occur more than once.
            counts: (n,) float64 occurrences.
            times_s: (n,) float64, when each occurred.
            now_s: Unix seconds; the landmark is brought up to it first.
        """
        if terms.size == 0:
            return
        self.counts.advance(now_s)
        self.counts.reserve(int(terms.max()) + 1)
        weights = counts * self.counts.decay.stored_weight(times_s)
        np.add.at(self.counts.stored, terms, weights)
        self.counts.total += weights.sum()
