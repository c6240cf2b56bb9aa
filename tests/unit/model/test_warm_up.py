"""When a desk begins to speak."""

from dataclasses import replace

import pytest

from vanner.model.desk import DeskModel

DAY_S = 86400.0
START_S = 1_700_006_400.0


@pytest.fixture
def desk(parameters):
    told = {"warm_up_s": 3 * DAY_S, "warm_up_words": 10, "warm_up_at_most_s": 14 * DAY_S}
    return DeskModel(parameters(**told))


def test_an_old_date_among_the_first_entries_is_no_time_of_learning(desk, term_item):
    old = replace(term_item(1, "quay gull", START_S), published_s=START_S - 40 * DAY_S)
    desk.step(START_S, [old])
    assert not desk.is_warm(START_S + 13 * DAY_S)
    assert desk.is_warm(START_S + 14 * DAY_S)


def test_a_taught_past_of_days_and_words_lets_a_desk_speak_at_once(desk, term_item):
    past = [
        replace(
            term_item(n, "quay gull fog", START_S, teaches=True),
            published_s=START_S - (4 - n / 2) * DAY_S,
        )
        for n in range(1, 6)
    ]
    desk.step(START_S, past)
    assert desk.is_warm(START_S + 60.0)


def test_days_without_words_and_words_without_days_are_not_enough(desk, term_item):
    desk.step(START_S, [term_item(1, {"quay": 9}, START_S)])
    assert not desk.is_warm(START_S + 5 * DAY_S)
    desk.step(START_S + 60.0, [term_item(2, {"gull": 9}, START_S + 60.0)])
    assert not desk.is_warm(START_S + 2 * DAY_S)
    assert desk.is_warm(START_S + 3 * DAY_S)
