"""The demo from end to end: what it plants is raised, and what it says is so."""

from __future__ import annotations

import re
import shlex
import shutil
import sqlite3
import subprocess
import sys
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

import pytest

from vanner.cli import main
from vanner.daemon import demonstration
from vanner.daemon.engine import Engine
from vanner.daemon.plan import replay_plan
from vanner.sources.demo import PlantedStory, planted_live, planted_stories
from vanner.store.database import Database

RANDOM_STATE = 1  # the command's default
SERVICE_START_S = 1_740_960_000.0

pytestmark = pytest.mark.slow


@dataclass(frozen=True)
class Shown:
    """A run of the demo in a folder of its own, whose path needs quotes in a shell."""

    folder: Path
    result: subprocess.CompletedProcess[str]

    @property
    def database(self) -> Path:
        return self.folder / "vanner-demo.db"

    @property
    def queries(self) -> list[str]:
        return re.findall(r"^ *(vanner db query .+)$", self.result.stdout, re.MULTILINE)


@pytest.fixture(scope="module")
def shown(shell, tmp_path_factory) -> Shown:
    folder = tmp_path_factory.mktemp("a demo's folder")
    return Shown(folder, shell("vanner demo --seconds 15", folder))


def planted() -> list[PlantedStory]:
    """Every story of the demo; names and items are the same whenever it begins."""
    archive = planted_stories(SERVICE_START_S, demonstration.DAYS, RANDOM_STATE)
    return [*archive, *planted_live(SERVICE_START_S, 15.0, RANDOM_STATE)]


def rows(database: Path, sql: str) -> list[tuple]:
    with closing(sqlite3.connect(f"{database.as_uri()}?mode=ro", uri=True)) as connection:
        return connection.execute(sql).fetchall()


def test_the_demo_succeeds(shown):
    assert shown.result.returncode == 0, shown.result.stderr
    assert "Traceback" not in shown.result.stderr


def test_every_planted_story_is_named_as_raised_and_none_as_missed(shown):
    _, _, told = shown.result.stdout.partition("The planted stories:")
    raised = [line for line in told.splitlines() if line.split()[:1] == ["raised"]]
    for story in planted():
        assert len([line for line in raised if story.name in line and story.desk in line]) == 1
    assert len(raised) == len(planted()) >= 12
    assert "MISSED" not in shown.result.stdout


def test_every_planted_story_has_an_alert_of_its_desk_with_most_of_its_items(shown):
    held: dict[tuple[int, str], set[str]] = {}
    sql = "SELECT alert_id, desk, guid FROM alert_items JOIN alerts USING (alert_id)"
    for alert_id, desk, guid in rows(shown.database, sql):
        held.setdefault((alert_id, desk), set()).add(guid)
    for story in planted():
        shares = [
            len(guids & set(story.guids)) / len(story.guids)
            for (_, desk), guids in held.items()
            if desk == story.desk
        ]
        assert max(shares) > 0.5, story.name


def test_every_alert_that_was_shown_live_is_in_the_database(shown):
    _, _, live = shown.result.stdout.partition("Now live for 15 seconds")
    lines = re.findall(r"^ +(\S+Z)  \[(\w+)\] ", live, re.MULTILINE)
    assert {desk for _, desk in lines} == {"newsroom", "operations"}
    assert set(lines) <= set(rows(shown.database, "SELECT raised_at, desk FROM alerts"))


def test_the_three_queries_run_as_printed_from_anywhere_and_find_rows(shown, shell, tmp_path):
    assert len(shown.queries) == 3
    for query in shown.queries:
        result = shell(query, tmp_path)
        assert result.returncode == 0, result.stderr
        names, *found = result.stdout.splitlines()
        assert names
        assert found or names_an_alert(query), query


def names_an_alert(query: str) -> bool:
    return re.search(r"alert_id = \d", query) is not None


def test_no_printed_query_depends_on_which_story_became_an_alert(shown):
    assert [query for query in shown.queries if names_an_alert(query)] == []


def test_the_database_is_where_the_demo_says(shown):
    assert shown.database.is_file()
    for query in shown.queries:
        assert str(shown.database) in shlex.split(query)
    (total,) = re.findall(r"([\d,]+) alerts in all", shown.result.stdout)
    assert rows(shown.database, "SELECT count(*) FROM alerts") == [(int(total.replace(",", "")),)]


@pytest.fixture
def second(shown, tmp_path, monkeypatch, capsys) -> tuple[Path, object, str, str]:
    """A demo into an earlier one's database: of two days, in which no desk gets ready, so that
    nothing is raised. The database, the exit status, what was said and what was told as wrong.
    """
    database = tmp_path / "vanner-demo.db"
    shutil.copy(shown.database, database)
    monkeypatch.setattr(demonstration, "DAYS", 2.0)
    monkeypatch.setattr(sys, "argv", ["vanner", "demo", "-d", str(database), "--seconds", "10"])
    with pytest.raises(SystemExit) as left:
        main()
    told = capsys.readouterr()
    return database, left.value.code, told.out, told.err


def test_a_demo_replaces_an_earlier_one_and_fails_where_a_story_is_not_raised(shown, second):
    database, status, said, wrong = second
    assert status == 1
    missed = [line for line in said.splitlines() if line.split()[:1] == ["MISSED"]]
    assert len(missed) == len(planted())
    assert wrong.splitlines()[-1].startswith("vanner: ")
    assert str(len(planted())) in wrong.splitlines()[-1]
    assert "Traceback" not in wrong
    assert rows(database, "SELECT * FROM alerts") == []
    (before,), (after,) = (
        rows(one, "SELECT count(*) FROM items")[0] for one in (shown.database, database)
    )
    assert 0 < after < before


def test_a_service_database_is_refused_and_left_as_it_is(shell, tmp_path):
    path = tmp_path / "vanner.db"
    database = Database.open(path)
    try:
        Engine(database, [replay_plan(5.0, "UTC", 60.0)], 60.0).begin(SERVICE_START_S)
    finally:
        database.close()
    before = path.read_bytes()
    result = shell("vanner demo --database vanner.db --seconds 10", tmp_path)
    assert result.returncode == 3
    assert result.stdout == ""
    assert len(result.stderr.splitlines()) == 1
    assert "vanner.db" in result.stderr
    assert path.read_bytes() == before
