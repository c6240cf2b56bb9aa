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

from vanner.model.decay import Floats, Ints

MAX_STEPS = 60
GAIN_BITS_PER_WORD = 1e-6


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
    rows = np.arange(counts.shape[0])[:, None]
    ratio = counts / background
    order = np.argsort(-ratio, axis=1, kind="stable")
    sorted_counts, sorted_background = counts[rows, order], background[rows, order]
    level = np.cumsum(sorted_counts, axis=1)
    level /= 1.0 + odds * np.cumsum(sorted_background, axis=1)
    active: NDArray[np.bool_] = np.logical_and(ratio[rows, order] > odds * level, sorted_counts > 0)
    # The largest active place of each row, or -1 where no word is active.
    last = np.where(active, np.arange(counts.shape[1]), -1).max(axis=1, keepdims=True)
    nu = np.where(last >= 0, level[rows, last], 1.0)
    theta = np.maximum(sorted_counts / nu - odds * sorted_background, 0.0)
    theta[np.arange(counts.shape[1]) > last] = 0.0
    result = np.zeros_like(theta)
    result[rows, order] = theta
    return result


@dataclass(frozen=True, slots=True)
class Fit:
    """The fitted mixture of a batch of items.

    Attributes:
        pi: (n_items, components) float64, weights of the backgrounds, rows summing to one.
        theta: (n_items, width) float64, the items' own distributions.
        mixture: (n_items, width) float64, P of each word.
        parts: (components, n_items, width) float64, k pi_j B_j of each word.
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
    believed = (prior * np.log(np.maximum(pi, 1e-300))).sum(axis=1)
    result: Floats = (counts * logs).sum(axis=1) + believed
    return result


@dataclass(slots=True)
class _Working:
    """Items of a batch that are at the same step, by `places`, their rows in the batch.

    Matrices are (n, width), `backgrounds` and `parts` have one for each component, `prior`
    and `pi` are (n, components), `value` is the objective, (n,).
    """

    places: Ints
    counts: Floats
    backgrounds: Floats
    prior: Floats
    pi: Floats
    theta: Floats
    parts: Floats
    mixture: Floats
    value: Floats

    @classmethod
    def begin(cls, counts: Floats, backgrounds: Floats, prior: Floats, share: float) -> _Working:
        """All items, pi at its prior mean."""
        by_component = np.ascontiguousarray(np.moveaxis(backgrounds, 2, 0))
        pi = prior / prior.sum(axis=1, keepdims=True)
        none = np.zeros(0)
        places = np.arange(counts.shape[0])
        work = cls(places, counts, by_component, prior, pi, none, none, none, none)
        work.settle(share)
        return work

    def some(self, rows: NDArray[np.bool_]) -> _Working:
        """Only the items of those rows."""
        return _Working(
            self.places[rows],
            self.counts[rows],
            self.backgrounds[:, rows],
            self.prior[rows],
            self.pi[rows],
            self.theta[rows],
            self.parts[:, rows],
            self.mixture[rows],
            self.value[rows],
        )

    def settle(self, share: float) -> None:
        """Set theta, the parts, the mixture and the objective from pi."""
        self.parts = share * self.pi.T[:, :, None] * self.backgrounds
        ordinary = self.parts.sum(axis=0)
        self.theta = exact_theta(self.counts, ordinary / share, share)
        self.mixture = ordinary + (1.0 - share) * self.theta
        self.value = _objective(self.counts, self.mixture, self.pi, self.prior)

    def step(self, share: float) -> None:
        """One expectation and maximisation of pi, then theta anew."""
        expected = (self.counts / self.mixture * self.parts).sum(axis=2).T + self.prior
        self.pi = expected / expected.sum(axis=1, keepdims=True)
        self.settle(share)


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
    work = _Working.begin(counts, backgrounds, prior_words, background_share)
    enough = GAIN_BITS_PER_WORD * np.log(2.0) * counts.sum(axis=1)
    path, done = [work.value], []
    for _ in range(max_steps):
        before = work.value
        work.step(background_share)
        path.append(path[-1].copy())
        path[-1][work.places] = work.value
        moving = work.value - before > enough[work.places]
        if not moving.all():
            done.append(work.some(~moving))
            work = work.some(moving)
            if work.places.size == 0:
                break
    return _gathered([*done, work], np.array(path))


def _gathered(done: list[_Working], path: Floats) -> Fit:
    """The items of several groups in the order of the batch."""
    order = np.argsort(np.concatenate([group.places for group in done]))
    return Fit(
        np.concatenate([group.pi for group in done])[order],
        np.concatenate([group.theta for group in done])[order],
        np.concatenate([group.mixture for group in done])[order],
        np.concatenate([group.parts for group in done], axis=1)[:, order],
        path,
    )


def own_share(theta: Floats, mixture: Floats, background_share: float) -> Floats:
    """The part of each word's occurrences that is the item's own: (1 - k) theta / P."""
    result: Floats = (1.0 - background_share) * theta / mixture
    return result
