"""Reading a pulse's items in few vectorised steps.

Items are laid out as rows of a padded matrix, in groups whose width is the power of two above
the item's number of distinct terms. The width of an item's row thus depends on the item
alone, and with it the order of every floating-point sum: how items are batched changes no bit.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from vanner.model.background import UNSEEN_WORDS
from vanner.model.decay import Floats, Ints
from vanner.model.reading import Fit, fit, own_share

if TYPE_CHECKING:
    from vanner.model.desk import DeskModel, TermItem

_SMALLEST_WIDTH = 32
_LARGEST_CELLS = 1 << 20  # of one matrix, so that a pulse of long items stays in memory
PRIOR_WORDS = 5.0  # strength of the prior on each background's weight, in words


@dataclass(frozen=True, slots=True)
class ItemRead:
    """One item's reading in numbers.

    Attributes:
        terms: (n,) int64, in the item's order of first appearance.
        counts, theta, own_share: (n,) float64.
        shares: Of standing, running, house and own words; zeros for an empty item.
        bits_per_word: Mean -log2 of the blended background, 0 for an empty item.
    """

    item: TermItem
    terms: Ints
    counts: Floats
    theta: Floats
    own_share: Floats
    shares: tuple[float, float, float, float]
    bits_per_word: float


def _width(terms: int) -> int:
    return max(_SMALLEST_WIDTH, 1 << max(terms - 1, 0).bit_length())


def read_items(model: DeskModel, items: Sequence[TermItem], now_s: float) -> list[ItemRead]:
    """Readings of items against a desk's backgrounds as they stand, in the items' order."""
    numbered = [
        (model.number_terms(list(item.terms)), np.fromiter(item.terms.values(), float))
        for item in items
    ]
    groups: dict[int, list[int]] = {}
    for place, (terms, _) in enumerate(numbered):
        groups.setdefault(_width(terms.size), []).append(place)
    reads: list[ItemRead | None] = [None] * len(items)
    for width, places in groups.items():
        rows = max(1, _LARGEST_CELLS // width)
        for start in range(0, len(places), rows):
            part = places[start : start + rows]
            for place, read in zip(
                part,
                _read_group(model, width, [(items[p], *numbered[p]) for p in part], now_s),
                strict=True,
            ):
                reads[place] = read
    return [read for read in reads if read is not None]


def _read_group(
    model: DeskModel, width: int, group: Sequence[tuple[TermItem, Ints, Floats]], now_s: float
) -> list[ItemRead]:
    terms = np.zeros((len(group), width), dtype=np.int64)
    counts = np.zeros((len(group), width))
    for row, (_, numbers, occurrences) in enumerate(group):
        terms[row, : numbers.size] = numbers
        counts[row, : numbers.size] = occurrences
    flat = terms.ravel()
    standing = model.standing.probabilities(flat, 1.0 / UNSEEN_WORDS, now_s)
    running = model.running.probabilities(flat, standing, now_s)
    backgrounds = np.stack((standing, running), axis=-1).reshape(len(group), width, 2)
    share = model.parameters.background_share
    prior = np.full((len(group), 2), PRIOR_WORDS)
    fitted = fit(counts, backgrounds, share, prior)
    own = np.where(counts > 0, own_share(fitted.theta, fitted.mixture, share), 0.0)
    blend = fitted.parts.sum(axis=0) / share
    bits = -(counts * np.log2(blend)).sum(axis=1)
    shares = _shares(counts, fitted, own)
    return [
        ItemRead(
            item,
            numbers,
            occurrences,
            fitted.theta[row, : numbers.size],
            own[row, : numbers.size],
            (float(shares[row, 0]), float(shares[row, 1]), 0.0, float(shares[row, 2])),
            float(bits[row] / max(occurrences.sum(), 1.0)),
        )
        for row, (item, numbers, occurrences) in enumerate(group)
    ]


def _shares(counts: Floats, fitted: Fit, own: Floats) -> Floats:
    """(n_items, 3) float64: shares of standing, running and own words; zero rows when empty."""
    words = np.maximum(counts.sum(axis=1), 1.0)[:, None]
    backgrounds = (counts / fitted.mixture * fitted.parts).sum(axis=2).T
    result: Floats = np.column_stack((backgrounds, (counts * own).sum(axis=1))) / words
    return result
