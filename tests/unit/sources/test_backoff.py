import random

from hypothesis import given
from hypothesis import strategies as st

from vanner.sources.backoff import next_poll_s

NOW_S = 1_000_000.0
HOUR_S = 3600.0
DAY_S = 86400.0


class Highest(random.Random):
    """Draws the upper end of every range."""

    def random(self) -> float:
        return 1.0


class Lowest(random.Random):
    """Draws the lower end of every range."""

    def random(self) -> float:
        return 0.0


def test_a_success_waits_the_interval_and_up_to_a_tenth_more():
    assert next_poll_s(NOW_S, 300.0, 0, Lowest()) == NOW_S + 300.0
    assert next_poll_s(NOW_S, 300.0, 0, Highest()) == NOW_S + 330.0


def test_the_longest_pause_doubles_with_each_failure_up_to_an_hour():
    pauses = [next_poll_s(NOW_S, 300.0, n, Highest()) - NOW_S for n in range(1, 7)]
    assert pauses == [600.0, 1200.0, 2400.0, HOUR_S, HOUR_S, HOUR_S]


def test_the_shortest_pause_after_a_failure_is_half_the_longest():
    assert next_poll_s(NOW_S, 300.0, 3, Lowest()) == NOW_S + 1200.0


def test_a_failing_source_is_never_asked_sooner_than_a_working_one():
    assert next_poll_s(NOW_S, 3000.0, 1, Lowest()) >= NOW_S + 3000.0


def test_thousands_of_failures_do_not_overflow():
    assert next_poll_s(NOW_S, 300.0, 100_000, Highest()) == NOW_S + HOUR_S


def test_a_server_that_asks_for_later_is_given_its_time():
    assert next_poll_s(NOW_S, 300.0, 1, Highest(), NOW_S + 7200.0) == NOW_S + 7200.0
    assert next_poll_s(NOW_S, 300.0, 0, Highest(), NOW_S + 7200.0) == NOW_S + 7200.0


def test_a_server_that_asks_for_sooner_changes_nothing():
    assert next_poll_s(NOW_S, 300.0, 1, Highest(), NOW_S + 1.0) == NOW_S + 600.0


def test_a_server_that_asks_for_years_is_asked_again_after_a_day():
    assert next_poll_s(NOW_S, 300.0, 1, Highest(), NOW_S + 1e9) == NOW_S + DAY_S


def test_sources_that_began_together_spread_out():
    rng = random.Random(7)
    assert len({next_poll_s(NOW_S, 300.0, 0, rng) for _ in range(50)}) == 50


@given(
    every_s=st.floats(1.0, 3600.0),
    failures=st.integers(0, 10_000),
    retry_s=st.none() | st.floats(-1e6, 1e9),
    seed=st.integers(0, 1000),
)
def test_the_pause_stays_within_its_bounds(every_s, failures, retry_s, seed):
    rng = random.Random(seed)
    retry_at_s = None if retry_s is None else NOW_S + retry_s
    pause_s = next_poll_s(NOW_S, every_s, failures, rng, retry_at_s) - NOW_S
    # A microsecond of slack is the rounding of times near a million seconds.
    assert pause_s >= every_s - 1e-6
    asked_s = 0.0 if retry_s is None else min(retry_s, DAY_S)
    assert pause_s >= asked_s - 1e-6
    assert pause_s <= max(HOUR_S if failures else every_s * 1.1, asked_s) + 1e-6
