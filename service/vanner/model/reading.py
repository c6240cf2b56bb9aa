"""The reading: how much of an item is ordinary, and which words are its own.

    P(w) = k * sum_j pi_j B_j(w) + (1 - k) * theta(w)

Backgrounds B_j and their common share k are fixed; the item's mixing weights pi and its own
distribution theta are found by maximum likelihood with a Dirichlet prior on pi. k is not
fitted: the likelihood would drive it to zero and theta to the raw document.

Given pi, theta is exact by sorting (Zhang, Xu and Callan, CIKM 2002; Zhang and Xu 2008). pi
takes expectation and conditional maximisation steps (Meng and Rubin 1993) with theta exact
inside each. Plain EM for theta was not taken: it needs hundreds to thousands of steps for
what a sort does at once.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from vanner.model.decay import Floats

MAX_STEPS = 60
GAIN_BITS_PER_WORD = 1e-7


def exact_theta(counts: Floats, background: Floats, background_share: float) -> Floats:
    """The theta that maximises sum_w c(w) log(k b(w) + (1 - k) theta(w)), row by row.

    With a = k / (1 - k) and words ordered by c/b falling, nu_i = C_i / (1 + a B_i) over the
    first i words; the largest i with c/b > a nu_i tells which words are active, and
    theta = c / nu - a b on those and exactly zero elsewhere.

    Args:
        counts: (n_items, width) float64, occurrences; zero is padding.
        background: (n_items, width) float64, b of the words, above zero.
        background_share: k, in (0, 1).

    Returns:
        (n_items, width) float64, each row summing to one; a row without counts stays zero.
    """
    odds = background_share / (1.0 - background_share)
    ratio = counts / background
    order = np.argsort(-ratio, axis=1, kind="stable")
    sorted_counts = np.take_along_axis(counts, order, axis=1)
    sorted_background = np.take_along_axis(background, order, axis=1)
    level = np.cumsum(sorted_counts, axis=1) / (1.0 + odds * np.cumsum(sorted_background, axis=1))
    sorted_ratio = np.take_along_axis(ratio, order, axis=1)
    active: NDArray[np.bool_] = np.logical_and(sorted_ratio > odds * level, sorted_counts > 0)
    last = active.shape[1] - 1 - np.argmax(active[:, ::-1], axis=1)
    nu = np.take_along_axis(level, last[:, None], axis=1)
    nu = np.where(nu > 0, nu, 1.0)
    keep = np.arange(active.shape[1])[None, :] <= last[:, None]
    keep &= np.logical_or.reduce(active, axis=1)[:, None]
    theta = np.where(keep, sorted_counts / nu - odds * sorted_background, 0.0)
    result = np.zeros_like(theta)
    np.put_along_axis(result, order, np.maximum(theta, 0.0), axis=1)
    return result


@dataclass(frozen=True, slots=True)
class Fit:
    """The fitted mixture of a batch of items.

    Attributes:
        pi: (n_items, components) float64, weights of the backgrounds, rows summing to one.
        theta: (n_items, width) float64, the items' own distributions.
        mixture: (n_items, width) float64, P of each word.
        parts: (n_items, width, components) float64, k pi_j B_j of each word.
        objective: (steps, n_items) float64, log-likelihood plus log prior in nats after each
            step; rows after an item's last step repeat its value.
    """

    pi: Floats
    theta: Floats
    mixture: Floats
    parts: Floats
    objective: Floats


def _objective(counts: Floats, mixture: Floats, pi: Floats, prior: Floats) -> Floats:
    logs = np.log(np.where(counts > 0, mixture, 1.0))
    result: Floats = (counts * logs).sum(axis=1) + (prior * np.log(np.maximum(pi, 1e-300))).sum(
        axis=1
    )
    return result


def _parts(backgrounds: Floats, pi: Floats, share: float) -> Floats:
    result: Floats = share * pi[:, None, :] * backgrounds
    return result


def fit(
    counts: Floats,
    backgrounds: Floats,
    background_share: float,
    prior_words: Floats,
    max_steps: int = MAX_STEPS,
) -> Fit:
    """Fit pi and theta of every item of a batch.

    An item stops by itself when its objective gains less than `GAIN_BITS_PER_WORD` a word, so
    that its result does not depend on the items beside it.

    Args:
        counts: (n_items, width) float64; zero is padding.
        backgrounds: (n_items, width, components) float64; above zero also in padding.
        background_share: k, in (0, 1).
        prior_words: (n_items, components) float64, Dirichlet pseudo-counts in words (the
            prior's parameter less one), not negative, rows with a positive sum.
        max_steps: Steps at most.

    Returns:
        The fit. An item without words keeps pi at its prior mean and theta at zero.
    """
    pi = prior_words / prior_words.sum(axis=1, keepdims=True)
    theta = exact_theta(counts, (pi[:, None, :] * backgrounds).sum(axis=2), background_share)
    words = counts.sum(axis=1)
    parts = _parts(backgrounds, pi, background_share)
    mixture = parts.sum(axis=2) + (1.0 - background_share) * theta
    path = [_objective(counts, mixture, pi, prior_words)]
    moving: NDArray[np.int64] = np.flatnonzero(words > 0)
    for _ in range(max_steps):
        if moving.size == 0:
            break
        share = parts[moving] / mixture[moving][:, :, None]
        expected = (counts[moving][:, :, None] * share).sum(axis=1) + prior_words[moving]
        new_pi = expected / expected.sum(axis=1, keepdims=True)
        blend = (new_pi[:, None, :] * backgrounds[moving]).sum(axis=2)
        new_theta = exact_theta(counts[moving], blend, background_share)
        new_parts = _parts(backgrounds[moving], new_pi, background_share)
        new_mixture = new_parts.sum(axis=2) + (1.0 - background_share) * new_theta
        value = _objective(counts[moving], new_mixture, new_pi, prior_words[moving])
        gain = value - path[-1][moving]
        pi[moving], theta[moving] = new_pi, new_theta
        parts[moving], mixture[moving] = new_parts, new_mixture
        path.append(path[-1].copy())
        path[-1][moving] = value
        moving = moving[gain > GAIN_BITS_PER_WORD * np.log(2.0) * words[moving]]
    return Fit(pi, theta, mixture, parts, np.array(path))


def own_share(theta: Floats, mixture: Floats, background_share: float) -> Floats:
    """The part of each word's occurrences that is the item's own: (1 - k) theta / P."""
    result: Floats = (1.0 - background_share) * theta / mixture
    return result
