"""Saved states of models, when desks began, and copying what was received."""

import pytest

from vanner.errors import DatabaseError
from vanner.store.checkpoints import (
    Checkpoint,
    begin_desk,
    checkpoint_of,
    desk_starts,
    keep_checkpoint,
)
from vanner.store.copying import copy_received, received_range_s
from vanner.store.database import Database
from vanner.store.source_states import cursor_of, keep_cursor

START_S = 1_756_713_600.0
EVERY_BYTE = bytes(range(256)) * 40


@pytest.fixture
def begun(database):
    with database.write() as connection:
        begin_desk(connection, "harbour", START_S)
        begin_desk(connection, "town", START_S + 60)
    return database


def saved_of(database, desk):
    with database.read() as connection:
        return checkpoint_of(connection, desk)


def test_a_desk_that_has_begun_does_not_begin_again(begun):
    with begun.write() as connection:
        begin_desk(connection, "harbour", START_S + 999)
    with begun.read() as connection:
        assert desk_starts(connection) == {"harbour": START_S, "town": START_S + 60}


@pytest.mark.parametrize("desk", ["harbour", "never seen"])
def test_a_desk_has_no_state_before_its_first(begun, desk):
    assert saved_of(begun, desk) is None


@pytest.mark.parametrize("state", [EVERY_BYTE, b"\x00"])
def test_a_state_comes_back_byte_for_byte(begun, state):
    saved = Checkpoint(START_S + 60.25, '{"zone": "Ægir"}', 3, state)
    with begun.write() as connection:
        keep_checkpoint(connection, "harbour", saved)
    assert saved_of(begun, "harbour") == saved
    assert saved_of(begun, "town") is None


def test_a_later_state_takes_the_place_of_the_earlier_one(begun):
    later = Checkpoint(START_S + 120, "{}", 2, b"later")
    with begun.write() as connection:
        keep_checkpoint(connection, "harbour", Checkpoint(START_S, "{}", 1, b"earlier"))
        keep_checkpoint(connection, "harbour", later)
    assert saved_of(begun, "harbour") == later
    with begun.read() as connection:
        assert desk_starts(connection)["harbour"] == START_S


def test_what_was_received_is_copied_with_revisions_and_cursors(begun, receive, tmp_path, sql):
    receive("a", START_S + 5, text="first")
    receive("a", START_S + 90, text="second", teaches=True)
    receive("b", START_S + 30)
    with begun.write() as connection:
        keep_cursor(connection, "quay-wire", "feed", {"etag": "7"}, START_S)
        keep_checkpoint(connection, "harbour", Checkpoint(START_S, "{}", 1, b"state"))
    copy = Database.open(tmp_path / "copy.db")
    with begun.read() as source, copy.write() as target:
        assert copy_received(source, target) == 2
    query = "SELECT * FROM item_revision ORDER BY item_id, revision"
    with copy.read() as connection:
        assert connection.exec_driver_sql(query).fetchall() == sql(query)
        assert cursor_of(connection, "quay-wire") == {"etag": "7"}
        assert desk_starts(connection) == {"harbour": START_S, "town": START_S + 60}
        # A state is derived and not received: the copy has to derive its own.
        assert checkpoint_of(connection, "harbour") is None
    copy.close()


def test_an_empty_database_is_copied_as_one(database, tmp_path):
    copy = Database.open(tmp_path / "copy.db")
    with database.read() as source, copy.write() as target:
        assert copy_received(source, target) == 0
    copy.close()


def test_copying_onto_items_is_refused(database, receive, tmp_path):
    receive("a")
    copy = Database.open(tmp_path / "copy.db")

    def copy_once():
        with database.read() as source, copy.write() as target:
            copy_received(source, target)

    copy_once()
    with pytest.raises(DatabaseError):
        copy_once()
    copy.close()


def test_the_range_received_spans_all_revisions(database, receive):
    with database.read() as connection:
        assert received_range_s(connection) is None
    receive("a", START_S + 5, text="first")
    receive("b", START_S)
    receive("a", START_S + 90, text="second")
    with database.read() as connection:
        assert received_range_s(connection) == (START_S, START_S + 90)
