"""vanner import: teaching from the past."""

import json
import sqlite3
import time
from contextlib import closing

import pytest

from vanner.daemon.engine import Engine
from vanner.daemon.lock import sole_daemon
from vanner.daemon.plan import plans_from
from vanner.settings import load_settings
from vanner.store.database import Database


@pytest.fixture
def ask(tmp_path):
    def of(sql):
        with closing(sqlite3.connect(tmp_path / "vanner.db")) as connection:
            return connection.execute(sql).fetchall()

    return of


def serve_until_read(path):
    """Do what a daemon does: begin, and close the pulses that have passed."""
    told = load_settings(path)
    database = Database.open(told.database_path)
    try:
        engine = Engine(database, plans_from(told), told.service.pulse)
        engine.begin(time.time())
        engine.advance(time.time() + 2 * told.service.pulse)
    finally:
        database.close()


def test_an_import_tells_what_it_brought_and_when_it_is_read(
    vanner, settings, write_archive, few_lines
):
    settings()
    ended = vanner("import", write_archive(few_lines), "--source", "inbox")
    assert (ended.status, ended.err) == (0, "Importing: 6\n")
    assert ended.out == (
        "6 items to learn from, 0 revisions, 0 known already; "
        "they are read when the daemon starts, 2,000 a pulse.\n"
    )


def test_an_import_again_brings_nothing_new(vanner, settings, write_archive, few_lines, ask):
    settings()
    archive = write_archive(few_lines)
    vanner("import", archive, "--source", "inbox")
    ended = vanner("import", archive, "--source", "inbox")
    assert ended.out.startswith("0 items to learn from, 0 revisions, 6 known already")
    assert ask("SELECT count(*) FROM items") == [(6,)]


def test_an_import_says_that_a_running_daemon_reads_it_soon(
    vanner, settings, write_archive, few_lines, tmp_path
):
    settings()
    with sole_daemon(tmp_path / "vanner.db"):
        ended = vanner("import", write_archive(few_lines), "--source", "inbox")
    assert ended.out.endswith("they are read from the next pulse on, 2,000 a pulse.\n")


def test_what_is_imported_before_the_first_start_is_read_by_it(
    vanner, settings, write_archive, few_lines, ask
):
    path = settings('[service]\npulse = "1s"\n')
    vanner("import", write_archive(few_lines), "--source", "inbox")
    serve_until_read(path)
    assert ask("SELECT desk, count(*) FROM readings GROUP BY desk ORDER BY desk") == [
        ("metro", 6),
        ("port", 6),
    ]


def test_taught_items_raise_and_note_nothing(vanner, settings, town, ask):
    # A desk that needs no warming up would raise the archive's event at once.
    path = settings('warm_up = "1s"\nwarm_up_words = 0\n[service]\npulse = "1s"\n')
    assert vanner("import", town[0], "--source", "inbox").status == 0
    serve_until_read(path)
    assert ask("SELECT count(*) FROM readings WHERE desk = 'port'") == [(684,)]
    assert ask("SELECT count(*) FROM alerts") == [(0,)]
    assert ask("SELECT count(*) FROM noted") == [(0,)]
    assert ask("SELECT DISTINCT status FROM items") == [("taught",)]


def test_an_import_gives_every_item_to_the_source_that_is_named(
    vanner, settings, write_archive, archive_line, ask
):
    settings()
    lines = [archive_line(n, "Tide", "tables", 1e9 + n, "elsewhere") for n in range(3)]
    vanner("import", write_archive(lines), "--source", "inbox")
    assert ask("SELECT source, count(*) FROM items GROUP BY source") == [("inbox", 3)]


def test_an_unknown_source_is_told_with_those_that_there_are(
    vanner, settings, write_archive, few_lines, tmp_path
):
    settings()
    ended = vanner("import", write_archive(few_lines), "--source", "outbox")
    assert (ended.status, ended.out) == (2, "")
    assert ended.err == 'vanner: There is no source "outbox" in vanner.toml; there are: inbox.\n'
    assert not (tmp_path / "vanner.db").exists()


def test_bad_lines_are_counted_and_the_good_are_imported(
    vanner, settings, write_archive, few_lines, ask
):
    settings()
    bare = json.dumps({"id": "bare"})
    ended = vanner("import", write_archive(["[]", bare, *few_lines]), "--source", "inbox")
    assert ended.status == 0
    assert ended.err.splitlines()[0] == "few.jsonl, line 1: no JSON object; the line is left out."
    assert '"bare"' in ended.err.splitlines()[1]
    assert ended.err.splitlines()[-1] == "2 entries left out."
    assert ask("SELECT count(*) FROM items") == [(6,)]
