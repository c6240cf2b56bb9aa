"""Backups of a database in use."""

import sqlite3
import threading
from contextlib import closing
from itertools import count

import pytest

from vanner.errors import DatabaseBusyError, DatabaseError
from vanner.store.database import Database
from vanner.store.query import back_up

ITEMS = "SELECT * FROM item_revision ORDER BY item_id, revision"


def rows(path, query=ITEMS):
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute(query).fetchall()


def test_a_backup_restores_to_the_same_rows_and_opens_as_a_database(database, receive, tmp_path):
    for guid in ("a", "b", "c"):
        receive(guid)
    target = tmp_path / "copy 100%.db"
    assert back_up(database, target) == target.stat().st_size
    assert rows(target) == rows(database.path)
    assert len(rows(target)) == 3
    Database.open(target, create=False, migrate=False).close()


def test_a_backup_is_one_file_that_needs_no_log(database, receive, tmp_path):
    receive("a")
    target = tmp_path / "backups" / "copy.db"
    target.parent.mkdir()
    back_up(database, target)
    assert [path.name for path in target.parent.iterdir()] == ["copy.db"]
    assert rows(target, "PRAGMA journal_mode") == [("delete",)]
    assert rows(target, "PRAGMA integrity_check") == [("ok",)]


def test_a_backup_while_a_writer_is_active_holds_whole_transactions(database, receive, tmp_path):
    """Every transaction writes a pair; no backup may hold half of one."""
    receive("first")
    ended, begun = threading.Event(), threading.Event()

    def write_pairs():
        for number in count():
            with database.write() as connection:
                for half in "ab":
                    connection.exec_driver_sql(
                        "INSERT INTO source_state (source, kind, cursor, failures) "
                        "VALUES (?, 'feed', ?, 0)",
                        (f"{number} {half}", "x" * 2000),
                    )
            if number == 3:
                begun.set()
            if ended.is_set():
                return

    writer = threading.Thread(target=write_pairs)
    writer.start()
    try:
        assert begun.wait(30)
        for number in range(5):
            back_up(database, tmp_path / f"copy {number}.db")
    finally:
        ended.set()
        writer.join()
    numbers = []
    for number in range(5):
        path = tmp_path / f"copy {number}.db"
        names = [name for (name,) in rows(path, "SELECT source FROM source_state")]
        pairs = len(names) // 2
        assert set(names) == {f"{pair} {half}" for pair in range(pairs) for half in "ab"}
        assert [row[3:5] for row in rows(path)] == [("", "The ferry to Ostrand is late.")]
        assert rows(path, "PRAGMA integrity_check") == [("ok",)]
        numbers.append(pairs)
    assert numbers == sorted(numbers)
    assert numbers[0] >= 4


def test_a_target_that_exists_is_left_alone(database, tmp_path):
    target = tmp_path / "copy.db"
    target.write_text("the only copy of something else")
    with pytest.raises(DatabaseError, match=r"copy\.db exists; name one that does not\."):
        back_up(database, target)
    assert target.read_text() == "the only copy of something else"


def test_a_target_in_no_folder_is_refused_and_leaves_nothing(database, tmp_path):
    with pytest.raises(DatabaseError, match="cannot be opened; check its folder"):
        back_up(database, tmp_path / "nowhere" / "copy.db")
    assert not (tmp_path / "nowhere").exists()


def test_what_an_earlier_backup_left_half_made_is_replaced(database, receive, tmp_path):
    receive("a")
    (tmp_path / "copy.db.part").write_bytes(b"")
    back_up(database, tmp_path / "copy.db")
    assert rows(tmp_path / "copy.db") == rows(database.path)
    assert not (tmp_path / "copy.db.part").exists()


def test_half_a_backup_that_is_no_database_is_replaced(database, receive, tmp_path):
    receive("a")
    (tmp_path / "copy.db.part").write_bytes(b"half of a page" * 500)
    back_up(database, tmp_path / "copy.db")
    assert rows(tmp_path / "copy.db") == rows(database.path)


def test_a_target_that_cannot_be_replaced_by_a_file_is_named(database, tmp_path):
    (tmp_path / "copy.db.part").mkdir()
    with pytest.raises(DatabaseError, match=r"copy\.db cannot be written \(.+\); check its folder"):
        back_up(database, tmp_path / "copy.db")


def test_a_database_that_another_program_holds_is_busy(database, tmp_path):
    database.close()
    with closing(sqlite3.connect(database.path, isolation_level=None)) as holder:
        holder.execute("PRAGMA locking_mode = EXCLUSIVE")
        holder.execute("BEGIN EXCLUSIVE")
        with pytest.raises(DatabaseBusyError):
            back_up(database, tmp_path / "copy.db")
    assert not (tmp_path / "copy.db").exists()


def test_a_damaged_database_gives_no_backup(database, receive, tmp_path):
    for number in range(40):
        receive(f"item {number}", text="words " * 200)
    database.close()
    with database.path.open("r+b") as file:
        file.truncate(database.path.stat().st_size // 2)
    with pytest.raises(DatabaseError, match=r"vanner\.db cannot be used: it is damaged"):
        back_up(database, tmp_path / "copy.db")
    assert not (tmp_path / "copy.db").exists()
    assert not (tmp_path / "copy.db.part").exists()
