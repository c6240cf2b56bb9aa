"""What goes wrong ends in one sentence and the documented exit status."""

import gzip
import os
import sqlite3
import subprocess
import sys
from contextlib import closing

import pytest


@pytest.fixture
def shell():
    """Runs a line of the shell and gives what it prints."""

    def run(line):
        ended = subprocess.run(
            ["sh", "-c", line], check=True, stdout=subprocess.PIPE, text=True, timeout=60
        )
        return ended.stdout

    return run


READERS = [
    ("status",),
    ("db", "query", "SELECT 1"),
    ("db", "backup", "copy.db"),
    ("db", "upgrade"),
    ("rebuild", "--into", "new.db"),
]


def sentence(ended, status):
    """The only line on stderr, without the command's name; nothing is on stdout."""
    assert (ended.status, ended.out) == (status, ""), ended.err
    assert ended.err.startswith("vanner: ")
    assert ended.err.count("\n") == 1
    assert "Traceback" not in ended.err
    assert ended.err.endswith((".\n", "vanner init\n", "vanner init other.toml\n"))
    return ended.err.removeprefix("vanner: ").strip()


@pytest.mark.parametrize("words", [("check",), ("run",), ("digest",), *READERS], ids=" ".join)
def test_a_missing_settings_file_is_told_with_how_to_make_one(vanner, words):
    assert "no settings file other.toml" in sentence(vanner(*words, "-s", "other.toml"), 2)


@pytest.mark.slow
def test_a_missing_settings_file_is_told_by_a_real_process(process, tmp_path):
    told = sentence(process("run", cwd=tmp_path), 2)
    assert told == "There is no settings file vanner.toml; make one with: vanner init"


@pytest.mark.parametrize("words", READERS, ids=" ".join)
def test_a_missing_database_is_told_and_not_made(vanner, words, tmp_path):
    told = sentence(vanner(*words, "--database", "gone.db"), 3)
    assert str(tmp_path / "gone.db") in told
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("words", [*READERS, ("replay", "few.jsonl")], ids=" ".join)
def test_a_database_of_another_program_is_left_alone(
    vanner, words, tmp_path, write_archive, few_lines
):
    write_archive(few_lines)
    with closing(sqlite3.connect(tmp_path / "other.db")) as connection:
        connection.execute("CREATE TABLE recipe (name)")
        connection.commit()
    before = (tmp_path / "other.db").read_bytes()
    assert "belongs to another program" in sentence(vanner(*words, "-d", "other.db"), 3)
    assert (tmp_path / "other.db").read_bytes() == before


@pytest.mark.parametrize("words", READERS, ids=" ".join)
def test_a_file_that_is_no_database_is_told(vanner, words, tmp_path):
    (tmp_path / "notes.db").write_text("soup, bread and a pear " * 20)
    assert "is no SQLite database" in sentence(vanner(*words, "-d", "notes.db"), 3)


def test_a_database_in_a_folder_that_is_missing_is_told(vanner, write_archive, few_lines):
    told = sentence(vanner("replay", write_archive(few_lines), "-d", "no/such/try.db"), 3)
    assert "there is no folder" in told


@pytest.mark.parametrize("words", [("replay", "-d", "t.db"), ("import", "--source", "inbox")])
def test_a_missing_archive_is_told_before_a_database_is_made(vanner, settings, words, tmp_path):
    settings()
    told = sentence(vanner(words[0], "gone.jsonl", *words[1:]), 5)
    assert told.startswith("gone.jsonl cannot be opened")
    assert [one.name for one in tmp_path.iterdir()] == ["vanner.toml"]


@pytest.mark.parametrize("words", [("replay", "-d", "t.db"), ("import", "--source", "inbox")])
def test_an_archive_that_is_a_folder_is_told(vanner, settings, words, tmp_path):
    settings()
    (tmp_path / "archives").mkdir()
    told = sentence(vanner(words[0], "archives", *words[1:]), 5)
    assert told.startswith("archives cannot be opened")


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is unreadable to root")
def test_an_archive_that_may_not_be_read_is_told(vanner, write_archive, few_lines):
    path = write_archive(few_lines)
    path.chmod(0)
    assert "cannot be opened" in sentence(vanner("replay", path, "-d", "t.db"), 5)


def test_an_archive_without_a_usable_item_is_told(vanner, write_archive):
    ended = vanner("replay", write_archive(["{}", "no JSON"]), "-d", "t.db")
    assert (ended.status, ended.out) == (5, "")
    assert ended.err.splitlines() == [
        'few.jsonl, line 1: no "id"; the line is left out.',
        "few.jsonl, line 2: not JSON; the line is left out.",
        "2 entries left out.",
        "vanner: The archive holds no usable item; nothing was replayed.",
    ]


def test_an_unknown_time_zone_is_told(vanner, write_archive, few_lines, tmp_path):
    archive = write_archive(few_lines)
    told = sentence(vanner("replay", archive, "-d", "t.db", "--timezone", "Mars/Olympus"), 2)
    assert '"Mars/Olympus" is no time zone' in told
    assert not (tmp_path / "t.db").exists()


def test_an_unknown_desk_is_told_with_those_that_there_are(vanner, settings):
    settings()
    told = sentence(vanner("digest", "sports"), 2)
    assert told == 'There is no desk "sports" in vanner.toml; there are: metro, port.'


def test_digest_asks_for_a_desk_where_there_are_several(vanner, settings):
    settings()
    assert sentence(vanner("digest"), 2) == "Name one of the desks of vanner.toml: metro, port."


def test_every_fault_of_the_settings_is_a_line_of_its_own(vanner, settings):
    settings('[service]\npulse = "7s"\ntimezone = "Mars/Olympus"\ncolour = 3\n')
    for words in (("check",), ("run",), ("status",), ("import", "a", "--source", "inbox")):
        ended = vanner(*words)
        head, *faults = ended.err.splitlines()
        assert (ended.status, ended.out) == (2, "")
        assert head == "vanner: vanner.toml has 3 faults; correct them and try again."
        assert sorted(fault.partition(" = ")[0] for fault in faults) == [
            "  vanner.toml: service, colour",
            "  vanner.toml: service, pulse",
            "  vanner.toml: service, timezone",
        ]


@pytest.mark.slow
def test_a_closed_pipe_ends_a_query_without_a_word(shell, town_database, tmp_path):
    endless = "WITH RECURSIVE n(i) AS (SELECT 1 UNION ALL SELECT i + 1 FROM n) SELECT i FROM n"
    query = f'"{sys.executable}" -m vanner db query -f csv -d {town_database} "{endless}"'
    assert shell(f"({query}; echo $? >status) 2>err | head -1") == "i\n"
    assert (tmp_path / "err").read_text() == ""
    assert (tmp_path / "status").read_text() == "1\n"


@pytest.mark.slow
def test_a_full_disk_behind_the_output_gives_a_sentence(shell, town_database):
    query = f'"{sys.executable}" -m vanner db query -d {town_database} "SELECT 1"'
    *told, status = shell(f"{query} 2>&1 >/dev/full; echo $?").splitlines()
    assert (len(told), status) == (1, "1")
    assert "No space left on device" in told[0]


def test_an_error_that_nobody_foresaw_is_a_sentence_that_tells_how_to_see_more(
    vanner, town_database, monkeypatch
):
    def fail(_path):
        raise ZeroDivisionError("seven by nothing")

    monkeypatch.setattr("vanner.cli.desk.is_served", fail)
    told = sentence(vanner("status", "-d", town_database), 1)
    assert "ZeroDivisionError: seven by nothing" in told
    assert "VANNER_TRACEBACK=1" in told


def test_a_damaged_archive_keeps_what_stood_before_the_damage(vanner, few_lines, tmp_path):
    whole = gzip.compress("\n".join(few_lines).encode())
    (tmp_path / "cut.jsonl.gz").write_bytes(whole[:-12])
    ended = vanner("replay", "cut.jsonl.gz", "-d", "t.db")
    assert ended.status == 0
    assert "the gzip data end too early; the rest is lost." in ended.err
    assert ended.out.startswith("5 items until ")
