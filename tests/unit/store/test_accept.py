"""Accepting items: the key decides what is new, and time never runs back into a closed pulse."""

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from vanner.errors import DatabaseError
from vanner.store.accept import Accepted, accept, receive_time_s
from vanner.store.pulses import ClockState, close_until, pulses_between, start_clock

START_S = 1_756_713_600.0
REVISIONS = (
    "SELECT guid, revision, r.received_s, content_text FROM item_revision r "
    "JOIN item USING (item_id) ORDER BY item_id, revision"
)


@pytest.fixture
def take(database):
    def run(items, received_s=START_S, *, teaches=False):
        with database.write() as connection:
            return accept(connection, items, received_s, teaches=teaches)

    return run


def test_a_new_item_is_kept_with_all_its_fields(take, make_item, sql):
    assert take([make_item("a", title="Late ferry")]) == Accepted(new=1)
    rows = sql("SELECT source, guid, title, language, published_at, received_at FROM items")
    moment = "2025-09-01T08:00:00Z"
    assert rows == [("quay-wire", "a", "Late ferry", "en", moment, moment)]
    assert sql("SELECT content_text FROM item_revision") == [("The ferry to Ostrand is late.",)]


def test_an_empty_batch_changes_nothing(take, sql):
    assert take([]) == Accepted()
    assert sql("SELECT count(*) FROM item") == [(0,)]


def test_the_same_text_again_is_known_and_writes_nothing(take, make_item, sql):
    take([make_item("a")])
    assert take([make_item("a")], START_S + 90) == Accepted(known=1)
    assert sql(REVISIONS) == [("a", 1, START_S, "The ferry to Ostrand is late.")]


def test_a_changed_text_is_a_revision_and_not_a_new_item(take, make_item, sql):
    take([make_item("a", "first")])
    assert take([make_item("a", "second")], START_S + 90) == Accepted(revised=1)
    assert sql(REVISIONS) == [("a", 1, START_S, "first"), ("a", 2, START_S + 90, "second")]
    assert sql("SELECT latest_revision, received_s FROM item") == [(2, START_S)]
    assert sql("SELECT count(*) FROM items") == [(1,)]


def test_a_text_that_is_changed_back_is_a_further_revision(take, make_item, sql):
    for text in ("first", "second", "first"):
        take([make_item("a", text)])
    assert [row[3] for row in sql(REVISIONS)] == ["first", "second", "first"]


def test_the_same_key_twice_in_a_batch_revises_itself(take, make_item, sql):
    batch = [make_item("a", "first"), make_item("a", "second"), make_item("a", "second")]
    assert take(batch) == Accepted(new=1, revised=1, known=1)
    assert [row[1::2] for row in sql(REVISIONS)] == [(1, "first"), (2, "second")]


def test_a_known_key_twice_in_a_batch_is_revised_in_their_order(take, make_item, sql):
    take([make_item("a", "zero")])
    batch = [make_item("a", "first"), make_item("b"), make_item("a", "second")]
    assert take(batch) == Accepted(new=1, revised=2)
    assert [row[3] for row in sql(REVISIONS)][:3] == ["zero", "first", "second"]


def test_one_guid_in_two_sources_is_two_items(take, make_item, sql):
    assert take([make_item("a"), make_item("a", source="mill-desk")]) == Accepted(new=2)
    assert sql("SELECT source, guid FROM item ORDER BY item_id") == [
        ("quay-wire", "a"),
        ("mill-desk", "a"),
    ]


def test_more_keys_than_one_query_takes_are_all_recognised(take, make_item):
    batch = [make_item(f"item {number}") for number in range(1201)]
    assert take(batch) == Accepted(new=1201)
    assert take(batch) == Accepted(known=1201)


def test_items_of_an_archive_are_received_when_they_were_published(take, make_item, sql):
    batch = [make_item("b", published_s=START_S + 50), make_item("a", published_s=START_S)]
    take(batch, None)
    assert [row[::2] for row in sql(REVISIONS)] == [("b", START_S + 50), ("a", START_S)]


def test_a_revision_that_an_archive_dates_earlier_keeps_the_later_time(take, make_item, sql):
    batch = [
        make_item("a", "first", published_s=START_S + 50),
        make_item("a", "second", published_s=START_S),
    ]
    take(batch, None)
    assert [row[1:3] for row in sql(REVISIONS)] == [(1, START_S + 50), (2, START_S + 50)]


def test_items_that_teach_are_marked_so(take, make_item, sql):
    take([make_item("a")], teaches=True)
    take([make_item("b")])
    assert sql("SELECT item_id, teaches FROM item_revision") == [(1, 1), (2, 0)]


def test_nothing_of_a_batch_is_kept_when_its_transaction_fails(database, make_item, sql):
    def fail():
        with database.write() as connection:
            accept(connection, [make_item("a")], START_S, teaches=False)
            raise KeyError("a")

    with pytest.raises(KeyError):
        fail()
    assert sql("SELECT count(*) FROM item") == [(0,)]


def test_an_item_that_the_table_cannot_hold_is_refused_with_its_batch(take, make_item, sql):
    with pytest.raises(DatabaseError, match="refused a statement"):
        take([make_item("a"), make_item("b", published_s=None)])
    assert sql("SELECT count(*) FROM item") == [(0,)]


def test_without_a_clock_an_item_is_received_now(database):
    with database.write() as connection:
        assert receive_time_s(connection, 12.5) == 12.5


def test_with_the_clock_set_back_an_item_is_received_in_the_first_open_pulse(
    database, start_clock_at
):
    start_clock_at(START_S)
    with database.write() as connection:
        assert receive_time_s(connection, START_S - 3600) == START_S
        close_until(connection, START_S + 120)
        assert receive_time_s(connection, START_S + 119.9) == START_S + 120
        assert receive_time_s(connection, START_S + 120.1) == START_S + 120.1


def test_a_closed_pulse_is_never_opened_again(database, start_clock_at):
    start_clock_at(START_S)
    with database.write() as connection:
        close_until(connection, START_S + 120)
        close_until(connection, START_S + 60)
        assert receive_time_s(connection, START_S) == START_S + 120


@settings(
    max_examples=30, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
@given(steps=st.lists(st.tuples(st.floats(-300, 300), st.booleans()), min_size=1, max_size=10))
def test_however_the_clock_jumps_a_pulse_that_was_read_gets_no_more_items(
    database, make_item, steps
):
    with database.write() as connection:
        for table in ("item_revision", "item"):
            connection.exec_driver_sql(f"DELETE FROM {table}")  # noqa: S608 - a name from above
        start_clock(connection, ClockState(60.0, START_S, START_S, "service"))
    now_s, read = START_S, []
    for number, (jump_s, closes) in enumerate(steps):
        now_s += jump_s
        with database.write() as connection:
            received_s = receive_time_s(connection, now_s)
            accept(connection, [make_item(f"item {number}")], received_s, teaches=False)
        if closes:
            end_s = max(START_S, now_s // 60 * 60)
            with database.write() as connection:
                close_until(connection, end_s)
            read.append((end_s, list(pulses_between(database, START_S, end_s, 60.0))))
    for end_s, pulses in read:
        assert list(pulses_between(database, START_S, end_s, 60.0)) == pulses
