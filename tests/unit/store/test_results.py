"""Readings, topics and stories as a pulse leaves them."""

from dataclasses import replace

import pytest

from vanner.errors import DatabaseError
from vanner.store.overview import Counts, DeskActivity, counts, desk_activity, item_count
from vanner.store.pulses import keep_readings, keep_stories
from vanner.store.schema import story
from vanner.store.stories import ITEMS_SHOWN, raised_guids, story_line, story_lines

START_S = 1_756_713_600.0
TOPICS = "SELECT item_id, term FROM item_topics ORDER BY item_id, term"
PARTS = (
    "SELECT alert_id, item_id FROM alert_items ORDER BY alert_id, item_id",
    "SELECT alert_id, term FROM alert_terms ORDER BY alert_id, term",
)


@pytest.fixture
def read_items(database):
    def run(readings, revised=(), desk="harbour"):
        with database.write() as connection:
            keep_readings(connection, desk, readings, revised)

    return run


@pytest.fixture
def tell(database):
    """Keeps stories of a pulse, each time as a process that knows no ids yet, unless given."""

    def run(stories, end_s, ids=None, desk="harbour"):
        ids = {} if ids is None else ids
        with database.write() as connection:
            keep_stories(connection, desk, stories, end_s, ids)
        return ids

    return run


def test_a_reading_and_its_topics_are_kept_as_made(read_items, receive, make_reading, sql):
    number = receive("a")
    read_items([make_reading(number, "dredger", "aground")])
    assert sql("SELECT * FROM readings") == [("harbour", number, 8, 0.4, 0.3, 0.2, 0.1, 9.5)]
    assert sql("SELECT * FROM item_topics ORDER BY term") == [
        ("harbour", number, "aground", 0.5, 0.75, 2),
        ("harbour", number, "dredger", 0.5, 0.75, 2),
    ]


def test_a_reading_may_have_no_topics_and_a_pulse_no_readings(
    read_items, receive, make_reading, sql
):
    read_items([])
    read_items([make_reading(receive("a"), words=0)])
    assert sql("SELECT words FROM readings") == [(0,)]
    assert sql(TOPICS) == []


def test_a_revision_takes_the_place_of_the_earlier_reading(read_items, receive, make_reading, sql):
    one, other = receive("a"), receive("b")
    read_items([make_reading(one, "dredger"), make_reading(other, "lantern")])
    read_items([make_reading(one, "tug", words=3)], revised=[one])
    assert sql(TOPICS) == [(one, "tug"), (other, "lantern")]
    assert sql("SELECT item_id, words FROM readings ORDER BY item_id") == [(one, 3), (other, 8)]


def test_of_two_revisions_in_one_pulse_the_last_reading_stands(
    read_items, receive, make_reading, sql
):
    one = receive("a")
    read_items([make_reading(one, "dredger"), make_reading(one, "tug")], revised=[one])
    assert sql(TOPICS) == [(one, "tug")]


def test_desks_read_an_item_independently(read_items, receive, make_reading, sql):
    one = receive("a")
    read_items([make_reading(one, "dredger")])
    read_items([make_reading(one, "tug")], desk="town")
    read_items([make_reading(one, "barge")], revised=[one], desk="town")
    assert sql("SELECT desk, term FROM item_topics ORDER BY desk") == [
        ("harbour", "dredger"),
        ("town", "barge"),
    ]


def test_a_second_reading_that_is_no_revision_is_refused(read_items, receive, make_reading, sql):
    one = receive("a")
    read_items([make_reading(one, "dredger")])
    with pytest.raises(DatabaseError):
        read_items([make_reading(one, "tug")])
    assert sql(TOPICS) == [(one, "dredger")]


def test_hours_count_items_in_which_a_term_is_mostly_the_items_own(
    read_items, receive, make_reading, sql
):
    early, late = receive("a", START_S - 1), receive("b", START_S + 3599)
    readings = [make_reading(early, "tug"), make_reading(late, "tug")]
    weak = replace(readings[1].topics[0], term="lantern", own_share=0.49)
    read_items([readings[0], replace(readings[1], topics=(*readings[1].topics, weak))])
    assert sql("SELECT * FROM term_hours ORDER BY hour") == [
        ("harbour", "tug", "2025-09-01T07:00:00Z", 1),
        ("harbour", "tug", "2025-09-01T08:00:00Z", 1),
    ]


def test_a_story_below_the_threshold_is_noted_and_no_alert(tell, receive, make_story, sql):
    tell([make_story(1, {receive("a"): START_S})], START_S)
    assert sql("SELECT story_id, desk, noted_at, bits, items, sources FROM noted") == [
        (1, "harbour", "2025-09-01T08:00:00Z", 20.0, 1, 1)
    ]
    assert [sql(query) for query in ("SELECT * FROM alerts", *PARTS)] == [[], [], []]


def test_a_story_grows_over_pulses_and_keeps_its_number(tell, receive, make_story, sql):
    one, other = receive("a"), receive("b", source="mill-desk")
    first = make_story(1, {one: START_S})
    grown = make_story(
        1, {one: START_S, other: START_S + 60}, raised_s=START_S + 60, terms=("dredger", "tug")
    )
    assert tell([first], START_S) == tell([grown], START_S + 60) == {1: 1}
    assert sql("SELECT * FROM noted") == []
    assert sql("SELECT alert_id, state, raised_at, items, sources FROM alerts") == [
        (1, "raised", "2025-09-01T08:01:00Z", 2, 2)
    ]
    assert [sql(query) for query in PARTS] == [[(1, one), (1, other)], [(1, "dredger"), (1, "tug")]]


def test_a_cleared_alert_stays_an_alert(tell, receive, make_story, sql):
    made = make_story(1, {receive("a"): START_S}, raised_s=START_S)
    tell([made], START_S)
    tell([replace(made, cleared_s=START_S + 600, terms=())], START_S + 600)
    assert sql("SELECT state, items FROM alerts") == [("cleared", 1)]
    assert sql(PARTS[1]) == []


def test_a_pulse_may_begin_and_continue_stories_of_several_desks(tell, receive, make_story, sql):
    one, other = receive("a"), receive("b")
    ids = tell([make_story(1, {one: START_S})], START_S)
    both = [
        make_story(1, {one: START_S, other: START_S + 60}),
        make_story(2, {other: START_S + 60}),
    ]
    tell(both, START_S + 60, ids)
    tell([make_story(1, {other: START_S + 60}, desk="town")], START_S + 60, desk="town")
    tell([], START_S + 120)
    assert sql("SELECT desk, number, story_id FROM story ORDER BY story_id") == [
        ("harbour", 1, ids[1]),
        ("harbour", 2, ids[2]),
        ("town", 1, 3),
    ]
    assert sql("SELECT story_id, count(*) FROM story_item GROUP BY story_id") == [
        (1, 2),
        (2, 1),
        (3, 1),
    ]


def test_a_story_of_an_unknown_item_is_refused(tell, make_story, sql):
    with pytest.raises(DatabaseError, match="FOREIGN KEY"):
        tell([make_story(1, {77: START_S})], START_S)
    assert sql("SELECT count(*) FROM story") == [(0,)]


def test_a_story_reads_as_it_stands_with_its_newest_items_last(database, tell, receive, make_story):
    added = {
        receive(f"item {place}", title=f"Barge {place}"): START_S + place
        for place in range(ITEMS_SHOWN + 3)
    }
    made = make_story(1, added, raised_s=START_S)
    for time_s in added.values():
        tell([made], time_s)
    with database.read() as connection:
        line = story_line(connection, 1, 1e12)
    assert (line.state, line.headline, line.item_count, line.source_count) == (
        "raised", "Barge 0", ITEMS_SHOWN + 3, 1,
    )  # fmt: skip
    assert [one.title for one in line.items] == [
        f"Barge {place}" for place in range(3, ITEMS_SHOWN + 3)
    ]
    assert [term.term for term in line.terms] == ["aground", "dredger"]


def test_an_item_without_a_title_is_told_by_the_beginning_of_its_text(
    database, tell, receive, make_story
):
    number = receive("a", text="The  tug\nwaits. " + "On and on. " * 20)
    tell([make_story(1, {number: START_S})], START_S)
    with database.read() as connection:
        (line,) = story_lines(connection, 1e12, story.c.raised_s.is_(None))
    assert line.headline == line.items[0].title
    assert line.headline.startswith("The tug waits. On and on.")
    assert len(line.headline) <= 120


def test_a_story_shows_its_items_as_they_were_received_before_its_time(
    database, tell, receive, make_story
):
    number = receive("a", START_S + 5, title="Dredger aground")
    receive("a", START_S + 60, title="Dredger afloat")
    tell([make_story(1, {number: START_S + 60})], START_S + 60)

    def titles(as_of_s):
        with database.read() as connection:
            line = story_line(connection, 1, as_of_s)
        return {line.headline, *(one.title for one in line.items)}

    assert titles(START_S + 60) == {"Dredger aground"}
    assert titles(START_S + 61) == {"Dredger afloat"}


def test_guids_are_told_of_alerts_only(database, tell, receive, make_story):
    one, other = receive("a"), receive("b")
    tell(
        [make_story(1, {one: START_S}), make_story(2, {other: START_S}, raised_s=START_S)], START_S
    )
    with database.read() as connection:
        assert raised_guids(connection) == {2: ("harbour", frozenset({"b"}))}


def test_the_overview_counts_items_alerts_and_noted_stories(database, tell, receive, make_story):
    assert counts(database) == Counts(0, 0, 0)
    assert desk_activity(database, START_S) == []
    one = receive("a", text="first")
    receive("a", text="second")
    made = [
        *(make_story(number, {one: START_S}) for number in (1, 2, 3)),
        *(make_story(number, {one: START_S}, raised_s=START_S) for number in (4, 5)),
        make_story(6, {one: START_S}, raised_s=START_S - 60, cleared_s=START_S),
    ]
    tell(made, START_S)
    assert item_count(database) == 2
    assert counts(database) == Counts(items=1, alerts=3, noted=3)
    assert desk_activity(database, START_S - 90) == [DeskActivity("harbour", 3, 2, 3)]
    assert desk_activity(database, START_S - 60) == [DeskActivity("harbour", 2, 2, 3)]
    assert desk_activity(database, START_S) == [DeskActivity("harbour", 0, 2, 0)]
