"""vanner db backup and db upgrade."""

import sqlite3
from contextlib import closing

import pytest

from vanner.store.database import Database


def rows(path, sql):
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute(sql).fetchall()


def test_a_backup_holds_what_the_database_holds(vanner, town_database, tmp_path):
    ended = vanner("db", "backup", "copy.db", "--database", town_database)
    size = (tmp_path / "copy.db").stat().st_size
    assert (ended.status, ended.err) == (0, "")
    assert ended.out == f"{size:,} bytes written to copy.db\n"
    for sql in ("SELECT * FROM alerts", "SELECT * FROM items", "SELECT * FROM readings"):
        assert rows(tmp_path / "copy.db", sql) == rows(town_database, sql)


def test_a_backup_opens_as_a_database(vanner, town_database):
    vanner("db", "backup", "copy.db", "-d", town_database)
    ended = vanner("db", "query", "-d", "copy.db", "SELECT count(*) AS n FROM items")
    assert (ended.status, ended.out) == (0, "  n\n684\n")


def test_a_backup_made_while_the_database_is_written_is_whole(vanner, town_database):
    database = Database.open(town_database)
    try:
        with database.write() as connection:
            connection.exec_driver_sql("UPDATE item SET source = 'half'")
            assert vanner("db", "backup", "copy.db", "-d", town_database).status == 0
    finally:
        database.close()
    assert rows("copy.db", "SELECT count(*) FROM item WHERE source = 'half'") == [(0,)]
    assert rows("copy.db", "PRAGMA integrity_check") == [("ok",)]


def test_a_backup_never_replaces_a_file(vanner, town_database, tmp_path):
    (tmp_path / "monday.db").write_text("keep me")
    ended = vanner("db", "backup", "monday.db", "-d", town_database)
    assert (ended.status, ended.out) == (3, "")
    assert ended.err == "vanner: The file monday.db exists; name one that does not.\n"
    assert (tmp_path / "monday.db").read_text() == "keep me"


def test_a_backup_into_a_missing_folder_is_one_sentence(vanner, town_database):
    ended = vanner("db", "backup", "no/such/copy.db", "-d", town_database)
    assert (ended.status, ended.out) == (3, "")
    assert ended.err.count("\n") == 1


def test_upgrade_says_that_a_database_is_up_to_date(vanner, town_database):
    ended = vanner("db", "upgrade", "--database", town_database)
    assert (ended.status, ended.err) == (0, "")
    assert ended.out == f"The database {town_database} is up to date.\n"


def test_the_database_of_the_settings_is_meant_where_none_is_named(vanner, settings, town_database):
    settings('[service]\ndatabase = "sqlite:///town.db"\n')
    ended = vanner("db", "upgrade")
    assert (ended.status, ended.out) == (0, f"The database {town_database} is up to date.\n")


@pytest.mark.usefixtures("town_database")
@pytest.mark.parametrize("words", [("status",), ("db", "query", "SELECT 1")], ids=" ".join)
def test_the_settings_file_may_be_named_by_the_environment(
    vanner, settings, monkeypatch, tmp_path, words
):
    path = settings('[service]\ndatabase = "sqlite:///town.db"\n')
    monkeypatch.setenv("VANNER_SETTINGS", str(path.rename(tmp_path / "night.toml")))
    assert vanner(*words).status == 0
