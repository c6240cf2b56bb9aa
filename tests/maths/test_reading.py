"""The reading's solution against plain EM, a general optimiser and its own conditions."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import optimize

from vanner.model.reading import exact_theta, fit, own_share

SHARE = 0.9


def _problem(seed, words=12, rare=True):
    rng = np.random.default_rng(seed)
    counts = rng.integers(1, 6, words).astype(float)
    weight = np.full(words + 40, 0.3)
    background = rng.dirichlet(weight)[:words] + (1e-7 if rare else 1e-3)
    return counts, background


def _likelihood(counts, background, theta, share=SHARE):
    return float((counts * np.log(share * background + (1 - share) * theta)).sum())


def _plain_em(counts, background, share, steps):
    theta = counts / counts.sum()
    for _ in range(steps):
        own = (1 - share) * theta
        theta = counts * own / (own + share * background)
        theta /= theta.sum()
    return theta


@given(seed=st.integers(0, 2**32 - 1), words=st.integers(1, 60))
@settings(max_examples=100)
def test_exact_theta_meets_the_conditions_of_optimality(seed, words):
    # Karush-Kuhn-Tucker: the gradient is equal on active words and no higher elsewhere.
    counts, background = _problem(seed, words)
    theta = exact_theta(counts[None], background[None], SHARE)[0]
    gradient = counts * (1 - SHARE) / (SHARE * background + (1 - SHARE) * theta)
    multiplier = (
        counts.sum()
        - SHARE * (counts * background / (SHARE * background + (1 - SHARE) * theta)).sum()
    )
    assert theta.sum() == pytest.approx(1.0, abs=1e-12)
    assert (theta >= 0).all()
    scale = gradient.max()
    assert np.abs(gradient[theta > 0] - multiplier).max() / scale < 1e-10
    assert (gradient[theta == 0] - multiplier).max(initial=0.0) / scale < 1e-10


@pytest.mark.parametrize("seed", range(5))
def test_exact_theta_is_where_plain_em_ends_up(seed):
    counts, background = _problem(seed, rare=False)
    exact = exact_theta(counts[None], background[None], SHARE)[0]
    em = _plain_em(counts, background, SHARE, 20_000)
    assert 0.5 * np.abs(exact - em).sum() < 1e-3
    assert _likelihood(counts, background, exact) >= _likelihood(counts, background, em)


@pytest.mark.parametrize("seed", range(5))
def test_exact_theta_is_what_a_general_optimiser_finds(seed):
    counts, background = _problem(seed, words=8, rare=False)
    exact = exact_theta(counts[None], background[None], SHARE)[0]
    start = np.full(8, 1 / 8)
    found = optimize.minimize(
        lambda theta: (
            _likelihood(counts, background, start) - _likelihood(counts, background, theta)
        ),
        start,
        jac=lambda theta: -counts * (1 - SHARE) / (SHARE * background + (1 - SHARE) * theta),
        bounds=[(0, 1)] * 8,
        constraints={
            "type": "eq",
            "fun": lambda theta: theta.sum() - 1,
            "jac": np.ones_like,
        },
        method="SLSQP",
        options={"ftol": 1e-12, "maxiter": 1000},
    )
    assert found.success
    assert exact == pytest.approx(found.x, abs=1e-4)
    assert _likelihood(counts, background, exact) >= _likelihood(counts, background, found.x) - 1e-9


def _backgrounds(rng, items, width):
    return (
        rng.dirichlet(np.full(width + 30, 0.4), size=(items, 2)).transpose(0, 2, 1)[:, :width]
        + 1e-8
    )


@given(seed=st.integers(0, 2**32 - 1))
@settings(max_examples=50)
def test_the_objective_never_falls_and_distributions_sum_to_one(seed):
    rng = np.random.default_rng(seed)
    counts = rng.integers(0, 5, (6, 16)).astype(float)
    fitted = fit(counts, _backgrounds(rng, 6, 16), SHARE, np.full((6, 2), 5.0))
    gains = np.diff(fitted.objective, axis=0)
    assert gains.min(initial=0.0) > -1e-9 * np.abs(fitted.objective).max()
    assert fitted.pi.sum(axis=1) == pytest.approx(np.ones(6))
    filled = counts.sum(axis=1) > 0
    assert fitted.theta.sum(axis=1)[filled] == pytest.approx(np.ones(filled.sum()))


@pytest.mark.parametrize("seed", range(3))
def test_fitted_weights_are_where_a_general_optimiser_finds_the_maximum(seed):
    rng = np.random.default_rng(seed)
    counts = rng.integers(1, 6, (1, 10)).astype(float)
    backgrounds, prior = _backgrounds(rng, 1, 10), np.full((1, 2), 5.0)
    fitted = fit(counts, backgrounds, SHARE, prior, max_steps=2000)

    def falling(first):
        pi = np.array([first, 1 - first])
        blend = backgrounds[0] @ pi
        theta = exact_theta(counts, blend[None], SHARE)[0]
        return -(_likelihood(counts[0], blend, theta) + float(prior[0] @ np.log(pi)))

    found = optimize.minimize_scalar(
        falling, bounds=(1e-6, 1 - 1e-6), method="bounded", options={"xatol": 1e-10}
    )
    assert fitted.objective[-1, 0] == pytest.approx(-found.fun, abs=1e-5)
    assert fitted.pi[0, 0] == pytest.approx(found.x, abs=5e-3)


def test_an_item_is_read_alike_alone_and_among_others():
    rng = np.random.default_rng(5)
    counts = rng.integers(0, 4, (20, 16)).astype(float)
    backgrounds, prior = _backgrounds(rng, 20, 16), np.full((20, 2), 5.0)
    together = fit(counts, backgrounds, SHARE, prior)
    for row in range(20):
        alone = fit(counts[[row]], backgrounds[[row]], SHARE, prior[[row]])
        assert np.array_equal(alone.theta[0], together.theta[row])
        assert np.array_equal(alone.pi[0], together.pi[row])


def test_an_empty_item_keeps_the_prior_and_owns_nothing():
    fitted = fit(np.zeros((1, 8)), np.full((1, 8, 2), 0.01), SHARE, np.array([[6.0, 2.0]]))
    assert fitted.pi.tolist() == [[0.75, 0.25]]
    assert not fitted.theta.any()


def test_a_word_as_frequent_as_the_background_says_is_not_the_items_own():
    counts = np.array([[5.0, 2.0]])
    background = np.array([[0.5, 1e-6]])
    theta = exact_theta(counts, background, SHARE)
    assert theta[0, 0] == 0.0
    assert theta[0, 1] == pytest.approx(1.0, abs=1e-12)
    own = own_share(theta, SHARE * background + (1 - SHARE) * theta, SHARE)
    assert own[0, 0] == 0.0
    assert own[0, 1] > 0.99
