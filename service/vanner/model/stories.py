"""Stories: newly distinctive terms that keep company, with their items.

A term's supporting items decide. It joins a live story when at least half of them match that
story; an item matches by the bits of the story's leading terms among its own. What is left
begins stories, strongest first, each taking along the terms that share 0.6 of its items. A
story's surprise is the sum of its two strongest terms' bits: one word may be odd by chance,
two odd words in the same items seldom are.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

LEADING_TERMS = 8
OVERLAP = 0.6  # share of the smaller set of items that makes two terms one story
MATCH_FRACTION = 0.5  # of the three strongest leading terms' bits, for an item to match
MIN_ITEMS = 2  # independent items that a story needs to begin


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
        self._rank()

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


@dataclass(slots=True)
class Levels:
    """The bits that a pulse's decisions need: to join, to be noted, and to be raised."""

    join_bits: float
    floor_bits: float
    ceiling_bits: float
    noted_bits: float


@dataclass(slots=True)
class StoryBook:
    """A desk's live stories. Mutated a pulse at a time."""

    clear_after_s: float
    next_number: int = 1
    live: dict[int, Story] = field(default_factory=dict)
    story_of: dict[int, int] = field(default_factory=dict)
    by_term: dict[int, set[int]] = field(default_factory=dict)

    def adopt(self, story: Story) -> None:
        """Let a story live: its terms and items are found from here on."""
        self.live[story.number] = story
        self.story_of.update(dict.fromkeys(story.items, story.number))
        for term in story.terms:
            self.by_term.setdefault(term, set()).add(story.number)

    def _learn(self, story: Story, candidate: Candidate, now_s: float) -> None:
        before = set(story.terms)
        story.learn(candidate, now_s)
        for term in story.terms.keys() - before:
            self.by_term.setdefault(term, set()).add(story.number)
        for term in before - story.terms.keys():
            self._forget_term(term, story.number)

    def _forget_term(self, term: int, number: int) -> None:
        numbers = self.by_term[term]
        numbers.discard(number)
        if not numbers:
            del self.by_term[term]

    def clear_due(self, now_s: float, due_s: Mapping[int, float]) -> list[Story]:
        """End the stories that have been quiet long enough.

        Args:
            now_s: Close of the pulse, in Unix seconds.
            due_s: Story number -> the pulse end at which it clears; computed by the caller,
                so that a pulse closed late gives the same time.
        """
        done = [self.live[number] for number, due in due_s.items() if due <= now_s]
        for story in done:
            story.cleared_s = due_s[story.number]
            del self.live[story.number]
            for item_id in story.items:
                self.story_of.pop(item_id, None)
            for term in story.terms:
                self._forget_term(term, story.number)
        return done

    def update(
        self,
        now_s: float,
        arrivals: Mapping[int, Mapping[int, float]],
        candidates: Sequence[Candidate],
        own_terms: Mapping[int, Mapping[int, float]],
        levels: Levels,
    ) -> list[Story]:
        """Let the pulse's items and terms join stories or begin them.

        Args:
            now_s: Close of the pulse.
            arrivals: New items by id, each with its own terms and their shares.
            candidates: Terms over the joining level, most bits first.
            own_terms: The same as `arrivals` for every item that a candidate holds.
            levels: The bits that decisions need.

        Returns:
            The stories that changed, by number.
        """
        changed: dict[int, Story] = {}
        for item_id, terms in arrivals.items():
            self._place(item_id, terms, now_s, changed)
        rest = [
            left
            for candidate in candidates
            if (left := self._extend(candidate, own_terms, now_s, changed)) is not None
        ]
        self._begin(rest, own_terms, now_s, levels, changed)
        for story in changed.values():
            if story.raised_s is None and self._passes(story, levels):
                story.raised_s = now_s
                story.threshold_bits = max(levels.floor_bits, levels.ceiling_bits)
        return [changed[number] for number in sorted(changed)]

    @staticmethod
    def _passes(story: Story, levels: Levels) -> bool:
        return story.strongest_bits >= levels.floor_bits and story.bits > levels.ceiling_bits

    def _place(
        self, item_id: int, terms: Mapping[int, float], now_s: float, changed: dict[int, Story]
    ) -> None:
        """Give an item to the live story that it fits best, if any."""
        if item_id in self.story_of:
            return
        best, best_score = None, 0.0
        near = {number for term in terms for number in self.by_term.get(term, ())}
        for number in sorted(near):
            story = self.live[number]
            score = story.match(terms)
            if score > best_score:
                best, best_score = story, score
        if best is not None:
            self._own(best, item_id, best_score, now_s)
            changed[best.number] = best

    def _own(self, story: Story, item_id: int, score: float, now_s: float) -> None:
        story.add_item(item_id, score, now_s)
        self.story_of[item_id] = story.number

    def _extend(
        self,
        candidate: Candidate,
        own_terms: Mapping[int, Mapping[int, float]],
        now_s: float,
        changed: dict[int, Story],
    ) -> Candidate | None:
        """Give a candidate to the story that owns half its items, else return what is left."""
        for item_id in candidate.items:
            self._place(item_id, own_terms[item_id], now_s, changed)
        owners = [self.story_of.get(item_id) for item_id in candidate.items]
        owned = [number for number in owners if number is not None]
        if owned:
            number = max(sorted(set(owned)), key=owned.count)
            if 2 * owned.count(number) >= len(candidate.items):
                story = self.live[number]
                self._learn(story, candidate, now_s)
                changed[number] = story
                return None
        free = tuple(i for i, owner in zip(candidate.items, owners, strict=True) if owner is None)
        return Candidate(candidate.term, candidate.bits, candidate.seen, candidate.expected, free)

    def _begin(
        self,
        candidates: Sequence[Candidate],
        own_terms: Mapping[int, Mapping[int, float]],
        now_s: float,
        levels: Levels,
        changed: dict[int, Story],
    ) -> None:
        # A later candidate of the pulse may have let a story take items of an earlier one.
        left = [_without(candidate, self.story_of) for candidate in candidates]
        left = [c for c in left if len(c.items) >= MIN_ITEMS]
        while left:
            first = left[0]
            if first.bits < levels.noted_bits:
                return
            items = set(first.items)
            members = [c for c in left if _company(items, c.items)][:LEADING_TERMS]
            story = Story(
                self.next_number, now_s, now_s, max(levels.floor_bits, levels.ceiling_bits)
            )
            self.next_number += 1
            for member in members:
                story.learn(member, now_s)
            for item_id in first.items:
                held = [story.terms[t].bits for t in story.terms if t in own_terms[item_id]]
                self._own(story, item_id, sum(held), now_s)
            self.adopt(story)
            changed[story.number] = story
            taken = {member.term for member in members}
            left = [
                c
                for c in left
                if c.term not in taken and 2 * len(set(c.items) - items) >= len(c.items)
            ]
            left = [_without(c, self.story_of) for c in left]
            left = [c for c in left if len(c.items) >= MIN_ITEMS]


def _company(items: set[int], others: Iterable[int]) -> bool:
    other = set(others)
    return len(items & other) >= OVERLAP * min(len(items), len(other))


def _without(candidate: Candidate, owned: Mapping[int, int]) -> Candidate:
    free = tuple(item_id for item_id in candidate.items if item_id not in owned)
    return Candidate(candidate.term, candidate.bits, candidate.seen, candidate.expected, free)
