"""Spans and histories: every item is in exactly one of the two, with its true weight."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model.desk import DeskModel
from vanner.model.windows import (
    BANDS,
    HISTORY_HALF_LIFE_S,
    SEASONS,
    SPANS_S,
    WindowItem,
    Windows,
)

HOUR_S = 3600.0
DAY_S = 24 * HOUR_S
START_S = 1_700_006_400.0  # 2023-11-15 00:00 UTC, a Wednesday
TERMS = 6

# Arrivals as (minutes after the one before, terms, how late); each closes a pulse.
ARRIVALS = st.lists(
    st.tuples(
        st.sampled_from([0, 1, 20, 59, 60, 61, 200, 359, 360, 700, 1440, 4000]),
        st.sets(st.integers(0, TERMS - 1), max_size=4),
        st.sampled_from([0.0, 90.0, 5000.0]),
    ),
    max_size=40,
)


def _item(number, received_s, terms, published_s=None, copy_key=None, season=(0, 2)):
    return WindowItem(
        number,
        received_s,
        received_s if published_s is None else published_s,
        np.array(sorted(terms), dtype=np.int64),
        season,
        f"copy {number}" if copy_key is None else copy_key,
    )


def _filled(arrivals):
    """Windows after all arrivals, the items in order, and the time of the last pulse."""
    windows, items, now_s = Windows(), [], START_S
    for number, (minutes, terms, late_s) in enumerate(arrivals):
        now_s += minutes * 60.0
        windows.advance(now_s)
        items.append(_item(number, now_s, terms, published_s=now_s - late_s))
        windows.add(items[-1])
    return windows, items, now_s


@given(arrivals=ARRIVALS)
@settings(max_examples=120, deadline=None)
def test_span_and_history_together_hold_each_item_exactly_once(arrivals):
    windows, items, now_s = _filled(arrivals)
    for span, length_s in enumerate(SPANS_S):
        inside = [item for item in items if item.received_s > now_s - length_s]
        outside = [item for item in items if item.received_s <= now_s - length_s]
        assert windows.end - windows.first[span] == len(inside)
        history = windows.histories[span]
        weights = [0.5 ** ((now_s - i.published_s) / HISTORY_HALF_LIFE_S) for i in outside]
        assert history.total_at(now_s)[0] == pytest.approx(sum(weights), abs=1e-12)
        for term in range(TERMS):
            held = [item.item_id for item in inside if term in item.terms]
            assert windows.item_ids_holding(term, span) == held
            if windows.counts.shape[1] > 0:
                assert windows.counts[span, term] == len(held)
            before = sum(w for i, w in zip(outside, weights, strict=True) if term in i.terms)
            assert history.at(np.array([term]), now_s)[0] == pytest.approx(before, abs=1e-12)


@given(arrivals=ARRIVALS, cuts=st.lists(st.integers(0, 3000), max_size=8))
@settings(max_examples=60, deadline=None)
def test_looking_in_between_changes_no_count(arrivals, cuts):
    plain, _, now_s = _filled(arrivals)
    looked = Windows()
    at_s = START_S
    for number, (minutes, terms, late_s) in enumerate(arrivals):
        for cut in sorted(cuts):
            if cut < minutes:
                looked.advance(at_s + cut * 60.0)
        at_s += minutes * 60.0
        looked.advance(at_s)
        looked.add(_item(number, at_s, terms, published_s=at_s - late_s))
    assert looked.first == plain.first
    assert np.array_equal(looked.counts, plain.counts)
    for one, other in zip(looked.histories, plain.histories, strict=True):
        assert one.total_at(now_s) == pytest.approx(other.total_at(now_s), rel=1e-9)


def test_an_item_leaves_a_span_when_it_is_as_old_as_the_span_is_long():
    windows = Windows()
    windows.add(_item(1, START_S, {0}))
    for span, length_s in enumerate(SPANS_S):
        windows.advance(START_S + length_s - 1.0)
        assert windows.item_ids_holding(0, span) == [1]
        assert windows.histories[span].total_at(START_S)[0] == 0.0
        windows.advance(START_S + length_s)
        assert windows.item_ids_holding(0, span) == []
        assert windows.histories[span].total_at(START_S)[0] == pytest.approx(1.0)


def test_what_has_left_the_longest_span_is_let_go_of():
    windows, _, now_s = _filled([(10, {0, 1}, 0.0)] * 200)
    windows.advance(now_s + 2 * DAY_S)
    assert not windows.items
    assert not windows.holders
    assert not windows.copies
    assert not windows.counts.any()


def test_copies_are_known_for_a_day_and_not_longer():
    windows = Windows()
    windows.add(_item(1, START_S, {0}, copy_key="same words"))
    assert windows.is_copy("same words")
    windows.advance(START_S + SPANS_S[-1] - 1.0)
    assert windows.is_copy("same words")
    windows.advance(START_S + SPANS_S[-1])
    assert not windows.is_copy("same words")


def test_taught_items_are_in_the_histories_only():
    windows = Windows()
    windows.teach([_item(1, START_S, {0, 3}), _item(2, START_S, {3})], START_S)
    assert windows.end == 0
    assert not windows.is_copy("copy 1")
    for span in range(len(SPANS_S)):
        assert windows.item_ids_holding(3, span) == []
        history = windows.histories[span]
        assert history.at(np.arange(4), START_S).tolist() == [1.0, 0.0, 0.0, 2.0]
        assert history.total_at(START_S)[0] == 2.0


def test_teaching_nothing_changes_nothing():
    windows = Windows()
    windows.teach([], START_S)
    assert all(history.decay.landmark_s is None for history in windows.histories)


def test_a_late_item_has_the_weight_of_its_own_time():
    windows = Windows()
    published_s = START_S - 3 * HISTORY_HALF_LIFE_S
    windows.teach([_item(1, START_S, {2}, published_s=published_s)], START_S)
    for history in windows.histories:
        assert history.at(np.array([2]), START_S)[0] == pytest.approx(0.125)
        assert history.total_at(START_S)[0] == pytest.approx(0.125)


def test_a_mention_counts_in_its_own_hour_band_and_weekday_and_no_other():
    windows = Windows()
    windows.teach([_item(1, START_S, {1}, season=(5, 2))], START_S)
    cells = np.zeros(SEASONS)
    cells[[5, BANDS + 2]] = 1.0
    assert windows.seasons.at(np.array([0, 1]), START_S).tolist() == [
        [0.0] * SEASONS,
        cells.tolist(),
    ]
    assert windows.seasons.total_at(START_S).tolist() == cells.tolist()


def test_seasons_hold_what_has_left_the_longest_span():
    windows = Windows()
    windows.add(_item(1, START_S, {1}, season=(5, 2)))
    windows.advance(START_S + SPANS_S[-1] - 1.0)
    assert not windows.seasons.total.any()
    windows.advance(START_S + SPANS_S[-1])
    assert windows.seasons.at(np.array([1]), START_S)[0, 5] == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("zone", "time_s", "season"),
    [
        ("UTC", START_S, (0, 2)),
        ("UTC", START_S + 23.9 * HOUR_S, (7, 2)),
        ("Pacific/Kiritimati", START_S, (4, 2)),  # UTC+14
        ("America/St_Johns", START_S, (6, 1)),  # UTC-3:30: the evening before
        ("Europe/Berlin", START_S + 2 * HOUR_S, (1, 2)),
    ],
)
def test_the_season_is_that_of_the_desks_own_clock(parameters, zone, time_s, season):
    assert DeskModel(parameters(zone=zone)).season(time_s) == season


def test_a_term_of_its_hour_is_expected_then_and_surprises_at_another():
    # Three weeks of a term that comes every night in one band, and of much that never does.
    windows = Windows()
    nights = [_item(n, START_S + n * DAY_S, {0}, season=(1, (2 + n) % 7)) for n in range(21)]
    others = [
        _item(100 + n, START_S + n * DAY_S / 10, {1}, season=(4, (2 + n // 10) % 7))
        for n in range(210)
    ]
    now_s = START_S + 21 * DAY_S
    windows.teach(nights + others, now_s)
    for number in range(30):  # the day before, without the term
        windows.add(_item(500 + number, now_s - (23.5 - number / 2) * HOUR_S, {1}))
    windows.advance(now_s)
    for number in range(3):
        windows.add(_item(1000 + number, now_s, {0}))
    night = windows.test(np.array([0]), (1, 2), now_s)
    noon = windows.test(np.array([0]), (4, 2), now_s)
    assert noon.seen.tolist() == night.seen.tolist() == [3.0]
    assert noon.expected[0] < night.expected[0]
    assert noon.bits[0] > night.bits[0]


def test_the_span_of_most_bits_is_the_one_told():
    windows = Windows()
    history = [_item(n, START_S - n * HOUR_S, {1}) for n in range(400)]
    windows.teach(history, START_S)
    for number in range(30):  # a day's ordinary items, then four of one term in the last hour
        windows.add(_item(1000 + number, START_S + number * HOUR_S / 2, {1}))
        windows.advance(START_S + number * HOUR_S / 2)
    now_s = START_S + 15 * HOUR_S
    windows.advance(now_s)
    for number in range(4):
        windows.add(_item(2000 + number, now_s, {0}))
    tests = windows.test(np.array([0]), (5, 2), now_s)
    assert tests.span.tolist() == [0]
    assert tests.seen.tolist() == [4.0]
