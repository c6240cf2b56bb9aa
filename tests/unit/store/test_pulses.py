"""The clock of pulses, and which items wait in which pulse."""

from itertools import groupby

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from sqlalchemy import delete, insert

from vanner.store.pulses import (
    ClockState,
    clock_state,
    close_until,
    mark_read,
    pulses_between,
    start_clock,
)
from vanner.store.schema import item, item_revision

START_S = 1_756_713_600.0
OFFSETS_S = st.one_of(
    st.integers(0, 59), st.sampled_from([0.0, 59.999999, 0.000001]), st.floats(0, 59.99)
)
# (pulse, seconds into it) of each revision of each item; few pulses, so that they fill up.
RECEIPTS = st.lists(
    st.lists(st.tuples(st.integers(0, 4), OFFSETS_S), min_size=1, max_size=3), max_size=25
)


def fill(database, times_by_item):
    """Put items straight into the tables, whatever their order in time."""
    common = {"content_text": "", "published_s": 0.0, "date_credible": False, "title": ""}
    with database.write() as connection:
        connection.execute(delete(item_revision))
        connection.execute(delete(item))
        for number, times in enumerate(times_by_item, 1):
            row = {"item_id": number, "source": "quay-wire", "guid": f"item {number}"}
            connection.execute(
                insert(item), row | {"received_s": times[0], "latest_revision": len(times)}
            )
            connection.execute(
                insert(item_revision),
                [
                    common
                    | {
                        "item_id": number,
                        "revision": revision,
                        "received_s": time_s,
                        "content_digest": "",
                        "teaches": False,
                    }
                    for revision, time_s in enumerate(times, 1)
                ],
            )


def pulses(database, from_s, until_s, rows_a_fetch=2000):
    """(pulse end, [(item, revision)]) of each pulse."""
    found = pulses_between(database, from_s, until_s, 60.0, rows_a_fetch=rows_a_fetch)
    return [(end_s, [(one.item_id, one.revision) for one in items]) for end_s, items in found]


@settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(receipts=RECEIPTS, rows_a_fetch=st.integers(1, 30), first=st.integers(0, 2))
def test_any_receipts_in_any_fetches_give_every_item_once_by_pulse_in_order(
    database, receipts, rows_a_fetch, first
):
    times = [[START_S + 60 * pulse + offset for pulse, offset in one] for one in receipts]
    fill(database, times)
    from_s, until_s = START_S + 60 * first, START_S + 240
    ordered = sorted(
        (time_s, number, revision)
        for number, one in enumerate(times, 1)
        for revision, time_s in enumerate(one, 1)
        if from_s <= time_s < until_s
    )
    expected = [
        (START_S + 60 * (pulse + 1), [row[1:] for row in rows])
        for pulse, rows in groupby(ordered, lambda row: (row[0] - START_S) // 60)
    ]
    assert pulses(database, from_s, until_s, rows_a_fetch) == expected


def test_no_items_are_no_pulses(database):
    assert pulses(database, START_S, START_S + 600) == []


def test_a_pulse_larger_than_a_fetch_comes_whole(database):
    fill(database, [[START_S + 10 + number / 10] for number in range(25)] + [[START_S + 70]])
    assert pulses(database, START_S, START_S + 600, rows_a_fetch=10) == [
        (START_S + 60, [(number, 1) for number in range(1, 26)]),
        (START_S + 120, [(26, 1)]),
    ]


def test_a_time_on_a_boundary_belongs_to_the_pulse_that_begins(database):
    fill(database, [[START_S], [START_S + 60], [START_S + 120]])
    assert pulses(database, START_S, START_S + 120) == [
        (START_S + 60, [(1, 1)]),
        (START_S + 120, [(2, 1)]),
    ]


def test_items_that_arrive_while_pulses_are_read_do_not_disturb_them(database, receive):
    fill(database, [[START_S + 10], [START_S + 70]])
    found = pulses_between(database, START_S, START_S + 120, 60.0, rows_a_fetch=1)
    first_end_s, _ = next(found)
    receive("late", START_S + 130)
    assert [first_end_s, *(end_s for end_s, _ in found)] == [START_S + 60, START_S + 120]


def test_a_stored_item_is_what_was_received(database, receive):
    number = receive("a", START_S + 5, title="Late ferry", text="It waits.", teaches=True)
    ((_, (one,)),) = pulses_between(database, START_S, START_S + 60, 60.0)
    assert (one.item_id, one.source, one.guid, one.title) == (
        number, "quay-wire", "a", "Late ferry",
    )  # fmt: skip
    assert (one.content_text, one.received_s, one.teaches) == ("It waits.", START_S + 5, True)
    assert one.language == "en"


def test_a_new_database_has_no_clock(database):
    with database.read() as connection:
        assert clock_state(connection) is None


def test_the_clock_comes_back_as_it_was_started(database):
    told = ClockState(60.0, START_S + 60, START_S, "replay")
    with database.write() as connection:
        start_clock(connection, ClockState(30.0, 0.0, 0.0, "service"))
        start_clock(connection, told)
    with database.read() as connection:
        assert clock_state(connection) == told


@pytest.mark.parametrize("move", [close_until, mark_read])
def test_closing_and_reading_only_move_forward(database, start_clock_at, move):
    start_clock_at(START_S)
    with database.write() as connection:
        move(connection, START_S + 120)
        move(connection, START_S + 60)
    with database.read() as connection:
        state = clock_state(connection)
    moved = (state.closed_s, state.read_s)
    assert moved == ((START_S + 120, START_S) if move is close_until else (START_S, START_S + 120))


def test_an_item_waits_until_its_pulse_is_read(database, receive, sql, start_clock_at):
    start_clock_at(START_S)
    receive("a", START_S + 10)
    receive("b", START_S + 20, teaches=True)
    status = "SELECT guid, status FROM items ORDER BY guid"
    assert sql(status) == [("a", "waiting"), ("b", "waiting")]
    with database.write() as connection:
        mark_read(connection, START_S + 60)
    assert sql(status) == [("a", "read"), ("b", "taught")]
