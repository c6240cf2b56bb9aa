"""What counts as news: shared sources, copies, revisions and taught archives."""

import pytest

from vanner.daemon.archiving import teach
from vanner.daemon.engine import Engine
from vanner.records import RawItem

START_S = 1_700_006_400.0
TALK_ITEMS = 48
EVENT_S = START_S + TALK_ITEMS * 300.0


@pytest.fixture
def talk(arrival):
    """Four hours of ordinary talk, an item every five minutes."""
    return [
        arrival(
            f"t{n}", f"tide board ferry timetable monday word{n % 20} word{n % 7}",
            START_S + 300.0 * n,
        )
        for n in range(TALK_ITEMS)
    ]  # fmt: skip


@pytest.fixture
def event(arrival):
    """Builds items about one new thing, a minute apart."""

    def build(count=8, at_s=EVENT_S, **told):
        return [
            arrival(f"e{n}", f"tide sinkhole quarry cordon ref{n}", at_s + 60.0 * n, **told)
            for n in range(count)
        ]

    return build


def _run(database, plans, until_s=EVENT_S + 3600.0):
    engine = Engine(database, plans, 60.0, pulses_per_commit=100)
    engine.begin(START_S)
    engine.advance(until_s)


def _event_stories(rows):
    alerts = {row[0] for row in rows["alert_terms"] if row[1] in {"sinkhole", "quarry", "cordon"}}
    return [row for row in rows["alerts"] if row[0] in alerts]


def test_a_new_thing_raises_one_alert_at_each_desk_that_reads_its_source(
    open_database, feed, dump, plan, talk, event
):
    database = open_database()
    feed(database, [*talk, *event()])
    here, there = "harbour bulletin", "weather mast"
    _run(database, [plan("quay"), plan("hall", (here, there)), plan("mast", (there,))])
    rows = dump(database)
    assert sorted(row[1] for row in _event_stories(rows)) == ["hall", "quay"]
    assert {row[0] for row in rows["readings"]} == {"quay", "hall"}
    by_desk = [[row[1:] for row in rows["readings"] if row[0] == desk] for desk in ("quay", "hall")]
    assert by_desk[0] == by_desk[1]


def test_copies_in_other_sources_are_read_and_raise_nothing(
    open_database, feed, dump, plan, talk, arrival
):
    database = open_database()
    texts = ("cordon sinkhole quarry tide", "Tide: sinkhole, quarry -- cordon!")
    copies = [
        arrival(f"c{n}", texts[n % 2], EVENT_S + 60.0 * n, source="town gazette") for n in range(8)
    ]
    feed(database, [*talk, *copies])
    _run(database, [plan()])
    rows = dump(database)
    assert len(rows["readings"]) == TALK_ITEMS + 8
    assert not [row for row in rows["alert_terms"] + rows["noted"] if "sinkhole" in str(row)]


def test_revisions_of_one_item_raise_nothing_and_the_last_ones_reading_stands(
    open_database, feed, dump, plan, talk, arrival
):
    database = open_database()
    revised = [
        arrival("r", f"tide sinkhole quarry cordon {'more ' * n}", EVENT_S + 60.0 * n)
        for n in range(8)
    ]
    feed(database, [*talk, *revised])
    _run(database, [plan()])
    rows = dump(database)
    assert _event_stories(rows) == []
    ((_, number, words, *_),) = [row for row in rows["readings"] if row[1] == TALK_ITEMS + 1]
    assert words == 4 + 7
    assert {row[5] for row in rows["item_topics"] if row[1:3] == (number, "more")} == {7}


def test_an_archive_of_thousands_of_items_teaches_and_raises_nothing(
    open_database, feed, dump, plan, talk, event
):
    database = open_database()
    feed(database, talk)
    _run(database, [plan()], EVENT_S)
    before = dump(database)
    faults, counted = [], []
    archive = [
        RawItem(
            f"old{n}",
            "",
            f"tide {'sinkhole quarry cordon' if n % 3 == 0 else 'ferry board'} old{n % 900}",
            published_s=EVENT_S - 86400.0 * 40 + n * 1200.0,
        )
        for n in range(2500)
    ]
    taken = teach(
        database, archive, "the archive", 60.0, lambda: EVENT_S, faults.append, counted.append
    )
    assert (taken.new, sum(counted), faults) == (2500, 2500, [])
    _run(database, [plan()], EVENT_S + 120.0)
    taught = dump(database)
    for view in ("alerts", "noted", "alert_items"):
        assert taught[view] == before[view]
    assert [row[8] for row in taught["items"]].count("taught") == 2500
    assert len(taught["readings"]) == TALK_ITEMS + 2500
    # Every third item of that source says these words: four more of them are nothing new.
    feed(database, event(4, EVENT_S + 180.0))
    _run(database, [plan()], EVENT_S + 7200.0)
    assert _event_stories(dump(database)) == []


def test_the_same_items_without_that_archive_raise_an_alert(
    open_database, feed, dump, plan, talk, event
):
    database = open_database()
    feed(database, [*talk, *event(4, EVENT_S + 180.0)])
    _run(database, [plan()], EVENT_S + 7200.0)
    ((_, desk, _, raised_at, *_),) = _event_stories(dump(database))
    assert desk == "quay"
    assert raised_at <= "2023-11-15T04:10:00Z"


def test_an_archive_that_names_no_dates_or_nothing_at_all_still_teaches_the_rest(
    open_database, dump
):
    database = open_database()
    faults = []
    archive = [RawItem("a", "", "tide board"), RawItem("b"), RawItem("c", "Ferry", published_s=1.0)]
    taken = teach(
        database, archive, "the archive", 60.0, lambda: START_S, faults.append, lambda _: None
    )
    assert taken.new == 2
    assert len(faults) == 1
    assert sorted(row[2] for row in dump(database)["items"]) == ["a", "c"]
