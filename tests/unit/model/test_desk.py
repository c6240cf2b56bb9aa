"""A desk's pulses: readings of everything, stories only from what is new, dated and warm."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.model.desk import DeskModel
from vanner.model.windows import SPANS_S

HOUR_S = 3600.0
DAY_S = 24 * HOUR_S
START_S = 1_700_006_400.0
SPANS = len(SPANS_S)
TALK = "tide harbour board meets about the new ferry timetable on monday"


@pytest.fixture
def talking(parameters, term_item):
    """Builds a desk that has heard a day of ordinary talk, an item an hour."""

    def build(**changes):
        model = DeskModel(parameters(**changes))
        for hour in range(24):
            at_s = START_S + hour * HOUR_S
            model.step(at_s, [term_item(hour + 1, f"{TALK} hour{hour}", at_s)])
        return model, START_S + DAY_S

    return build


def _burst(model, term_item, at_s, count=6, first=1000, **changes):
    """Items about one new thing, a pulse each; every story told."""
    told = []
    for number in range(count):
        item = term_item(
            first + number, f"tide meets sinkhole quarry ref{first + number}", at_s, **changes
        )
        told += model.step(at_s, [item]).stories
        at_s += 60.0
    return told, at_s


def test_a_thing_that_breaks_out_is_raised_once_with_its_words_and_items(talking, term_item):
    model, now_s = talking()
    told, _ = _burst(model, term_item, now_s)
    assert {story.number for story in told} == {1}
    last = told[-1]
    assert len({story.raised_s for story in told if story.raised_s is not None}) == 1
    assert {term.term for term in last.terms} >= {"sinkhole", "quarry"}
    assert [item.item_id for item in last.items] == list(range(1000, 1006))
    assert last.headline_item_id in range(1000, 1006)
    assert [term.bits for term in last.terms] == sorted((t.bits for t in last.terms), reverse=True)


def test_ordinary_talk_raises_nothing(talking, term_item):
    model, now_s = talking()
    for number in range(6):
        item = term_item(900 + number, f"{TALK} hour{number}", now_s + number * 60.0)
        assert model.step(now_s + number * 60.0, [item]).stories == ()


@pytest.mark.parametrize("step_s", [60.0, 97.0])
def test_a_story_clears_at_the_pulse_end_after_its_last_item_and_the_clearing_time(
    talking, term_item, step_s
):
    model, now_s = talking(pulse_s=step_s, clear_after_s=5000.0)
    now_s = np.ceil(now_s / step_s) * step_s
    told, _ = _burst(model, term_item, now_s)
    due_s = model.next_clearing_s()
    assert due_s == np.ceil((told[-1].last_activity_s + 5000.0) / step_s) * step_s
    assert model.step(due_s - step_s, []).stories == ()
    (cleared,) = model.step(due_s, []).stories
    assert (cleared.cleared_s, cleared.raised_s) == (due_s, told[-1].raised_s)
    assert model.next_clearing_s() is None


def test_a_pulse_that_closes_late_clears_at_the_time_that_was_due(talking, term_item):
    model, now_s = talking()
    _burst(model, term_item, now_s)
    due_s = model.next_clearing_s()
    (cleared,) = model.step(due_s + 5 * HOUR_S, []).stories
    assert cleared.cleared_s == due_s


def test_what_comes_again_after_clearing_is_a_new_story(talking, term_item):
    model, now_s = talking(clear_after_s=HOUR_S)
    _burst(model, term_item, now_s)
    due_s = model.next_clearing_s()
    model.step(due_s, [])
    told, _ = _burst(model, term_item, due_s + 60.0, first=2000)
    assert {story.number for story in told} == {2}
    assert told[-1].noted_s > due_s


def test_a_desk_is_silent_until_it_has_both_the_days_and_the_words(parameters, term_item):
    told = {"warm_up_s": DAY_S, "warm_up_words": 20, "warm_up_at_most_s": 5 * DAY_S}
    model = DeskModel(parameters(**told))
    assert not model.is_warm(START_S + 9 * DAY_S)  # it has read nothing yet
    model.step(START_S, [term_item(1, TALK, START_S)])
    assert not model.is_warm(START_S + DAY_S)  # 11 words
    model.step(START_S + 60.0, [term_item(2, TALK, START_S + 60.0)])
    assert not model.is_warm(START_S + DAY_S - 1.0)
    assert model.is_warm(START_S + DAY_S)


def test_a_desk_with_few_words_speaks_after_the_longest_warm_up(parameters, term_item):
    told = {"warm_up_s": DAY_S, "warm_up_words": 10**6, "warm_up_at_most_s": 5 * DAY_S}
    model = DeskModel(parameters(**told))
    model.step(START_S, [term_item(1, TALK, START_S)])
    assert not model.is_warm(START_S + 5 * DAY_S - 1.0)
    assert model.is_warm(START_S + 5 * DAY_S)


def test_a_warming_desk_reads_and_tells_no_story(parameters, term_item):
    model = DeskModel(parameters(warm_up_s=DAY_S, warm_up_at_most_s=DAY_S))
    told, _ = _burst(model, term_item, START_S)
    assert told == []
    assert model.words == 30
    assert model.budget.since_s is None


def test_taught_items_warm_a_desk_by_their_own_dates(parameters, term_item):
    told = {"warm_up_s": DAY_S, "warm_up_words": 20, "warm_up_at_most_s": 9 * DAY_S}
    model = DeskModel(parameters(**told))
    taught = [
        term_item(n, TALK, START_S, published_s=START_S - n * DAY_S, teaches=True)
        for n in (1, 2, 3)
    ]
    model.step(START_S, taught)
    assert model.is_warm(START_S)


def test_a_revision_is_read_but_counted_neither_as_words_nor_as_support(talking, term_item):
    model, now_s = talking()
    before = (model.words, model.windows.end, model.standing.counts.total_at(now_s)[0])
    told, later_s = _burst(model, term_item, now_s, revision=2)
    assert told == []
    assert (model.words, model.windows.end) == before[:2]
    assert model.standing.counts.total_at(now_s)[0] == pytest.approx(before[2])
    result = model.step(later_s, [term_item(1, "sinkhole quarry", later_s, revision=3)])
    assert [(one.item_id, one.words) for one in result.readings] == [(1, 2)]
    assert {topic.term for topic in result.readings[0].topics} == {"sinkhole", "quarry"}


def test_taught_items_raise_nothing_and_their_words_are_no_longer_new(talking, term_item):
    model, now_s = talking()
    end = model.windows.end
    taught = [
        term_item(1000 + n, f"tide meets sinkhole quarry ref{n}", now_s, teaches=True)
        for n in range(60)
    ]
    assert model.step(now_s, taught).stories == ()
    assert model.windows.end == end
    numbers = model.number_terms(["sinkhole"])
    assert model.windows.histories[-1].at(numbers, now_s)[0] == pytest.approx(60)
    told, _ = _burst(model, term_item, now_s, count=4, first=5000)
    assert told == []


def test_items_published_before_the_longest_span_teach_only(talking, term_item):
    model, now_s = talking()
    end = model.windows.end
    told, _ = _burst(model, term_item, now_s, published_s=now_s - SPANS_S[-1] - 1.0)
    assert told == []
    assert model.windows.end == end


def test_copies_are_read_each_but_support_once_until_a_day_has_passed(talking, term_item):
    model, now_s = talking()
    told, later_s = _burst(model, term_item, now_s, copy_key="the same dispatch")
    assert told == []
    numbers = model.number_terms(["sinkhole"])
    assert model.windows.counts[SPANS - 1, numbers].tolist() == [1.0]
    again_s = now_s + SPANS_S[-1] + 60.0
    item = term_item(3000, "tide sinkhole", again_s, copy_key="the same dispatch")
    assert len(model.step(again_s, [item]).readings) == 1
    assert model.windows.counts[SPANS - 1, numbers].tolist() == [1.0]
    assert model.windows.item_ids_holding(int(numbers[0]), SPANS - 1) == [3000]
    assert later_s < again_s


def test_an_empty_item_has_an_empty_reading_and_changes_no_word(talking, term_item):
    model, now_s = talking()
    words = model.words
    (reading,) = model.step(now_s, [term_item(500, "", now_s)]).readings
    assert (reading.words, reading.topics, reading.bits_per_word) == (0, (), 0.0)
    assert (reading.standing, reading.running, reading.house, reading.own) == (0, 0, 0, 0)
    assert model.words == words


def test_an_empty_pulse_says_nothing(parameters):
    result = DeskModel(parameters()).step(START_S, [])
    assert (result.readings, result.stories) == ((), ())


WORDS = st.dictionaries(
    st.integers(0, 60).map("word{}".format), st.integers(1, 9), min_size=1, max_size=50
)


@given(items=st.lists(WORDS, min_size=1, max_size=8))
@settings(max_examples=40, deadline=None)
def test_shares_of_a_reading_and_weights_of_its_topics_sum_to_one(parameters, term_item, items):
    model = DeskModel(parameters())
    for pulse in range(3):
        now_s = START_S + pulse * 60.0
        batch = [term_item(10 * pulse + n, words, now_s) for n, words in enumerate(items)]
        for reading, words in zip(model.step(now_s, batch).readings, items, strict=True):
            shares = (reading.standing, reading.running, reading.house, reading.own)
            assert sum(shares) == pytest.approx(1.0, abs=1e-9)
            assert min(shares) >= 0.0
            assert reading.words == sum(words.values())
            assert sum(topic.weight for topic in reading.topics) == pytest.approx(1.0)
            assert {t.term: t.count for t in reading.topics}.items() <= words.items()
            assert reading.bits_per_word > 0.0


def test_stories_do_not_depend_on_the_order_of_a_pulses_items(parameters, stream):
    outcomes = []
    for direction in (1, -1):
        model, told = DeskModel(parameters()), {}
        for now_s, items in stream(5, hours=16):
            for story in model.step(now_s, items[::direction]).stories:
                told[story.number] = story
        outcomes.append(
            [
                (s.noted_s, s.raised_s, {t.term for t in s.terms}, {i.item_id for i in s.items})
                for s in told.values()
            ]
        )
    assert outcomes[0] == outcomes[1]
    assert sum(raised is not None for _, raised, _, _ in outcomes[0]) >= 2


def test_a_copy_may_own_a_word_that_its_original_did_not(parameters, term_item):
    # The word is common for an hour, through taught items, when the original comes; at the
    # copy's time that has faded. Nothing in the window has ever held the word as its own.
    model = DeskModel(parameters(running_half_life_s=HOUR_S, standing_half_life_s=HOUR_S))
    names = [f"word{n}" for n in range(2000)]
    model.step(START_S, [term_item(1, dict.fromkeys(names, 1), START_S, teaches=True)])
    taught = [term_item(2 + n, {"sluice": 40}, START_S, teaches=True) for n in range(9)]
    model.step(START_S, taught)
    words = {"sluice": 1, "word0": 5, "word1": 5, "word2": 5}
    shares = []
    for number, at_s in ((100, START_S + 60.0), (101, START_S + 20 * HOUR_S)):
        item = term_item(number, words, at_s, copy_key="the same dispatch")
        (reading,) = model.step(at_s, [item]).readings
        shares.append({t.term: t.own_share for t in reading.topics}.get("sluice", 0.0))
    assert shares[0] < 0.5 <= shares[1]
