"""Stories: newly distinctive terms that keep company, with their items.

A term's supporting items decide. It joins a live story when at least half of them match that
story; an item matches by the bits of the story's leading terms among its own. What is left
begins stories, strongest first, each taking along the terms that share 0.6 of its items.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field

from vanner.model.story import LEADING_TERMS, Candidate, LeadingTerm, Story

__all__ = ["Candidate", "LeadingTerm", "Levels", "Story", "StoryBook"]

OVERLAP = 0.6  # share of the smaller set of items that makes two terms one story
MIN_ITEMS = 2  # independent items that a story needs to begin


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
            # Raised by something new: not by a threshold that has sunk since its last item.
            fresh = story.last_activity_s == now_s
            if fresh and story.raised_s is None and self._passes(story, levels):
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
