"""The two levels that a story must pass: what chance may raise, and what a desk can take."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from vanner.model.budget import CEILING_DAYS, DAY_S, Budget

START_S = 1_700_006_400.0
HOUR_S = 3600.0


def _steady(tests_per_hour, days, budget=None):
    """A budget after so many days of a steady stream, and when they ended."""
    budget = budget or Budget(alerts_per_day=3.0, false_alerts_per_day=0.5)
    hours = int(days * 24)
    for hour in range(hours + 1):
        budget.count_tests(tests_per_hour, START_S + hour * HOUR_S)
    return budget, START_S + hours * HOUR_S


def _with_stories(days, each_day, alerts_per_day=3.0):
    """A budget whose stories have 20, 21, ... bits, so many each day."""
    budget = Budget(alerts_per_day, 0.5)
    budget.count_tests(100, START_S)
    for number in range(days * each_day):
        budget.note_story(number + 1, START_S + number * DAY_S / each_day, 20.0 + number)
    return budget


@pytest.mark.parametrize("days", [3, 10, 40])
@pytest.mark.parametrize("tests_per_hour", [10, 500])
def test_a_steady_stream_has_the_tests_a_day_that_it_makes(tests_per_hour, days):
    # The first pulse is counted at the desk's start, so a young desk reads a little high.
    budget, now_s = _steady(tests_per_hour, days)
    assert budget.tests_per_day(now_s) == pytest.approx(24 * tests_per_hour, rel=0.02)


def test_a_stream_that_grows_is_followed():
    budget, now_s = _steady(10, 30)
    for hour in range(1, 28 * 24):
        budget.count_tests(100, now_s + hour * HOUR_S)
    later_s = now_s + 28 * DAY_S
    # Four half-lives on, a sixteenth of what is counted is of the time before.
    assert budget.tests_per_day(later_s) == pytest.approx(24 * (100 * 15 + 10) / 16, rel=0.02)


def test_in_its_first_day_a_desk_is_taken_for_a_day_old():
    budget = Budget(3.0, 0.5)
    budget.count_tests(48, START_S)
    assert budget.tests_per_day(START_S) == pytest.approx(48, rel=0.06)


def test_without_any_test_there_is_one_a_day_and_no_ceiling():
    budget = Budget(3.0, 0.5)
    assert budget.tests_per_day(START_S) == 1.0
    assert budget.floor_bits(START_S) == 1.0
    assert budget.ceiling_bits(START_S) == 0.0


@given(false_alerts=st.floats(0.01, 5.0), tests=st.integers(10, 100_000))
def test_the_floor_is_the_logarithm_of_tests_over_false_alerts(false_alerts, tests):
    budget = Budget(3.0, false_alerts)
    budget.count_tests(tests, START_S)
    per_day = budget.tests_per_day(START_S)
    level = np.log2(per_day / false_alerts)
    assert budget.floor_bits(START_S) == pytest.approx(max(level, 1.0))
    # So many tests of that level hold no more false alerts than accepted (Boole's inequality).
    if level > 1.0:
        assert per_day * 2.0 ** -budget.floor_bits(START_S) == pytest.approx(false_alerts)


def test_a_desk_that_accepts_half_as_many_false_alerts_asks_one_bit_more():
    floors = []
    for accepted in (1.0, 0.5):
        budget, now_s = _steady(100, 20, Budget(3.0, accepted))
        floors.append(budget.floor_bits(now_s))
    assert floors[1] - floors[0] == pytest.approx(1.0)


def test_as_many_stories_as_the_desk_can_take_pass_the_ceiling():
    budget = _with_stories(days=14, each_day=10, alerts_per_day=3.0)
    now_s = START_S + 14 * DAY_S - 60.0
    ceiling = budget.ceiling_bits(now_s)
    passing = [bits for _, bits in budget.peaks.values() if bits > ceiling]
    # 3 a day for 14 days less one minute.
    assert len(passing) == 41
    assert ceiling > 20.0


def test_a_desk_with_fewer_stories_than_it_can_take_has_no_ceiling():
    budget = _with_stories(days=14, each_day=3, alerts_per_day=5.0)
    assert budget.ceiling_bits(START_S + 14 * DAY_S) == 0.0


@pytest.mark.parametrize(("days", "passing"), [(1, 3), (2, 6), (10, 30)])
def test_a_young_desk_counts_only_the_days_it_has(days, passing):
    budget = _with_stories(days, each_day=10)
    ceiling = budget.ceiling_bits(START_S + days * DAY_S)
    assert sum(bits > ceiling for _, bits in budget.peaks.values()) == passing


def test_within_its_first_day_a_desk_may_raise_a_days_alerts():
    budget = Budget(2.0, 0.5)
    budget.count_tests(10, START_S)
    for number in range(1, 6):
        budget.note_story(number, START_S, 10.0 * number)
    assert budget.ceiling_bits(START_S + HOUR_S) == 30.0


def test_a_story_that_grows_counts_once_with_its_highest_bits():
    budget = Budget(1.0, 0.5)
    budget.count_tests(10, START_S)
    budget.note_story(1, START_S, 25.0)
    budget.note_story(2, START_S, 30.0)
    budget.note_story(1, START_S, 40.0)
    assert sorted(bits for _, bits in budget.peaks.values()) == [30.0, 40.0]
    assert budget.ceiling_bits(START_S) == 30.0


def test_stories_are_forgotten_once_they_began_more_than_fourteen_days_ago():
    budget = _with_stories(days=20, each_day=2)
    now_s = START_S + 20 * DAY_S
    budget.forget(now_s)
    kept = [noted_s for noted_s, _ in budget.peaks.values()]
    assert min(kept) == now_s - CEILING_DAYS * DAY_S
    assert len(kept) == len(budget.order) == 28
    budget.forget(now_s + 30 * DAY_S)
    assert not budget.peaks
    assert not budget.order
