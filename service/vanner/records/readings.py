"""What a desk makes of an item."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Topic:
    """One of an item's own terms.

    Attributes:
        weight: theta of the term, its share of the item's own distribution.
        own_share: The part of its occurrences that is the item's own, in 0..1.
        count: Occurrences in the item.
    """

    term: str
    weight: float
    own_share: float
    count: int


@dataclass(frozen=True, slots=True)
class Reading:
    """What a desk made of an item; the four shares sum to one unless the item is empty.

    Attributes:
        words: Terms in the item, with repetition.
        bits_per_word: Mean -log2 of the desk's background for its words (0 when empty).
    """

    item_id: int
    words: int
    standing: float
    running: float
    house: float
    own: float
    bits_per_word: float
    topics: tuple[Topic, ...]
