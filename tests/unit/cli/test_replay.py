"""vanner replay: archives into a database of their own, without settings."""

import json
import os
import re
import shlex
import threading
from contextlib import closing

import pytest

from vanner.store.database import Database

COUNT = "SELECT count(*) AS n FROM items"


@pytest.fixture
def ask(vanner):
    """What a query of the command gives, as objects."""

    def of(database, sql):
        return json.loads(vanner("db", "query", "-f", "json", "-d", database, sql).out)

    return of


def test_a_replay_raises_the_event_and_tells_where_it_is(town):
    _, database, ended = town
    assert ended.status == 0, ended.err
    first, second, third = ended.out.splitlines()
    assert first.startswith("684 items until 2023-11-18T12:12:00Z: 1 alert, ")
    assert first.endswith(" noted below the threshold.")
    assert second == f"Everything is in {database}"
    assert third.startswith(f"Try: vanner db query --database {database} ")


def test_the_query_that_a_replay_offers_runs_as_it_stands(town, vanner):
    offered = shlex.split(town[2].out.splitlines()[-1].removeprefix("Try: vanner "))
    ended = vanner(*offered)
    assert (ended.status, ended.err) == (0, "")
    head, row = ended.out.splitlines()
    assert head.split() == ["raised_at", "headline", "items"]
    assert "Ferry [aground] off Möwenhook 海" in row


def test_the_offered_query_quotes_a_path_with_blanks(vanner, write_archive, few_lines, tmp_path):
    ended = vanner("replay", write_archive(few_lines), "-d", "my try.db")
    words = shlex.split(ended.out.splitlines()[-1])
    assert words[words.index("--database") + 1] == str(tmp_path / "my try.db")


def test_an_earlier_replay_is_replaced(vanner, write_archive, few_lines, ask):
    for lines in (few_lines, few_lines[:2]):
        assert vanner("replay", write_archive(lines), "-d", "try.db").status == 0
        assert ask("try.db", COUNT) == [{"n": len(lines)}]


def test_an_earlier_replay_stays_where_the_archive_is_missing(
    vanner, write_archive, few_lines, ask
):
    archive = write_archive(few_lines)
    vanner("replay", archive, "-d", "try.db")
    assert vanner("replay", archive, "gone.jsonl", "-d", "try.db").status == 5
    assert ask("try.db", COUNT) == [{"n": 6}]


def test_the_database_of_a_service_is_not_replaced(
    vanner, write_archive, few_lines, ask, town_database
):
    with (
        closing(Database.open(town_database)) as database,
        database.write() as connection,
    ):
        connection.exec_driver_sql("UPDATE clock SET purpose = 'service'")
    ended = vanner("replay", write_archive(few_lines), "-d", town_database)
    assert (ended.status, ended.out) == (3, "")
    assert "serves a daemon and is not replaced" in ended.err
    assert ask(town_database, COUNT) == [{"n": 684}]


def test_a_database_that_was_only_taught_is_not_replaced(
    vanner, settings, write_archive, few_lines, ask
):
    settings()
    archive = write_archive(few_lines)
    assert vanner("import", archive, "--source", "inbox").status == 0
    ended = vanner("replay", archive, "-d", "vanner.db")
    assert ended.status == 3
    assert "serves a daemon and is not replaced" in ended.err
    assert ask("vanner.db", "SELECT DISTINCT source FROM items") == [{"source": "inbox"}]


def test_several_archives_are_replayed_as_one(vanner, write_archive, few_lines, ask):
    first = write_archive(few_lines[:4], "may.2.jsonl")
    second = write_archive(few_lines[3:], "june.jsonl")
    assert vanner("replay", first, second, "-d", "try.db").status == 0
    assert ask("try.db", "SELECT source, count(*) AS n FROM items GROUP BY source") == [
        {"source": "may", "n": 6}
    ]


def test_lines_that_name_a_source_keep_it(vanner, write_archive, archive_line, ask):
    lines = [
        archive_line(n, "Tide", "tables", 1e9 + n, source)
        for n, source in enumerate(["mast", None])
    ]
    vanner("replay", write_archive(lines), "-d", "try.db")
    found = ask("try.db", "SELECT source FROM items ORDER BY guid")
    assert [one["source"] for one in found] == ["mast", "few"]


def test_bad_lines_are_shown_and_counted_and_the_good_are_kept(
    vanner, write_archive, few_lines, ask
):
    undated = '{"id": "u", "date_published": "some day", "title": "Tide"}'
    empty = '{"id": "e", "date_published": "2023-11-15T00:00:00Z"}'
    lines = [few_lines[0], "{", *few_lines[1:5], undated, empty, few_lines[5]]
    ended = vanner("replay", write_archive(lines), "-d", "try.db")
    assert ended.status == 0
    assert ask("try.db", COUNT) == [{"n": 6}]
    shown = [one for one in ended.err.splitlines() if not re.match(r"(Taking in|Reading): ", one)]
    assert shown[0] == "few.jsonl, line 2: not JSON; the line is left out."
    assert '"u"' in shown[1]
    assert "some day" in shown[1]
    assert '"e"' in shown[2]
    assert shown[3:] == ["3 entries left out."]


def test_of_many_bad_lines_twenty_are_shown_and_all_counted(vanner, write_archive, few_lines):
    ended = vanner("replay", write_archive([*few_lines, *"x" * 45]), "-d", "try.db")
    assert ended.status == 0
    lines = ended.err.splitlines()
    assert sum("not JSON" in one for one in lines) == 20
    place = lines.index("... and 25 more.")
    assert lines[place + 1] == "45 entries left out."


def test_an_archive_may_come_through_a_pipe(vanner, few_lines, ask, tmp_path):
    os.mkfifo(tmp_path / "pipe")
    writer = threading.Thread(
        target=(tmp_path / "pipe").write_text, args=("\n".join(few_lines),), daemon=True
    )
    writer.start()
    assert vanner("replay", "pipe", "-d", "try.db").status == 0
    writer.join()
    assert ask("try.db", COUNT) == [{"n": 6}]


def test_the_budget_and_the_time_zone_reach_the_desk(vanner, write_archive, few_lines, tmp_path):
    archive = write_archive(few_lines)
    vanner("replay", archive, "-d", "t.db", "-n", "2.5", "--timezone", "Europe/Vienna")
    with closing(Database.open(tmp_path / "t.db")) as database, database.read() as connection:
        told = connection.exec_driver_sql("SELECT parameters FROM desk_state").scalar_one()
    parameters = json.loads(told)["parameters"]
    assert (parameters["alerts_per_day"], parameters["zone"]) == (2.5, "Europe/Vienna")


@pytest.mark.slow
def test_ctrl_c_while_taking_in_is_told_and_exits_with_130(start, few_lines, tmp_path):
    os.mkfifo(tmp_path / "pipe")
    running = start("replay", "pipe", "-d", "try.db")
    with (tmp_path / "pipe").open("w") as pipe:  # opens once the command reads
        # Blank lines fill the reader's buffer, which it hands on only when it is full.
        pipe.write("\n".join([*few_lines, "bad", "\n" * 70_000]))
        pipe.flush()
        assert "line 7" in running.stderr.readline()
        running.send_signal(2)
        out, err = running.communicate(timeout=60)
    assert (running.returncode, out) == (130, "")
    assert err.endswith("vanner: interrupted; what was committed stands.\n")
    assert "Traceback" not in err


@pytest.mark.slow
def test_ctrl_c_while_reading_leaves_a_database_that_the_next_replay_replaces(
    start, town, vanner, write_archive, few_lines, ask
):
    running = start("replay", town[0], "-d", "try.db")
    while not (told := running.stderr.readline()).startswith("Reading: "):
        assert told.startswith("Taking in: ")
    running.send_signal(2)
    out, err = running.communicate(timeout=60)
    assert (running.returncode, out) == (130, "")
    assert err.endswith("vanner: interrupted; what was committed stands.\n")
    assert "Traceback" not in err
    assert vanner("replay", write_archive(few_lines), "-d", "try.db").status == 0
    assert ask("try.db", COUNT) == [{"n": 6}]
