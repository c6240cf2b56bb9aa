"""Surprise in bits against scipy's own negative binomial."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from vanner.model.surprise import season_rate, surprise_bits


@given(
    seen=st.integers(1, 60),
    expected=st.floats(1e-3, 50.0),
    shape=st.floats(0.1, 200.0),
)
def test_bits_equal_the_tail_of_the_negative_binomial(seen, expected, shape):
    # scipy.stats.nbinom counts failures before `shape` successes of probability s / (s + e).
    tail = stats.nbinom.sf(seen - 1, shape, shape / (shape + expected))
    bits = surprise_bits(np.array([float(seen)]), np.array([expected]), np.array([shape]))[0]
    if tail > 1e-290:
        assert bits == pytest.approx(-np.log2(tail), rel=1e-6, abs=1e-9)


def test_the_predictive_needs_eighteen_items_where_poisson_needs_eight():
    # DESIGN section 5 gives this comparison: one in a million at mean 0.5, shape 0.5.
    needed = -np.log2(1e-6)
    counts = np.arange(1.0, 40.0)
    ours = surprise_bits(counts, np.full(39, 0.5), np.full(39, 0.5))
    poisson = -np.log2(stats.poisson.sf(counts - 1, 0.5))
    assert counts[np.argmax(ours >= needed)] == 18
    assert counts[np.argmax(poisson >= needed)] == 8


def test_with_a_large_shape_the_predictive_is_poisson():
    counts = np.arange(1.0, 10.0)
    ours = surprise_bits(counts, np.full(9, 2.0), np.full(9, 1e9))
    assert ours == pytest.approx(-np.log2(stats.poisson.sf(counts - 1, 2.0)), rel=1e-5)


def test_nothing_seen_is_no_surprise():
    assert surprise_bits(np.zeros(2), np.ones(2), np.ones(2)).tolist() == [0.0, 0.0]


def test_an_impossibly_small_tail_stays_finite():
    assert np.isfinite(surprise_bits(np.array([1e4]), np.array([1e-9]), np.array([0.5]))[0])


def test_a_season_without_items_has_the_overall_rate():
    rate = np.array([0.02, 0.5])
    assert season_rate(rate, np.zeros(2), 0.0, 1.0) == pytest.approx(rate)


def test_a_season_with_many_items_has_its_own_rate():
    value = season_rate(np.array([0.001]), np.array([300.0]), 1000.0, 1.0)[0]
    assert value == pytest.approx(301 / 2000)
    assert season_rate(np.array([0.25]), np.array([1e6]), 2e6, 1.0)[0] == pytest.approx(
        0.5, rel=1e-4
    )
