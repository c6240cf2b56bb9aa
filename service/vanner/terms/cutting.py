"""Cuts text into terms, with their places or with their numbers."""

from __future__ import annotations

from collections import Counter
from typing import NamedTuple

from vanner.terms.breaking import break_text, find_words
from vanner.terms.folding import term_of


class Span(NamedTuple):
    """A term and where its word stands in the original text.

    Attributes:
        term: The folded word.
        start: Code points before the word.
        end: Code points up to its end, so that `text[start:end]` is the word as written.
    """

    term: str
    start: int
    end: int


def cut(text: str) -> list[Span]:
    """Cut `text` into terms with their places, in reading order and without overlap.

    Words are broken as they were written and folded one by one, because folding can change
    their lengths. Empty text, or one without letters, has no terms.
    """
    spans: list[Span] = []
    start = 0
    for piece in break_text(text):
        end = start + len(piece)
        term = term_of(piece)
        if term is not None:
            spans.append(Span(term, start, end))
        start = end
    return spans


def count_terms(title: str, text: str) -> dict[str, int]:
    """Count the terms of a title and a text together.

    Returns:
        The number of occurrences of each term, in the order of first appearance, the title
        before the text: what counting the terms of `cut` gives. Empty where neither has any.
    """
    # Distinct spellings are folded, not occurrences: there are far fewer of them.
    spellings = Counter(find_words(title))
    spellings.update(find_words(text))
    counts: dict[str, int] = {}
    for word, count in spellings.items():
        term = term_of(word)
        if term is not None:
            counts[term] = counts.get(term, 0) + count
    return counts
