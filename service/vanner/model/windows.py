"""The three spans and the history behind them: what has been seen lately, and before.

An item with an own mention of a term counts for it in the spans of 1, 6 and 24 hours. When it
leaves a span it is handed to that span's history, a forward-decayed count, so that history
and window never hold the same item. Copies of an item in the window are not counted again.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field

import numpy as np

from vanner.clock import HOUR_S
from vanner.model.decay import Decay, DecayedCounts, Floats, Ints
from vanner.model.surprise import season_rate, surprise_bits

SPANS_S = (1 * HOUR_S, 6 * HOUR_S, 24 * HOUR_S)
HISTORY_HALF_LIFE_S = 14 * 24 * HOUR_S
BANDS = 8  # of three hours each
SEASONS = BANDS + 7  # hour bands, then weekdays
SEASON_STRENGTH = 1.0  # mentions' worth of belief in the overall rate
SHAPE_UNSEEN = 0.5  # s0: the predictive's shape for a term never seen (Jeffreys' prior)


@dataclass(frozen=True, slots=True)
class WindowItem:
    """An independent item in the window.

    Attributes:
        terms: (n,) int64, its own mentions, each once.
        season: (hour band, weekday) of its arrival in local time.
    """

    item_id: int
    received_s: float
    published_s: float
    terms: Ints
    season: tuple[int, int]
    copy_key: str


@dataclass(frozen=True, slots=True)
class Tests:
    """What the test said of some terms, each in the span where it scored highest.

    Attributes:
        terms: (n,) int64.
        bits, seen, expected, shape: (n,) float64.
        span: (n,) int64, index into SPANS_S.
    """

    terms: Ints
    bits: Floats
    seen: Floats
    expected: Floats
    shape: Floats
    span: Ints


@dataclass(slots=True)
class Windows:
    """The state of the spans. Items are numbered by arrival; `first[s]` is the span's oldest."""

    items: deque[WindowItem] = field(default_factory=deque)
    dropped: int = 0
    first: list[int] = field(default_factory=lambda: [0] * len(SPANS_S))
    counts: Floats = field(default_factory=lambda: np.zeros((len(SPANS_S), 0)))
    histories: tuple[DecayedCounts, ...] = field(
        default_factory=lambda: tuple(DecayedCounts(Decay(HISTORY_HALF_LIFE_S)) for _ in SPANS_S)
    )
    seasons: DecayedCounts = field(
        default_factory=lambda: DecayedCounts(
            Decay(2 * HISTORY_HALF_LIFE_S), np.zeros((0, SEASONS)), np.zeros(SEASONS)
        )
    )
    holders: dict[int, deque[int]] = field(default_factory=dict)
    copies: dict[str, int] = field(default_factory=dict)

    @property
    def end(self) -> int:
        """The number that the next item gets."""
        return self.dropped + len(self.items)

    def advance(self, now_s: float) -> None:
        """Hand items that have left a span to its history."""
        for span, length_s in enumerate(SPANS_S):
            leaving = []
            while self.first[span] < self.end:
                item = self.items[self.first[span] - self.dropped]
                if item.received_s > now_s - length_s:
                    break
                leaving.append(item)
                self.first[span] += 1
            if leaving:
                self._hand_over(span, leaving, now_s)
        while self.dropped < self.first[-1]:
            self._drop(self.items.popleft())

    def _hand_over(self, span: int, leaving: list[WindowItem], now_s: float) -> None:
        for item in leaving:
            self.counts[span, item.terms] -= 1.0
        self._remember(self.histories[span], leaving, now_s)
        if span == len(SPANS_S) - 1:
            self._remember_seasons(leaving, now_s)

    @staticmethod
    def _remember(history: DecayedCounts, items: list[WindowItem], now_s: float) -> None:
        history.advance(now_s)
        weights = history.decay.stored_weight(np.array([item.published_s for item in items]))
        terms = np.concatenate([item.terms for item in items])
        if terms.size:
            history.reserve(int(terms.max()) + 1)
            np.add.at(
                history.stored, terms, np.repeat(weights, [item.terms.size for item in items])
            )
        history.total += weights.sum()

    def _remember_seasons(self, items: list[WindowItem], now_s: float) -> None:
        self.seasons.advance(now_s)
        times = np.array([item.published_s for item in items])
        for item, weight in zip(items, self.seasons.decay.stored_weight(times), strict=True):
            cells = np.array([item.season[0], BANDS + item.season[1]])
            if item.terms.size:
                self.seasons.reserve(int(item.terms.max()) + 1)
                self.seasons.stored[np.ix_(item.terms, cells)] += weight
            self.seasons.total[cells] += weight

    def _drop(self, item: WindowItem) -> None:
        number = self.dropped
        self.dropped += 1
        for term in item.terms.tolist():
            queue = self.holders[term]
            queue.popleft()
            if not queue:
                del self.holders[term]
        if self.copies.get(item.copy_key) == number:
            del self.copies[item.copy_key]

    def is_copy(self, copy_key: str) -> bool:
        """Whether an item with the same words is in the window already."""
        return copy_key in self.copies

    def add(self, item: WindowItem) -> None:
        """Let an independent item into every span."""
        number = self.end
        self.items.append(item)
        self.copies[item.copy_key] = number
        if item.terms.size:
            self._reserve(int(item.terms.max()) + 1)
            self.counts[:, item.terms] += 1.0
        for term in item.terms.tolist():
            self.holders.setdefault(term, deque()).append(number)

    def teach(self, items: list[WindowItem], now_s: float) -> None:
        """Let items into the histories only, as if they had left every span."""
        if not items:
            return
        for history in self.histories:
            self._remember(history, items, now_s)
        self._remember_seasons(items, now_s)

    def _reserve(self, terms: int) -> None:
        have = self.counts.shape[1]
        if terms > have:
            grown = np.zeros((len(SPANS_S), max(terms, 2 * have, 1024)))
            grown[:, :have] = self.counts
            self.counts = grown

    def item_ids_holding(self, term: int, span: int) -> list[int]:
        """The items of a span with an own mention of a term, oldest first."""
        start, dropped = self.first[span], self.dropped
        numbers = self.holders.get(term, ())
        return [self.items[n - dropped].item_id for n in numbers if n >= start]

    def test(self, terms: Ints, season: tuple[int, int], now_s: float) -> Tests:
        """Test terms that arrived, each in every span; keep the span of most bits.

        Args:
            terms: (n,) int64, distinct terms of the window.
            season: (hour band, weekday) of now in local time.
            now_s: Unix seconds.
        """
        by_season = self._in_season(terms, season, now_s)
        rows = [self._test_span(span, terms, by_season, now_s) for span in range(len(SPANS_S))]
        bits, seen, expected, shape = (np.stack(part) for part in zip(*rows, strict=True))
        best: Ints = np.argmax(bits, axis=0)
        pick = (best, np.arange(terms.size))
        return Tests(terms, bits[pick], seen[pick], expected[pick], shape[pick], best)

    def _in_season(
        self, terms: Ints, season: tuple[int, int], now_s: float
    ) -> list[tuple[Floats, float]]:
        """(mentions of each term, items) of the season's hour band and of its weekday."""
        mentions, items = self.seasons.at(terms, now_s), self.seasons.total_at(now_s)
        cells = (season[0], BANDS + season[1])
        return [(mentions[:, cell], float(items[cell])) for cell in cells]

    def _test_span(
        self, span: int, terms: Ints, by_season: list[tuple[Floats, float]], now_s: float
    ) -> tuple[Floats, Floats, Floats, Floats]:
        size = float(self.end - self.first[span])
        history = self.histories[span]
        seen = self.counts[span, terms]
        shape = SHAPE_UNSEEN + history.at(terms, now_s)
        rate = shape / (float(history.total_at(now_s)[0]) + 1.0)
        whole_day = span == len(SPANS_S) - 1  # holds every hour band: only the weekday tells
        highest = rate
        for mentions, items in by_season[1:] if whole_day else by_season:
            highest = np.maximum(highest, season_rate(rate, mentions, items, SEASON_STRENGTH))
        expected = np.maximum(size, 1.0) * highest
        return surprise_bits(seen, expected, shape), seen, expected, shape
