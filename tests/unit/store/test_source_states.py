"""Cursors and failures of sources."""

import pytest

from vanner.store.source_states import (
    SourceState,
    cursor_of,
    keep_cursor,
    note_failure,
    register,
    source_names,
    source_states,
    stopped_reason,
)

NOW_S = 1_756_713_600.0
CURSOR = {"etag": 'W/"é:7"', "seen": ["a", "b"], "at_s": 1.5, "none": None}


@pytest.fixture
def write(database):
    def run(work, *arguments, **told):
        with database.write() as connection:
            return work(connection, *arguments, **told)

    return run


@pytest.fixture
def read(database):
    def run(work, *arguments):
        with database.read() as connection:
            return work(connection, *arguments)

    return run


def test_a_source_begins_with_an_empty_cursor(read):
    assert read(cursor_of, "quay-wire") == {}
    assert read(stopped_reason, "quay-wire") is None


def test_a_cursor_comes_back_as_it_was_kept(write, read):
    write(keep_cursor, "quay-wire", "feed", CURSOR, NOW_S)
    assert read(cursor_of, "quay-wire") == CURSOR
    assert read(cursor_of, "mill-desk") == {}


def test_a_later_cursor_takes_the_place_of_the_earlier_one(write, read):
    write(keep_cursor, "quay-wire", "feed", CURSOR, NOW_S)
    write(keep_cursor, "quay-wire", "feed", {"etag": "8"}, NOW_S + 60)
    assert read(cursor_of, "quay-wire") == {"etag": "8"}


def test_a_cursor_is_not_kept_when_its_items_are_not(database, read):
    def fail():
        with database.write() as connection:
            keep_cursor(connection, "quay-wire", "feed", CURSOR, NOW_S)
            raise KeyError("items")

    with pytest.raises(KeyError):
        fail()
    assert read(cursor_of, "quay-wire") == {}


def test_failures_are_counted_and_leave_the_cursor(write, read):
    write(keep_cursor, "quay-wire", "feed", CURSOR, NOW_S)
    assert write(note_failure, "quay-wire", "feed", NOW_S + 60, "no answer") == 1
    assert write(note_failure, "quay-wire", "feed", NOW_S + 120, "status 503") == 2
    assert read(cursor_of, "quay-wire") == CURSOR
    (state,) = read(source_states)
    assert (state.failures, state.last_error, state.last_polled_s) == (2, "status 503", NOW_S + 120)


def test_a_source_may_fail_before_it_ever_succeeds(write, read):
    assert write(note_failure, "quay-wire", "feed", NOW_S, "no answer") == 1
    assert read(cursor_of, "quay-wire") == {}


def test_a_success_ends_a_row_of_failures(write, read):
    write(note_failure, "quay-wire", "feed", NOW_S, "no answer")
    write(keep_cursor, "quay-wire", "feed", CURSOR, NOW_S + 60)
    (state,) = read(source_states)
    assert (state.failures, state.last_error) == (0, None)
    assert write(note_failure, "quay-wire", "feed", NOW_S + 120, "no answer") == 1


def test_a_success_keeps_what_it_left_out_and_why_it_stopped(write, read):
    write(
        keep_cursor, "quay-wire", "feed", {}, NOW_S, last_error="entry 3: no text", stopped="gone"
    )
    assert read(stopped_reason, "quay-wire") == "gone"
    (state,) = read(source_states)
    assert (state.failures, state.last_error, state.stopped) == (0, "entry 3: no text", "gone")


def test_registering_makes_sources_known_and_leaves_known_ones(write, read):
    write(keep_cursor, "quay-wire", "feed", CURSOR, NOW_S)
    write(register, [("mill-desk", "folder"), ("quay-wire", "folder")])
    write(register, [])
    assert [(state.source, state.kind) for state in read(source_states)] == [
        ("mill-desk", "folder"),
        ("quay-wire", "feed"),
    ]
    assert read(cursor_of, "quay-wire") == CURSOR


def test_the_states_tell_how_many_items_a_source_brought(write, read, receive):
    write(register, [("mill-desk", "folder"), ("quay-wire", "feed")])
    receive("a", NOW_S)
    receive("b", NOW_S + 90)
    assert read(source_states) == [
        SourceState("mill-desk", "folder", None, 0, None, None, 0, None),
        SourceState("quay-wire", "feed", None, 0, None, None, 2, NOW_S + 90),
    ]


def test_names_are_those_of_sources_polled_or_heard_of(write, read, receive):
    write(register, [("mill-desk", "folder")])
    receive("a", source="quay-wire")
    assert read(source_names) == ("mill-desk", "quay-wire")


def test_the_public_view_counts_the_items_of_the_last_day_that_are_read(
    write, receive, sql, start_clock_at
):
    start_clock_at(NOW_S)
    write(register, [("quay-wire", "feed")])
    for guid, ago_s in [("a", 86_401), ("b", 86_400), ("c", 1), ("waits", 0)]:
        receive(guid, NOW_S - ago_s)
    write(note_failure, "quay-wire", "feed", NOW_S, "no answer")
    assert sql("SELECT * FROM source_health") == [
        (
            "quay-wire",
            "feed",
            "2025-09-01T08:00:00Z",
            "2025-09-01T08:00:00Z",
            2,
            1,
            "no answer",
        )
    ]
