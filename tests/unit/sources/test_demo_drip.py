"""The live minute: every item once, when it is due, however often one polls."""

import json
from itertools import pairwise

import pytest

from vanner.records import RawItem
from vanner.sources.demo import DripSource, demo_archive, demo_desks, demo_drip, demo_live
from vanner.sources.demo.compose import seeded

START_S = 1_950_048_000.0 + 3 * 3600  # at night, when some outlets are usually silent
RANDOM_STATE = 5
RNG = seeded(RANDOM_STATE, "polls")


def drained(source, moments):
    cursor, items = {}, []
    for now_s in moments:
        poll = source.poll(cursor, now_s)
        assert all(item.published_s <= now_s for item in poll.items)
        items.extend(poll.items)
        cursor = json.loads(json.dumps(dict(poll.cursor)))
    return items


@pytest.mark.parametrize("seconds", [10.0, 60.0, 600.0])
def test_live_items_lie_within_the_live_time_in_order(seconds):
    moments = [item.published_s for item in demo_live(START_S, seconds, RANDOM_STATE)]
    assert moments == sorted(moments)
    assert moments[0] >= START_S
    assert moments[-1] < START_S + seconds


def test_a_minute_has_about_one_and_a_half_items_a_second():
    assert 80 <= len(demo_live(START_S, 60.0, RANDOM_STATE)) <= 100


def test_the_live_time_never_falls_silent_for_long():
    moments = [item.published_s for item in demo_live(START_S, 60.0, RANDOM_STATE)]
    gaps = [later - earlier for earlier, later in pairwise(moments)]
    assert max(gaps) < 5


def test_the_same_arguments_give_the_same_live_items():
    assert demo_live(START_S, 60.0, RANDOM_STATE) == demo_live(START_S, 60.0, RANDOM_STATE)


def test_live_guids_differ_from_those_of_the_archive():
    archive = {item.guid for item in demo_archive(START_S - 2 * 86400, 2.0, RANDOM_STATE)}
    live = [item.guid for item in demo_live(START_S, 60.0, RANDOM_STATE)]
    assert len(set(live)) == len(live)
    assert not archive & set(live)


def test_there_is_one_source_for_each_source_of_the_desks():
    sources = demo_drip(START_S, 60.0, RANDOM_STATE)
    assert [source.name for source in sources] == [
        name for desk in demo_desks() for name in desk.sources
    ]
    assert all(item.source == source.name for source in sources for item in source.items)


@pytest.mark.parametrize(
    "moments",
    [
        [START_S + 60],
        [START_S + n for n in range(61)],
        [START_S + n / 10 for n in range(601)],
        [START_S - 5, START_S, START_S + 30, START_S + 30, START_S + 29, START_S + 90],
        [*sorted(START_S + RNG.random() * 60 for _ in range(25)), START_S + 60],
    ],
    ids=["once", "each second", "often", "back and forth", "at random"],
)
def test_every_item_comes_exactly_once_for_any_rhythm_of_polls(moments):
    sources = demo_drip(START_S, 60.0, RANDOM_STATE)
    given = [item for source in sources for item in drained(source, moments)]
    wanted = demo_live(START_S, 60.0, RANDOM_STATE)
    assert sorted(item.guid for item in given) == sorted(item.guid for item in wanted)


def test_a_poll_before_the_first_item_brings_nothing():
    source = demo_drip(START_S, 60.0, RANDOM_STATE)[0]
    poll = source.poll({}, START_S - 1)
    assert poll.items == ()
    assert source.poll(poll.cursor, START_S + 60).items == source.items
    source.close()


def test_an_item_at_the_moment_of_the_poll_is_due():
    item = RawItem(guid="one", title="One", published_s=100.0)
    assert DripSource("drip", (item,)).poll({}, 100.0).items == (item,)


def test_a_cursor_that_makes_no_sense_starts_again():
    item = RawItem(guid="one", title="One", published_s=100.0)
    for given in ("many", -3, None, True, 1.0):
        assert DripSource("drip", (item,)).poll({"given": given}, 100.0).items == (item,)
