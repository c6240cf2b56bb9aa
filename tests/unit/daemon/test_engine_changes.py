"""Desks that come, change or go between two runs of the engine, and items that are revised."""

import pytest

from vanner.clock import iso_utc
from vanner.daemon.engine import Engine
from vanner.store.checkpoints import desk_starts

START_S = 1_700_006_400.0
BEGIN_S = START_S - 600.0
END_S = START_S + 6 * 3600.0
MIDDLE_S = START_S + 2.6 * 3600.0
MIDDLE = "2023-11-15T02:36:00Z"


def _go_on(database, plans, until_s, **told):
    engine = Engine(database, plans, 60.0, **told)
    engine.begin(BEGIN_S)
    engine.advance(until_s)
    return engine


def _of(rows, view, desk, column=1):
    return [row for row in rows[view] if row[column] == desk]


def test_a_new_desk_begins_when_it_is_added_and_reads_nothing_from_before(
    open_database, feed, dump, reference, plans
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    _go_on(database, plans[:1], MIDDLE_S).save()
    _go_on(database, plans, END_S)
    with database.read() as connection:
        assert desk_starts(connection) == {"quay": BEGIN_S, "mast": MIDDLE_S}
    rows = dump(database)
    received = {item_id: at for item_id, *_, at, _ in rows["items"]}
    its_own = {item_id for desk, item_id, *_ in rows["readings"] if desk == "mast"}
    assert its_own == {
        item_id
        for desk, item_id, *_ in expected["readings"]
        if desk == "mast" and received[item_id] >= MIDDLE
    }
    # The first desk's results are those that it has alone; numbers of stories are shared out.
    assert _of(rows, "readings", "quay", 0) == _of(expected, "readings", "quay", 0)
    digests = [(row[2], row[3]) for row in rows["digests"] if row[1] == "mast"]
    assert digests == [("2023-11-15T04:30:00Z", MIDDLE)]


@pytest.fixture
def changed(plan):
    """The first desk with other parameters and other sources."""
    return (
        plan(
            "quay",
            ("harbour bulletin", "town gazette"),
            ("15 * * * *",),
            alerts_per_day=3.0,
            false_alerts_per_day=0.5,
            standing_half_life_s=7 * 86400.0,
            running_half_life_s=6 * 3600.0,
            background_share=0.8,
            clear_after_s=1800.0,
        ),
    )


def test_changed_parameters_hold_from_the_restart_on_and_change_nothing_before(
    open_database, feed, dump, reference, plans, changed
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    _go_on(database, plans[:1], MIDDLE_S)
    _go_on(database, changed, END_S)
    rows = dump(database)
    items = {row[0]: (row[1], row[7]) for row in rows["items"]}
    readings = _of(rows, "readings", "quay", 0)
    before = [row for row in readings if items[row[1]][1] < MIDDLE]
    after = [row for row in readings if items[row[1]][1] >= MIDDLE]
    # A reading stands until its item is revised; those revised later are read anew.
    guids = {row[0]: row[2] for row in rows["items"]}
    revised = {one.item.guid for one in arrivals if one.received_s >= MIDDLE_S}
    stands = {row for row in before if guids[row[1]] not in revised}
    assert len(stands) > 20
    assert stands <= set(expected["readings"])
    assert {items[row[1]][0] for row in after} == {"harbour bulletin", "town gazette"}
    assert not set(after) & set(expected["readings"])
    assert {row[2][14:16] for row in rows["digests"]} == {"00", "15"}


def test_after_a_change_a_restart_derives_the_same_rows_again(
    open_database, feed, dump, differences, reference, plans, changed
):
    arrivals, _ = reference(1)
    dumps = []
    for name, stops in (("whole.db", []), ("often.db", [2.7, 3.3, 3.4, 5.1])):
        database = open_database(name)
        feed(database, arrivals)
        _go_on(database, plans[:1], MIDDLE_S)
        for hours in stops:
            _go_on(database, changed, START_S + hours * 3600.0, pulses_per_checkpoint=9)
        _go_on(database, changed, END_S)
        dumps.append(dump(database))
    assert differences(*dumps) == {}


def test_another_pulse_length_at_a_restart_leaves_no_item_unread(
    open_database, feed, dump, reference, plan
):
    arrivals, _ = reference(1)
    database = open_database()
    feed(database, arrivals)
    _go_on(database, [plan()], MIDDLE_S)
    for pulse_s, until_s in ((7.0, MIDDLE_S + 3600.0), (300.0, END_S)):
        engine = Engine(database, [plan(pulse_s=pulse_s)], pulse_s)
        engine.begin(BEGIN_S)
        engine.advance(until_s)
    rows = dump(database)
    assert {row[1] for row in rows["readings"]} == {row[0] for row in rows["items"]}
    assert {row[8] for row in rows["items"]} == {"read"}


def test_a_desk_that_was_away_reads_nothing_of_that_time_and_goes_on(
    open_database, feed, dump, reference, plans
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    left_s = START_S + 3600.0
    _go_on(database, plans, left_s)
    _go_on(database, plans[:1], MIDDLE_S)
    _go_on(database, plans, END_S)
    rows = dump(database)
    received = {row[0]: row[7] for row in rows["items"]}
    whole = _of(expected, "readings", "mast", 0)
    before = [row for row in whole if received[row[1]] < iso_utc(left_s)]
    after = {row[1] for row in whole if received[row[1]] >= MIDDLE}
    told = _of(rows, "readings", "mast", 0)
    revised = {one.item.guid for one in arrivals if one.received_s >= MIDDLE_S}
    guids = {row[0]: row[2] for row in rows["items"]}
    stands = [row for row in before if guids[row[1]] not in revised]
    assert len(stands) > 5
    assert set(stands) <= set(told)
    assert after <= {row[1] for row in told}
    away = {row[1] for row in whole} - {row[1] for row in before} - after
    assert away
    assert not away & {row[1] for row in told if guids[row[1]] not in revised}
    assert _of(rows, "readings", "quay", 0) == _of(expected, "readings", "quay", 0)


def test_what_is_made_late_shows_items_as_they_stood_at_its_time(
    open_database, feed, dump, differences, arrival, plan
):
    plans = [plan(schedules=("0 * * * *",), recipients=("watch@quay.example",), warm_up_words=0)]
    talk = [
        arrival(f"t{n}", f"tide board ferry monday word{n}", START_S + 300.0 * n) for n in range(40)
    ]
    event_s = START_S + 40 * 300.0
    words = "sinkhole quarry cordon"
    event = [
        arrival(f"e{n}", f"{words} tide ref{n}", event_s + 30.0 * n, title="Sinkhole opens")
        for n in range(8)
    ]
    corrected = [
        arrival(f"e{n}", f"{words} tide ref{n}", event_s + 7200.0, title="Sinkhole closes")
        for n in range(8)
    ]
    until_s = event_s + 3 * 3600.0
    late, prompt = open_database("late.db"), open_database("prompt.db")
    feed(late, [*talk, *event, *corrected])
    _go_on(late, plans, until_s)
    feed(prompt, [*talk, *event])
    _go_on(prompt, plans, event_s + 5400.0)
    feed(prompt, corrected)
    _go_on(prompt, plans, until_s)
    assert dump(prompt)["alerts"]
    assert differences(dump(late), dump(prompt)) == {}
