"""A desk's backgrounds over pulses: streaming equals batch, late items weigh as their time says."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model.background import UNSEEN_WORDS
from vanner.model.desk import DeskModel, DeskParameters, TermItem

HOUR_S = 3600.0
DAY_S = 24 * HOUR_S
START_S = 1_700_006_400.0
ENDLESS_S = 1e15  # half-lives so long that no weight differs from one
NAMES = [f"word{n}" for n in range(25)]

WORDS = st.dictionaries(st.sampled_from(NAMES), st.integers(1, 7), max_size=12)
# Items as (hours after the one before, words).
ITEMS = st.lists(st.tuples(st.integers(0, 40), WORDS), min_size=1, max_size=14)


def _desk(standing_half_life_s, running_half_life_s):
    model = DeskModel(
        DeskParameters(
            desk="quay",
            zone="UTC",
            pulse_s=60.0,
            alerts_per_day=5.0,
            false_alerts_per_day=0.5,
            warm_up_s=0.0,
            warm_up_words=0,
            warm_up_at_most_s=0.0,
            standing_half_life_s=standing_half_life_s,
            running_half_life_s=running_half_life_s,
            background_share=0.9,
            clear_after_s=6 * HOUR_S,
        )
    )
    model.number_terms(NAMES)
    return model


def _item(number, words, received_s, published_s=None):
    published_s = received_s if published_s is None else published_s
    return TermItem(number, 1, published_s, received_s, False, words, f"item {number}")


def _timed(items):
    """The items with their times, and the last time."""
    now_s, timed = START_S, []
    for number, (hours, words) in enumerate(items):
        now_s += hours * HOUR_S
        timed.append(_item(number, words, now_s))
    return timed, now_s


def _backgrounds(model, now_s):
    """(standing, running) probabilities of NAMES, as a reading takes them."""
    terms = np.arange(len(NAMES))
    standing = model.standing.probabilities(terms, 1.0 / UNSEEN_WORDS, now_s)
    return standing, model.running.probabilities(terms, standing, now_s)


@given(items=ITEMS)
@settings(max_examples=40, deadline=None)
def test_without_decay_many_pulses_leave_the_backgrounds_of_a_single_one(items):
    timed, now_s = _timed(items)
    streamed, batch = _desk(ENDLESS_S, ENDLESS_S), _desk(ENDLESS_S, ENDLESS_S)
    for item in timed:
        streamed.step(item.received_s, [item])
    batch.step(now_s, timed)
    for one, other in zip(_backgrounds(streamed, now_s), _backgrounds(batch, now_s), strict=True):
        assert one == pytest.approx(other, rel=1e-8)
    assert streamed.words == batch.words


@given(items=ITEMS)
@settings(max_examples=40, deadline=None)
def test_with_decay_counts_are_the_sum_of_every_words_own_weight(items):
    timed, now_s = _timed(items)
    model = _desk(28 * DAY_S, DAY_S)
    for item in timed:
        model.step(item.received_s, [item])
    for background, half_life_s in ((model.standing, 28 * DAY_S), (model.running, DAY_S)):
        expected = np.zeros(len(NAMES))
        for item in timed:
            weight = 0.5 ** ((now_s - item.published_s) / half_life_s)
            for name, count in item.terms.items():
                expected[NAMES.index(name)] += weight * count
        counted = background.counts.at(np.arange(len(NAMES)), now_s)
        assert counted == pytest.approx(expected, rel=1e-9, abs=1e-12)
        assert background.counts.total_at(now_s)[0] == pytest.approx(expected.sum(), abs=1e-12)


@given(items=ITEMS, later_days=st.floats(0.0, 200.0))
@settings(max_examples=40, deadline=None)
def test_backgrounds_sum_to_one_over_seen_and_unseen_words(items, later_days):
    timed, now_s = _timed(items)
    model = _desk(28 * DAY_S, DAY_S)
    for item in timed:
        model.step(item.received_s, [item])
    now_s += later_days * DAY_S
    for values, background in zip(
        _backgrounds(model, now_s), (model.standing, model.running), strict=True
    ):
        # A word outside NAMES has the base's probability alone; there are so many of them.
        base = model.standing.probabilities(np.array([10**6]), 1.0 / UNSEEN_WORDS, now_s)
        unseen = base if background is model.running else 1.0 / UNSEEN_WORDS
        outside = background.probabilities(np.array([10**6]), unseen, now_s)[0]
        assert values.sum() + (UNSEEN_WORDS - len(NAMES)) * outside == pytest.approx(1.0, rel=1e-9)
        assert (values > 0).all()


@given(late_days=st.floats(0.0, 300.0), words=WORDS.filter(bool))
@settings(max_examples=40, deadline=None)
def test_a_late_item_leaves_what_it_would_have_left_on_its_day(late_days, words):
    prompt, late = _desk(28 * DAY_S, DAY_S), _desk(28 * DAY_S, DAY_S)
    before = _item(1, {"word0": 3}, START_S)
    for model in (prompt, late):
        model.step(START_S, [before])
    published_s = START_S + HOUR_S
    now_s = published_s + late_days * DAY_S
    prompt.step(published_s, [_item(2, words, published_s)])
    late.step(now_s, [_item(2, words, now_s, published_s)])
    for one, other in zip(_backgrounds(prompt, now_s), _backgrounds(late, now_s), strict=True):
        assert one == pytest.approx(other, rel=1e-9)


def test_an_item_published_before_the_first_weighs_less_than_it():
    model = _desk(28 * DAY_S, DAY_S)
    model.step(START_S, [_item(1, {"word0": 1}, START_S)])
    model.step(START_S, [_item(2, {"word1": 1}, START_S, START_S - 28 * DAY_S)])
    assert model.standing.counts.at(np.arange(2), START_S) == pytest.approx([1.0, 0.5])
    assert model.running.counts.at(np.arange(2), START_S) == pytest.approx([1.0, 2.0**-28])


def test_a_pulses_items_are_read_against_the_backgrounds_before_it():
    alone, beside = _desk(28 * DAY_S, DAY_S), _desk(28 * DAY_S, DAY_S)
    for model in (alone, beside):
        model.step(START_S, [_item(1, {"word0": 9, "word1": 4}, START_S)])
    now_s = START_S + 60.0
    item = _item(2, {"word0": 1, "word2": 2}, now_s)
    others = [_item(3 + n, {"word2": 5, "word3": 1}, now_s) for n in range(20)]
    assert alone.step(now_s, [item]).readings[0] == beside.step(now_s, [*others, item]).readings[-1]
    again = _item(50, {"word0": 1, "word2": 2}, now_s + 60.0)
    after = (model.step(now_s + 60.0, [again]).readings[0].own for model in (alone, beside))
    assert next(after) > next(after)  # where twenty others have said it too, it is less its own
