"""The README's views and its SQL recipes, against a database that the daemon's engine made."""

from __future__ import annotations

import csv
import io
import json
import re
import sqlite3
import sys
from contextlib import closing
from pathlib import Path

import pytest

from vanner.cli import main
from vanner.daemon.archiving import accept_archive, archive_items, replay
from vanner.daemon.plan import plans_from
from vanner.settings import load_settings
from vanner.store.database import Database

README = (Path(__file__).parents[2] / "README.md").read_text(encoding="utf-8")
PROSE = " ".join(README.split())
# A recipe, with the line that says what it is for.
RECIPES = re.findall(r"^([^\n]+)\n\n```sql\n(.*?)\n```$", README, re.MULTILINE | re.DOTALL)
FULL_SETTINGS = re.findall(r"^```toml\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)[1]


@pytest.fixture(scope="module")
def database(past, tmp_path_factory) -> Path:
    """A desk "metro" by the README's settings, after it has read the archive in its own time."""
    folder = tmp_path_factory.mktemp("desk")
    (folder / "vanner.toml").write_text(FULL_SETTINGS, encoding="utf-8")
    settings = load_settings(folder / "vanner.toml")
    database = Database.open(settings.database_path)
    faults: list[str] = []
    try:
        items = archive_items([past.path], faults.append)
        accepted = accept_archive(
            database, items, "harbour", 2e9, faults.append, lambda _number: None
        )
        replay(database, plans_from(settings), lambda _progress: None)
    finally:
        database.close()
    assert faults == []
    assert accepted.new == len(past.entries)
    return settings.database_path


def fetch(database: Path, sql: str) -> tuple[list[str], list[tuple]]:
    """A query's columns and rows by the driver itself, as any SQLite client gives them."""
    with closing(sqlite3.connect(f"{database.as_uri()}?mode=ro", uri=True)) as connection:
        cursor = connection.execute(sql)
        return [column[0] for column in cursor.description], cursor.fetchall()


def promised_views() -> list[tuple[str, list[str]]]:
    rows = re.findall(r"^\| `(\w+)` \| [^|]+ \| ([\w, ]+) \|$", README, re.MULTILINE)
    return [(view, columns.split(", ")) for view, columns in rows]


def test_the_readme_names_exactly_the_views_and_columns_that_there_are(database):
    _, views = fetch(database, "SELECT name FROM sqlite_master WHERE type = 'view' ORDER BY rowid")
    there = [
        (view, fetch(database, f"SELECT * FROM {view}")[0])  # noqa: S608 - the schema's own names
        for (view,) in views
    ]
    assert there == promised_views()


@pytest.mark.parametrize("view", [view for view, _ in promised_views()])
def test_every_view_holds_rows_so_that_the_recipes_have_something_to_find(database, view):
    _, rows = fetch(database, f"SELECT * FROM {view}")  # noqa: S608 - the README's own names
    assert rows


def test_there_are_ten_recipes_as_the_readme_says():
    assert "Ten queries to start from:" in PROSE
    assert len(RECIPES) == README.count("```sql") == 10


@pytest.mark.parametrize("sql", [pytest.param(sql, id=title) for title, sql in RECIPES])
def test_a_recipe_needs_nothing_but_the_promised_columns(database, sql):
    with closing(sqlite3.connect(":memory:")) as connection:
        for view, columns in promised_views():
            connection.execute(f"CREATE TABLE {view} ({', '.join(columns)})")
        cursor = connection.execute(sql)
    assert [column[0] for column in cursor.description] == fetch(database, sql)[0]


def read_table(text: str, rows: list[tuple]) -> list[str]:
    """The names over a table whose lines hold the rows' texts and whole numbers, in order."""
    head, *lines = text.splitlines()
    assert len(lines) == len(rows)
    for line, row in zip(lines, rows, strict=True):
        for value in row:
            assert not isinstance(value, str | int) or str(value) in line
    return re.split(r"  +", head.strip())


def read_csv(text: str, rows: list[tuple]) -> list[str]:
    names, *lines = csv.reader(io.StringIO(text))
    assert lines == [["" if value is None else str(value) for value in row] for row in rows]
    return names


def read_json(text: str, rows: list[tuple]) -> list[str]:
    records = json.loads(text)
    assert [tuple(record.values()) for record in records] == rows
    return list(records[0])


def assert_told(told: str, errors: str, found: tuple[list, list], read) -> None:
    names, rows = found
    assert errors == ""
    assert rows
    assert read(told, rows) == names


@pytest.mark.parametrize("sql", [pytest.param(sql, id=title) for title, sql in RECIPES])
def test_a_recipe_runs_as_the_readme_says_and_finds_rows(database, shell, sql):
    assert "(as a table, or `--format csv` or `json`)" in PROSE
    result = shell(f'vanner db query "{sql}"', database.parent)
    assert result.returncode == 0
    assert_told(result.stdout, result.stderr, fetch(database, sql), read_table)


@pytest.mark.parametrize(("form", "read"), [("csv", read_csv), ("json", read_json)])
@pytest.mark.parametrize("sql", [pytest.param(sql, id=title) for title, sql in RECIPES])
def test_a_recipe_finds_the_same_as_csv_and_as_json(database, monkeypatch, capsys, sql, form, read):
    # In this process: starting another twenty times would take most of a minute.
    monkeypatch.chdir(database.parent)
    monkeypatch.setattr(sys, "argv", ["vanner", "db", "query", sql, "--format", form])
    with pytest.raises(SystemExit) as left:
        main()
    told = capsys.readouterr()
    assert not left.value.code
    assert_told(told.out, told.err, fetch(database, sql), read)


def test_the_event_of_the_archive_is_one_alert_with_all_its_items(database, past):
    told = {entry["id"] for entry in past.entries if entry["id"].startswith("wall-")}
    alert = "SELECT alert_id FROM alert_items WHERE guid = 'wall-0'"
    _, rows = fetch(database, f"SELECT guid FROM alert_items WHERE alert_id = ({alert})")  # noqa: S608 - written here
    assert told == {guid for (guid,) in rows}
    assert len(told) == 8


def test_the_four_shares_of_a_reading_sum_to_one_and_house_is_nothing_yet(database):
    assert "divide an item's words and sum to one" in PROSE
    assert "boilerplate (not told apart yet: always 0)" in PROSE
    _, rows = fetch(database, "SELECT standing, running, house, own FROM readings")
    assert rows
    assert [sum(row) for row in rows] == pytest.approx([1.0] * len(rows))
    assert {row[2] for row in rows} == {0.0}


def test_times_are_iso_8601_in_utc(database):
    assert "Times are ISO 8601 in UTC." in PROSE
    found = 0
    for view, columns in promised_views():
        times = [name for name in columns if name.endswith("_at") or name == "hour"]
        for name in (*times, *(n for n in columns if n.startswith(("covers_", "scheduled_")))):
            sql = f"SELECT {name} FROM {view} WHERE {name} IS NOT NULL"  # noqa: S608 - as above
            for (time,) in fetch(database, sql)[1]:
                assert re.fullmatch(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ", time)
                found += 1
    assert found
