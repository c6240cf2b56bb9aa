"""A disk that fills up, for SQLite itself: the failing transaction is undone and work goes on.

`PRAGMA max_page_count` on the writing connection makes SQLite answer SQLITE_FULL, the code
that it gives when the disk has no room.
"""

import sqlite3
from contextlib import closing

import pytest

from vanner.errors import DatabaseError
from vanner.store.accept import Accepted, accept
from vanner.store.database import Database
from vanner.store.source_states import cursor_of, keep_cursor

START_S = 1_756_713_600.0
MUCH = 1_000_000_000  # pages; SQLite lowers it to what it can count
FULL = "cannot be used: there is no room left on its disk; make room and start again."
VIEWS = "SELECT name FROM sqlite_master WHERE type = 'view' ORDER BY name"
TABLES = "SELECT name FROM sqlite_master WHERE type = 'table' ORDER BY name"


def fill_disk(database):
    """No page more than there are."""
    with database.write() as connection:
        pages = connection.exec_driver_sql("PRAGMA page_count").scalar()
        connection.exec_driver_sql(f"PRAGMA max_page_count = {pages}")


def make_room(database):
    with database.write() as connection:
        connection.exec_driver_sql(f"PRAGMA max_page_count = {MUCH}")


def take(database, items, cursor):
    """What a poll does: items and the cursor in one transaction."""
    with database.write() as connection:
        accepted = accept(connection, items, START_S, teaches=False)
        keep_cursor(connection, "quay-wire", "feed", {"at": cursor}, START_S)
    return accepted


def cursor(database):
    with database.read() as connection:
        return cursor_of(connection, "quay-wire")


def contents(path, names):
    """Every row of every table or view, in an order of its own."""
    with closing(sqlite3.connect(path)) as connection:
        return {
            name: sorted(connection.execute(f"SELECT * FROM {name}"), key=repr)  # noqa: S608 - from the schema
            for (name,) in connection.execute(names).fetchall()
        }


def test_on_a_full_disk_a_poll_is_undone_whole_and_succeeds_later(database, make_item):
    take(database, [make_item("a")], 1)
    before = contents(database.path, TABLES)
    fill_disk(database)
    batch = [make_item(f"item {number}", "words " * 400) for number in range(50)]
    with pytest.raises(DatabaseError) as caught:
        take(database, batch, 2)
    assert str(caught.value) == f"The database {database.path} {FULL}"
    assert contents(database.path, TABLES) == before
    assert cursor(database) == {"at": 1}
    make_room(database)
    assert take(database, batch, 2) == Accepted(new=50)
    assert cursor(database) == {"at": 2}


def test_a_database_on_a_full_disk_can_still_be_read_and_closed_and_is_sound(database, make_item):
    take(database, [make_item("a")], 1)
    fill_disk(database)
    with pytest.raises(DatabaseError):
        take(database, [make_item("b", "words " * 5000)], 2)
    assert cursor(database) == {"at": 1}
    database.close()
    with closing(sqlite3.connect(database.path)) as connection:
        assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    Database.open(database.path, create=False, migrate=False).close()


def test_making_a_database_where_there_is_no_room_leaves_one_that_can_be_made_later(
    tmp_path, monkeypatch
):
    path = tmp_path / "vanner.db"
    original = sqlite3.connect

    def cramped(*arguments, **told):
        connection = original(*arguments, **told)
        connection.execute("PRAGMA max_page_count = 5")
        return connection

    monkeypatch.setattr("vanner.store.database.sqlite3.connect", cramped)
    with pytest.raises(DatabaseError, match="there is no room left on its disk"):
        Database.open(path)
    monkeypatch.undo()
    Database.open(path).close()
    assert len(contents(path, VIEWS)) == 10
