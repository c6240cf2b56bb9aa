"""A background is a distribution at every time, whatever it has seen."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model.background import Background

DAY_S = 86400.0
WORDS = 40


def _filled(seed, half_life_s=DAY_S, base_words=10.0, days=30):
    rng = np.random.default_rng(seed)
    background = Background.empty(half_life_s, base_words)
    for day in range(days):
        terms = rng.integers(0, WORDS, 25)
        times = day * DAY_S + rng.random(25) * DAY_S
        background.fold_in(terms, np.ones(25), times, (day + 1) * DAY_S)
    return background


@given(seed=st.integers(0, 2**32 - 1), later=st.floats(0.0, 400.0))
@settings(max_examples=40)
def test_probabilities_sum_to_one_over_the_base_distributions_words(seed, later):
    background = _filled(seed)
    base = np.random.default_rng(seed + 1).dirichlet(np.ones(WORDS))
    values = background.probabilities(np.arange(WORDS), base, (30 + later) * DAY_S)
    assert values.sum() == pytest.approx(1.0, abs=1e-12)
    assert (values > 0).all()


def test_an_empty_background_is_its_base_distribution():
    base = np.array([0.5, 0.3, 0.2])
    values = Background.empty(DAY_S, 7.0).probabilities(np.arange(3), base, 123.0)
    assert np.array_equal(values, base)


def test_what_is_long_past_fades_to_the_base_distribution():
    background = _filled(3)
    base = np.full(WORDS, 1 / WORDS)
    far = background.probabilities(np.arange(WORDS), base, 2000 * DAY_S)
    assert far == pytest.approx(base)


def test_streaming_equals_batch_when_nothing_decays():
    rng = np.random.default_rng(11)
    terms = rng.integers(0, WORDS, 500)
    times = np.sort(rng.random(500)) * DAY_S
    endless = 1e15  # half-lives so long that no weight differs from one
    streamed, batch = Background.empty(endless, 5.0), Background.empty(endless, 5.0)
    batch.fold_in(terms, np.ones(500), times, DAY_S)
    for start in range(0, 500, 50):
        part = slice(start, start + 50)
        streamed.fold_in(terms[part], np.ones(50), times[part], times[part][-1])
    counted = np.bincount(terms, minlength=WORDS).astype(float)
    for background in (streamed, batch):
        values = background.probabilities(np.arange(WORDS), 1 / WORDS, DAY_S)
        assert values == pytest.approx((counted + 5.0 / WORDS) / 505.0, rel=1e-9)


def test_folding_in_nothing_changes_nothing():
    background = Background.empty(DAY_S, 5.0)
    background.fold_in(np.zeros(0, np.int64), np.zeros(0), np.zeros(0), 99.0)
    assert background.counts.total_at(99.0)[0] == 0.0
