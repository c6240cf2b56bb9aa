"""vanner rebuild: every result derived again, into a new database."""

import sqlite3
from contextlib import closing

import pytest

VIEWS = ("alerts", "noted", "alert_terms", "alert_items", "items", "item_topics", "readings")


def rows(path, view):
    with closing(sqlite3.connect(path)) as connection:
        return sorted(connection.execute(f"SELECT * FROM {view}").fetchall(), key=repr)  # noqa: S608 - a constant


@pytest.mark.slow
def test_a_replay_is_derived_again_without_settings(vanner, town_database, tmp_path):
    before = {view: rows(town_database, view) for view in VIEWS}
    ended = vanner("rebuild", "--into", "again.db", "--database", town_database)
    assert ended.status == 0, ended.err
    assert ended.out == "684 items derived again into again.db\n"
    assert ended.err.splitlines()[-1] == "Rebuilding: 684 of 684"
    assert {view: rows("again.db", view) for view in VIEWS} == before
    assert {view: rows(town_database, view) for view in VIEWS} == before
    assert {one.name for one in tmp_path.iterdir()} == {"town.db", "again.db"}


def test_a_file_that_exists_is_refused(vanner, town_database, tmp_path):
    (tmp_path / "again.db").write_text("keep me")
    ended = vanner("rebuild", "--into", "again.db", "-d", town_database)
    assert (ended.status, ended.out) == (3, "")
    assert ended.err == "vanner: The file again.db exists; name one that does not.\n"
    assert (tmp_path / "again.db").read_text() == "keep me"


def test_the_settings_of_today_are_followed(vanner, settings, write_archive, few_lines):
    settings('[service]\npulse = "1s"\n')
    vanner("import", write_archive(few_lines), "--source", "inbox")
    assert vanner("rebuild", "--into", "again.db").status == 0
    with closing(sqlite3.connect("again.db")) as connection:
        found = connection.execute("SELECT desk FROM desk_state ORDER BY desk").fetchall()
    assert found == [("metro",), ("port",)]


def test_a_database_without_desks_needs_a_settings_file(vanner, settings, write_archive, few_lines):
    path = settings()
    vanner("import", write_archive(few_lines), "--source", "inbox")
    path.unlink()
    ended = vanner("rebuild", "--into", "again.db", "-d", "vanner.db")
    assert (ended.status, ended.out) == (2, "")
    assert "records no desk; name a settings file." in ended.err


@pytest.mark.slow
def test_ctrl_c_leaves_no_half_rebuilt_database(start, town_database, tmp_path):
    running = start("rebuild", "--into", "again.db", "-d", town_database)
    assert running.stderr.readline().startswith("Rebuilding: ")
    running.send_signal(2)
    out, err = running.communicate(timeout=60)
    assert (running.returncode, out) == (130, "")
    assert err.endswith("vanner: interrupted; what was committed stands.\n")
    assert list(tmp_path.glob("again*")) == []
