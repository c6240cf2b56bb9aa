"""A desk's model: one pulse in, readings and stories out.

The state after a pulse is a function of the state before it, the pulse's items and the zone.
Items that one step reads together do not change each other's readings.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from zoneinfo import ZoneInfo

import numpy as np

from vanner.model.background import Background
from vanner.model.budget import NOTED_FRACTION, Budget
from vanner.model.decay import Ints
from vanner.model.read_batch import ItemRead, read_items
from vanner.model.results import reading_of, record_of
from vanner.model.stories import Candidate, Levels, Story, StoryBook
from vanner.model.windows import SPANS_S, Tests, WindowItem, Windows
from vanner.records import Reading, StoryRecord

OWN_MENTION_SHARE = 0.5
STANDING_BASE_WORDS = 1000.0
RUNNING_BASE_WORDS = 500.0
JOIN_FRACTION = 0.6  # of the floor: what a term needs to join a story


@dataclass(frozen=True, slots=True)
class DeskParameters:
    """What a desk's model is told once. Times in seconds."""

    desk: str
    zone: str
    pulse_s: float
    alerts_per_day: float
    false_alerts_per_day: float
    warm_up_s: float
    warm_up_words: int
    warm_up_at_most_s: float
    standing_half_life_s: float
    running_half_life_s: float
    background_share: float
    clear_after_s: float


@dataclass(frozen=True, slots=True)
class TermItem:
    """An item as counted terms.

    Attributes:
        copy_key: Equal for items with the same words in the same number.
    """

    item_id: int
    revision: int
    published_s: float
    received_s: float
    teaches: bool
    terms: Mapping[str, int]
    copy_key: str


@dataclass(frozen=True, slots=True)
class PulseResult:
    """What a desk concluded in one pulse."""

    readings: tuple[Reading, ...]
    stories: tuple[StoryRecord, ...]


@dataclass(slots=True)
class DeskModel:
    """The whole state of a desk between two pulses."""

    parameters: DeskParameters
    vocabulary: dict[str, int] = field(default_factory=dict)
    terms: list[str] = field(default_factory=list)
    standing: Background = field(init=False)
    running: Background = field(init=False)
    windows: Windows = field(default_factory=Windows)
    budget: Budget = field(init=False)
    book: StoryBook = field(init=False)
    own_terms: dict[int, dict[int, float]] = field(default_factory=dict)
    words: int = 0
    oldest_s: float | None = None
    begun_s: float | None = None

    def __post_init__(self) -> None:
        """Begin with empty backgrounds; `state` fills a loaded desk afterwards."""
        told = self.parameters
        self.standing = Background.empty(told.standing_half_life_s, STANDING_BASE_WORDS)
        self.running = Background.empty(told.running_half_life_s, RUNNING_BASE_WORDS)
        self.budget = Budget(told.alerts_per_day, told.false_alerts_per_day)
        self.book = StoryBook(told.clear_after_s)

    def number_terms(self, names: Sequence[str]) -> Ints:
        """Term numbers of names, numbering new ones in order."""
        vocabulary, terms = self.vocabulary, self.terms
        numbers = []
        for name in names:
            number = vocabulary.get(name)
            if number is None:
                number = vocabulary[name] = len(terms)
                terms.append(name)
            numbers.append(number)
        return np.array(numbers, dtype=np.int64)

    def season(self, time_s: float) -> tuple[int, int]:
        """(hour band, weekday) of a time in the desk's zone."""
        local = datetime.fromtimestamp(time_s, ZoneInfo(self.parameters.zone))
        return local.hour // 3, local.weekday()

    def is_warm(self, now_s: float) -> bool:
        """Whether the background holds enough for the desk to speak."""
        if self.budget.since_s is not None:
            return True
        if self.oldest_s is None:
            return False
        told = self.parameters
        enough = now_s - self.oldest_s >= told.warm_up_s and self.words >= told.warm_up_words
        # From the first arrival: an old date among the first entries is no time of learning.
        begun_s = now_s if self.begun_s is None else self.begun_s
        return enough or now_s - begun_s >= told.warm_up_at_most_s

    def step(self, now_s: float, items: Sequence[TermItem]) -> PulseResult:
        """Read a pulse's items, fold them in, test what arrived, tell the stories.

        Args:
            now_s: Close of the pulse, in Unix seconds.
            items: Its items in order of acceptance; may be empty.

        Returns:
            A reading for each item and every story that changed.
        """
        cleared = self.book.clear_due(now_s, self._due())
        warm = self.is_warm(now_s)
        reads = read_items(self, items, now_s)
        fresh = [read for item, read in zip(items, reads, strict=True) if item.revision == 1]
        self._fold_in(fresh, now_s)
        arrivals, arrived = self._admit(fresh, now_s)
        changed = self._judge(arrivals, arrived, now_s) if warm else []
        self._forget_items()
        stories = {story.number: story for story in [*cleared, *changed]}
        return PulseResult(
            tuple(reading_of(read, self.terms) for read in reads),
            tuple(
                record_of(self.parameters.desk, stories[number], self.terms)
                for number in sorted(stories)
            ),
        )

    def next_clearing_s(self) -> float | None:
        """The earliest pulse end at which a live story clears, or None."""
        return min(self._due().values(), default=None)

    def _due(self) -> dict[int, float]:
        pulse_s = self.parameters.pulse_s
        return {
            number: math.ceil((story.last_activity_s + self.book.clear_after_s) / pulse_s) * pulse_s
            for number, story in self.book.live.items()
        }

    def _fold_in(self, reads: Sequence[ItemRead], now_s: float) -> None:
        if not reads:
            return
        terms = np.concatenate([read.terms for read in reads])
        counts = np.concatenate([read.counts for read in reads])
        times = np.repeat(
            np.array([read.item.published_s for read in reads]),
            [read.terms.size for read in reads],
        )
        self.standing.fold_in(terms, counts, times, now_s)
        self.running.fold_in(terms, counts, times, now_s)
        self.words += int(counts.sum())
        self.begun_s = now_s if self.begun_s is None else self.begun_s
        oldest_s = min(read.item.published_s for read in reads)
        self.oldest_s = oldest_s if self.oldest_s is None else min(self.oldest_s, oldest_s)

    def _admit(self, reads: Sequence[ItemRead], now_s: float) -> tuple[list[ItemRead], Ints]:
        """Let items into the windows, or those that may raise nothing into the histories.

        Returns:
            The items that may join stories, and the terms to test: those of independent
            items, since a copy adds nothing to a term's count.
        """
        self.windows.advance(now_s)
        taught, arrivals, independent = [], [], []
        for read in reads:
            item = read.item
            mentions = read.terms[read.own_share >= OWN_MENTION_SHARE]
            entry = WindowItem(
                item.item_id,
                item.received_s,
                item.published_s,
                mentions,
                self.season(item.published_s if item.teaches else item.received_s),
                item.copy_key,
            )
            if item.teaches or item.published_s < now_s - SPANS_S[-1]:
                taught.append(entry)
                continue
            arrivals.append(read)
            self.own_terms[item.item_id] = dict.fromkeys(mentions.tolist(), 1.0)
            if not self.windows.is_copy(item.copy_key):
                self.windows.add(entry)
                independent.append(mentions)
        self.windows.teach(taught, now_s)
        return arrivals, np.unique(np.concatenate([np.zeros(0, np.int64), *independent]))

    def _judge(self, arrivals: Sequence[ItemRead], numbers: Ints, now_s: float) -> list[Story]:
        own = {read.item.item_id: self.own_terms[read.item.item_id] for read in arrivals}
        self.budget.count_tests(numbers.size * len(SPANS_S), now_s)
        self.budget.forget(now_s)
        floor = self.budget.floor_bits(now_s)
        levels = Levels(
            JOIN_FRACTION * floor,
            floor,
            self.budget.ceiling_bits(now_s),
            NOTED_FRACTION * floor,
        )
        candidates: list[Candidate] = []
        if numbers.size:
            tests = self.windows.test(numbers, self.season(now_s), now_s)
            candidates = self._candidates(tests, levels.join_bits)
        stories = self.book.update(now_s, own, candidates, self.own_terms, levels)
        for story in stories:
            self.budget.note_story(story.number, story.noted_s, story.bits)
        return stories

    def _candidates(self, tests: Tests, join_bits: float) -> list[Candidate]:
        keep = np.flatnonzero(
            (tests.bits >= join_bits) & (tests.seen >= 2) & (tests.seen > tests.expected)
        )
        order = keep[np.lexsort((tests.terms[keep], -tests.bits[keep]))]
        return [
            Candidate(
                int(tests.terms[k]),
                float(tests.bits[k]),
                float(tests.seen[k]),
                float(tests.expected[k]),
                tuple(self.windows.item_ids_holding(int(tests.terms[k]), int(tests.span[k]))),
            )
            for k in order.tolist()
        ]

    def _forget_items(self) -> None:
        """Keep own terms only for items in the window; they are what candidates can hold."""
        if len(self.own_terms) > 2 * len(self.windows.items) + 64:
            kept = {item.item_id for item in self.windows.items}
            self.own_terms = {i: t for i, t in self.own_terms.items() if i in kept}
