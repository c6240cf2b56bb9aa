"""Cuts text into terms: finds the words, folds their spellings, counts them."""

from vanner.terms.cutting import Span, count_terms, cut

__all__ = ["Span", "count_terms", "cut"]
