"""Opening databases, and what write and read transactions promise."""

import sqlite3
import threading
from contextlib import closing
from pathlib import Path

import pytest

from vanner.errors import DatabaseBusyError, DatabaseError
from vanner.store.database import Database
from vanner.store.identity import APPLICATION_ID

ADD = "INSERT INTO source_state (source, kind, cursor, failures) VALUES ('{}', 'feed', '{{}}', 0)"
NAMES = "SELECT source FROM source_state ORDER BY source"


def add(database, name):
    with database.write() as connection:
        connection.exec_driver_sql(ADD.format(name))


def names(database):
    with database.read() as connection:
        return [row[0] for row in connection.exec_driver_sql(NAMES)]


def pragma(path, name):
    with closing(sqlite3.connect(path)) as connection:
        ((value,),) = connection.execute(f"PRAGMA {name}")
    return value


def test_a_new_database_is_ours_and_set_up_for_readers_beside_a_writer(tmp_path):
    path = tmp_path / "vanner.db"
    Database.open(path).close()
    assert pragma(path, "application_id") == APPLICATION_ID
    assert pragma(path, "journal_mode") == "wal"
    assert pragma(path, "auto_vacuum") == 2  # incremental
    assert [one.name for one in tmp_path.iterdir()] == ["vanner.db"]


def test_connections_keep_foreign_keys_and_sync_as_designed(database):
    with database.write() as connection:
        values = [
            connection.exec_driver_sql(f"PRAGMA {name}").scalar()
            for name in ("foreign_keys", "synchronous", "busy_timeout")
        ]
    assert values == [1, 1, 50]  # the fixture's 0.05 s
    with database.read() as connection:
        assert connection.exec_driver_sql("PRAGMA foreign_keys").scalar() == 1
        assert connection.exec_driver_sql("PRAGMA busy_timeout").scalar() == 50


def test_a_database_is_not_made_where_it_must_exist(tmp_path):
    path = tmp_path / "vanner.db"
    with pytest.raises(DatabaseError, match=r"There is no database .*vanner\.db; check the name\."):
        Database.open(path, create=False)
    assert list(tmp_path.iterdir()) == []


def test_an_empty_file_becomes_a_database(tmp_path):
    path = tmp_path / "vanner.db"
    path.touch()
    Database.open(path).close()
    assert pragma(path, "application_id") == APPLICATION_ID


@pytest.mark.parametrize(
    "name", ["100% new.db", "a%41.db", "who?.db", "no#1.db", "æ&mode=ro;x.db", "a'b.db", 'q"q.db']
)
def test_a_database_lies_where_its_path_says_whatever_the_characters(tmp_path, name):
    path = tmp_path / name
    database = Database.open(path)
    add(database, "quay-wire")
    assert names(database) == ["quay-wire"]
    database.close()
    assert [one.name for one in tmp_path.iterdir()] == [name]
    Database.open(path, create=False).close()


def test_a_relative_path_and_a_home_folder_are_resolved(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("HOME", str(tmp_path / "home"))
    (tmp_path / "home").mkdir()
    for path, place in [("near.db", "near.db"), ("~/far.db", "home/far.db")]:
        database = Database.open(Path(path))
        assert database.path == tmp_path / place
        database.close()
        assert (tmp_path / place).stat().st_size > 0


def test_a_file_whose_making_was_broken_off_is_made_again(tmp_path):
    """As after a kill between the first page and the first table."""
    path = tmp_path / "vanner.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA journal_mode = WAL")
    assert path.stat().st_size > 0
    Database.open(path).close()
    assert pragma(path, "application_id") == APPLICATION_ID


def test_a_database_whose_process_died_keeps_what_is_in_its_log(tmp_path):
    path = tmp_path / "vanner.db"
    opened = Database.open(path)
    add(opened, "quay-wire")
    left = tmp_path / "left"
    left.mkdir()
    for one in (path, path.with_name("vanner.db-wal")):
        (left / one.name).write_bytes(one.read_bytes())
    opened.close()
    again = Database.open(left / "vanner.db", create=False, migrate=False)
    assert names(again) == ["quay-wire"]
    again.close()


def test_programs_that_make_a_database_at_once_make_it_once(tmp_path):
    """Each succeeds or is told that another holds it; the database is whole."""
    path = tmp_path / "vanner.db"
    failures = []
    start = threading.Barrier(4)

    def make():
        start.wait()
        try:
            Database.open(path).close()
        except DatabaseError as error:
            failures.append(error)

    threads = [threading.Thread(target=make) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert all(isinstance(error, DatabaseBusyError) for error in failures)
    assert len(failures) < 4
    Database.open(path, create=False, migrate=False).close()
    assert pragma(path, "integrity_check") == "ok"


def test_a_write_is_kept_when_its_block_ends(database):
    add(database, "quay-wire")
    assert names(database) == ["quay-wire"]


@pytest.mark.parametrize("error", [KeyError, KeyboardInterrupt])
def test_a_write_is_undone_when_its_block_raises(database, error):
    def fail():
        with database.write() as connection:
            connection.exec_driver_sql(ADD.format("quay-wire"))
            raise error

    with pytest.raises(error):
        fail()
    assert names(database) == []
    add(database, "mill-desk")
    assert names(database) == ["mill-desk"]


def test_a_statement_that_is_refused_undoes_its_whole_block(database):
    def twice():
        with database.write() as connection:
            connection.exec_driver_sql(ADD.format("quay-wire"))
            connection.exec_driver_sql(ADD.format("quay-wire"))

    with pytest.raises(DatabaseError, match="refused a statement: UNIQUE"):
        twice()
    assert names(database) == []


def test_a_write_holds_the_lock_from_its_beginning(database):
    """So that what it reads first cannot be outdated when it writes."""
    with (
        closing(sqlite3.connect(database.path, timeout=0, isolation_level=None)) as other,
        database.write() as connection,
    ):
        with pytest.raises(sqlite3.OperationalError, match="locked"):
            other.execute(ADD.format("theirs"))
        assert connection.exec_driver_sql(NAMES).fetchall() == []
        connection.exec_driver_sql(ADD.format("ours"))
    assert names(database) == ["ours"]


def test_a_reader_cannot_write(database):
    with pytest.raises(DatabaseError, match="cannot be written"), database.read() as connection:
        connection.exec_driver_sql(ADD.format("quay-wire"))
    assert names(database) == []


def test_a_reader_sees_one_state_and_does_not_hold_up_the_writer(database):
    add(database, "a")
    with database.read() as connection:
        before = connection.exec_driver_sql(NAMES).fetchall()
        add(database, "b")
        assert connection.exec_driver_sql(NAMES).fetchall() == before == [("a",)]
    assert names(database) == ["a", "b"]


def test_a_reader_does_not_see_what_is_not_committed(database):
    with database.write() as connection:
        connection.exec_driver_sql(ADD.format("a"))
        assert names(database) == []
    assert names(database) == ["a"]


def test_writers_in_threads_take_turns(database):
    """With a busy timeout of 50 ms, only the lock can make eight of them wait."""
    failures = []

    def write(number):
        try:
            for turn in range(10):
                add(database, f"{number}-{turn}")
        except DatabaseError as error:
            failures.append(error)

    threads = [threading.Thread(target=write, args=(number,)) for number in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failures == []
    assert len(names(database)) == 80


def test_closing_twice_is_allowed_and_leaves_one_file(tmp_path):
    database = Database.open(tmp_path / "vanner.db")
    add(database, "quay-wire")
    database.close()
    database.close()
    assert [one.name for one in tmp_path.iterdir()] == ["vanner.db"]
