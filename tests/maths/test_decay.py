"""Forward decay: weights, landmark and totals."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vanner.model.decay import Decay, DecayedCounts

DAY_S = 86400.0


def test_example_of_the_forward_decay_paper_gives_its_count_and_sum():
    # Cormode, Shkapenyuk, Srivastava and Xu, Forward Decay, ICDE 2009, the running example
    # with landmark 100, g(n) = n^2, read at 110. Figures from memory: weights .25 .49 .09 .64
    # .16, decayed count 1.63, decayed sum 9.67, average 5.93.
    stream = [(105.0, 4.0), (107.0, 8.0), (103.0, 3.0), (108.0, 6.0), (104.0, 4.0)]
    decay = Decay(half_life_s=1.0, landmark_s=100.0, growth=np.square)
    counts = DecayedCounts(decay)
    counts.reserve(1)
    weights = decay.stored_weight(np.array([time for time, _ in stream]))
    counts.stored[0] = weights @ np.array([value for _, value in stream])
    counts.total += weights.sum()
    assert weights * decay.factor_at(110.0) == pytest.approx([0.25, 0.49, 0.09, 0.64, 0.16])
    count = counts.total_at(110.0)[0]
    total = counts.at(np.array([0]), 110.0)[0]
    assert count == pytest.approx(1.63)
    assert total == pytest.approx(9.67)
    assert total / count == pytest.approx(5.93, abs=0.005)


def test_an_occurrence_counts_half_after_one_half_life():
    decay = Decay(3 * DAY_S, landmark_s=0.0)
    stored = decay.stored_weight(np.array([10 * DAY_S]))[0]
    assert stored * decay.factor_at(13 * DAY_S) == pytest.approx(0.5)


def test_a_late_occurrence_gets_the_weight_of_its_own_time():
    prompt, late = Decay(DAY_S, landmark_s=0.0), Decay(DAY_S, landmark_s=0.0)
    late.move_landmark(100 * DAY_S)
    at = np.array([98.5 * DAY_S])
    now_s = 100 * DAY_S
    assert late.stored_weight(at)[0] * late.factor_at(now_s) == pytest.approx(
        prompt.stored_weight(at)[0] * prompt.factor_at(now_s)
    )


@given(
    half_life_s=st.floats(1.0, 1e7),
    landmark_s=st.floats(0.0, 2e9),
    ahead=st.floats(65.0, 900.0),
)
def test_moving_the_landmark_rescales_by_an_exact_power_of_two(half_life_s, landmark_s, ahead):
    decay = Decay(half_life_s, landmark_s)
    factor = decay.move_landmark(landmark_s + ahead * half_life_s)
    mantissa, exponent = np.frexp(factor)
    assert mantissa == 0.5
    moved = (decay.landmark_s - landmark_s) / half_life_s
    assert moved == pytest.approx(1 - exponent, rel=1e-6)


def test_rescaled_counts_keep_every_bit_of_their_mantissa():
    rng = np.random.default_rng(7)
    counts = DecayedCounts(Decay(DAY_S, landmark_s=0.0), rng.random(50), np.array([25.0]))
    before = np.frexp(counts.stored)[0]
    counts.advance(70.5 * DAY_S)
    assert np.array_equal(np.frexp(counts.stored)[0], before)
    assert counts.decay.landmark_s == 70 * DAY_S


def test_before_the_first_occurrence_everything_weighs_one():
    decay = Decay(DAY_S)
    assert decay.factor_at(1e9) == 1.0
    assert decay.stored_weight(np.array([5.0, 9.0])).tolist() == [1.0, 1.0]


def test_terms_that_were_never_counted_read_as_zero():
    counts = DecayedCounts(Decay(DAY_S))
    assert counts.at(np.array([0, 10**6]), 0.0).tolist() == [0.0, 0.0]
