"""One story: its leading terms, its items, and which items fit it.

A story's surprise is the sum of its two strongest terms' bits: one word may be odd by chance,
two odd words in the same items seldom are.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

LEADING_TERMS = 8
MATCH_FRACTION = 0.5  # of the three strongest leading terms' bits, for an item to match


@dataclass(frozen=True, slots=True)
class Candidate:
    """A term over the joining level, with the items of its span that hold it."""

    term: int
    bits: float
    seen: float
    expected: float
    items: tuple[int, ...]


@dataclass(slots=True)
class LeadingTerm:
    """A term that stands for a story, with its best evidence so far."""

    bits: float
    seen: float
    expected: float
    joined_s: float


@dataclass(slots=True)
class Story:
    """A story in the making.

    Attributes:
        bits: The two strongest terms' bits together, at their highest.
        strongest_bits: The strongest term's bits.
        need_bits: What an item must match to belong.
        terms: The leading terms by number.
        items: Item id -> the time it was added.
    """

    number: int
    noted_s: float
    last_activity_s: float
    threshold_bits: float
    raised_s: float | None = None
    cleared_s: float | None = None
    bits: float = 0.0
    headline_item: int = 0
    headline_score: float = -1.0
    strongest_bits: float = 0.0
    need_bits: float = 0.0
    terms: dict[int, LeadingTerm] = field(default_factory=dict)
    items: dict[int, float] = field(default_factory=dict)

    def learn(self, candidate: Candidate, now_s: float) -> None:
        """Let a term stand for the story, better its evidence, or take the weakest's place."""
        known = self.terms.get(candidate.term)
        if known is not None and known.bits >= candidate.bits:
            return
        if known is None and len(self.terms) >= LEADING_TERMS:
            weakest = min(self.terms, key=lambda term: (self.terms[term].bits, term))
            if self.terms[weakest].bits >= candidate.bits:
                return
            del self.terms[weakest]
        joined_s = known.joined_s if known is not None else now_s
        self.terms[candidate.term] = LeadingTerm(
            candidate.bits, candidate.seen, candidate.expected, joined_s
        )
        before_bits = self.bits
        self._rank()
        if self.bits > before_bits:
            self.last_activity_s = now_s

    def _rank(self) -> None:
        ranked = sorted((term.bits for term in self.terms.values()), reverse=True)
        self.strongest_bits = ranked[0]
        self.need_bits = MATCH_FRACTION * sum(ranked[:3])
        self.bits = max(self.bits, sum(ranked[:2]))

    def match(self, own_terms: Mapping[int, float]) -> float:
        """How well an item fits: matched bits, or 0 where it does not.

        It fits when it holds leading terms worth half the bits of the three strongest, and two
        of them where the story has two: one common word must not carry strangers in.
        """
        shared = [lead.bits for term, lead in self.terms.items() if term in own_terms]
        total = sum(shared)
        fits = total >= self.need_bits and len(shared) >= min(2, len(self.terms))
        return total if fits else 0.0

    def add_item(self, item_id: int, score: float, now_s: float) -> None:
        """Add an item once; the one with most of the leading terms' bits gives the headline."""
        if item_id not in self.items:
            self.items[item_id] = now_s
            self.last_activity_s = now_s
        if self.raised_s is None and score > self.headline_score:
            self.headline_item, self.headline_score = item_id, score
