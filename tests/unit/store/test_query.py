"""Queries by the user's own SQL: they read, whatever they say."""

import sqlite3
from contextlib import closing

import pytest

from vanner.errors import DatabaseBusyError, DatabaseError
from vanner.store.database import Database
from vanner.store.query import run_query

WRITES = [
    "INSERT INTO source_state (source, kind, cursor, failures) VALUES ('x', 'feed', '{}', 0)",
    "WITH one AS (SELECT 1) INSERT INTO clock SELECT 1, 60, 0, 0, 'x' FROM one",
    "INSERT INTO clock VALUES (2, 60, 0, 0, 'x') RETURNING clock_id",
    "DELETE FROM item",
    "UPDATE item SET source = 'x'",
    "DROP VIEW alerts",
    "CREATE TABLE x (a)",
    "CREATE TEMP TABLE x (a)",
    "ALTER TABLE item RENAME TO x",
    "REINDEX",
    "ANALYZE",
    "VACUUM",
    "BEGIN IMMEDIATE",
    "SAVEPOINT x",
    "PRAGMA user_version = 5",
    "PRAGMA application_id = 5",
    "PRAGMA journal_mode = DELETE",
    "PRAGMA wal_checkpoint(TRUNCATE)",
    "PRAGMA query_only = OFF",
    "PRAGMA writable_schema = ON",
    "PRAGMA temp_store_directory = '/'",
    "PRAGMA locking_mode = EXCLUSIVE",
    "PRAGMA optimize",
    "EXPLAIN ATTACH 'x' AS x",
    "DETACH main",
]


@pytest.fixture
def rows(database):
    def run(query):
        with run_query(database, query) as result:
            return list(result.rows)

    return run


@pytest.fixture
def refusal(database):
    """The sentence with which a query is refused."""

    def run(query):
        with pytest.raises(DatabaseError) as caught, run_query(database, query) as result:
            list(result.rows)
        sentence = str(caught.value)
        assert sentence.startswith("The query cannot be run: ")
        assert sentence.endswith("; give one SELECT.")
        assert "\n" not in sentence
        return sentence

    return run


def files(folder):
    """What lies in a folder; the log and its index come and go with readers."""
    return {
        path.name: path.read_bytes()
        for path in folder.iterdir()
        if not path.name.endswith(("-wal", "-shm"))
    }


def test_a_query_tells_its_columns_and_rows(database, receive):
    receive("a")
    with run_query(database, "SELECT guid, 1 AS one FROM items") as result:
        assert result.columns == ("guid", "one")
        assert list(result.rows) == [("a", 1)]


def test_rows_come_as_they_are_asked_for(database):
    endless = "WITH RECURSIVE n(k) AS (SELECT 1 UNION ALL SELECT k + 1 FROM n) SELECT k FROM n"
    with run_query(database, endless) as result:
        assert [next(result.rows) for _ in range(3)] == [(1,), (2,), (3,)]


@pytest.mark.parametrize("statement", WRITES)
def test_a_statement_that_does_more_than_read_is_refused(receive, refusal, statement, tmp_path):
    receive("a")
    before = files(tmp_path)
    assert "it does more than read" in refusal(statement)
    assert files(tmp_path) == before


@pytest.mark.parametrize(
    "statement",
    [
        "ATTACH '{path}' AS x",
        "ATTACH 'file:{path}?mode=rwc' AS x",
        "ATTACH ':memory:' AS x",
        "VACUUM INTO '{path}'",
    ],
)
def test_no_statement_makes_a_file(refusal, statement, tmp_path):
    before = files(tmp_path)
    assert "it does more than read" in refusal(statement.format(path=tmp_path / "new.db"))
    assert files(tmp_path) == before


@pytest.mark.parametrize("statement", ["SELECT 1; SELECT 2", "SELECT 1; DELETE FROM item"])
def test_several_statements_are_refused(refusal, statement):
    assert "one statement at a time" in refusal(statement)


def test_one_statement_may_end_in_a_semicolon(rows):
    assert rows("SELECT 1 ; -- the only one\n") == [(1,)]


def test_colons_question_marks_and_percent_signs_are_plain_text(rows):
    assert rows("SELECT '12:30', 'a:b?', '50%', '%(x)s'") == [("12:30", "a:b?", "50%", "%(x)s")]


@pytest.mark.parametrize("query", ["SELECT ?", "SELECT :name", "SELECT @name"])
def test_a_parameter_that_nobody_gives_is_refused(refusal, query):
    assert "binding" in refusal(query)


@pytest.mark.parametrize("query", ["", "  ", "-- nothing"])
def test_an_empty_query_has_no_columns_and_no_rows(database, query):
    with run_query(database, query) as result:
        assert (result.columns, list(result.rows)) == ((), [])


@pytest.mark.parametrize(
    ("query", "reason"),
    [
        ("SELEC 1", 'near "SELEC": syntax error'),
        ("SELECT headlines FROM alerts", "no such column: headlines"),
        ("SELECT * FROM nowhere", "no such table: nowhere"),
        ("SELECT load_extension('x')", "not authorized"),
        ("SELECT 1\0", "null character"),
        ("SELECT '\udcff'", "not valid Unicode"),
        ("SELECT CAST(x'ff' AS TEXT)", "Could not decode to UTF-8"),
        ("SELECT abs(-9223372036854775808)", "integer overflow"),
    ],
)
def test_a_query_that_fails_says_why_in_one_sentence(database, query, reason):
    with pytest.raises(DatabaseError) as caught, run_query(database, query) as result:
        list(result.rows)
    assert reason in str(caught.value)
    assert str(caught.value).startswith("The query cannot be run: ")


def test_the_tables_and_views_can_be_looked_up(rows):
    assert ("main", "alerts", "view", 9, 0, 0) in rows("PRAGMA table_list")
    assert [row[1] for row in rows("PRAGMA table_info(clock)")][:2] == ["clock_id", "pulse_s"]
    assert rows("SELECT count(*) FROM pragma_table_info('alerts')") == [(9,)]
    assert rows("SELECT value FROM json_each('[7]')") == [(7,)]
    assert rows("PRAGMA integrity_check") == [("ok",)]
    assert len(rows("EXPLAIN QUERY PLAN SELECT * FROM items")) > 0


def test_every_public_view_can_be_queried(rows):
    views = [name for (name,) in rows("SELECT name FROM sqlite_master WHERE type = 'view'")]
    assert len(views) == 10
    assert [rows(f"SELECT * FROM {name}") for name in views] == [[]] * 10  # noqa: S608 - names of views


def test_a_query_sees_one_state_while_items_arrive(database, receive):
    receive("a")
    receive("b")
    with run_query(database, "SELECT guid FROM items ORDER BY item_id") as result:
        first = next(result.rows)
        receive("c")
        assert [first, *result.rows] == [("a",), ("b",)]


def test_a_database_that_another_program_holds_is_busy_and_not_a_wrong_query(database):
    database.close()
    with closing(sqlite3.connect(database.path, isolation_level=None)) as holder:
        holder.execute("PRAGMA locking_mode = EXCLUSIVE")
        holder.execute("BEGIN EXCLUSIVE")
        with pytest.raises(DatabaseBusyError), run_query(database, "SELECT * FROM item"):
            pass


def test_a_file_that_went_away_is_told_as_that(tmp_path):
    opened = Database.open(tmp_path / "gone.db")
    opened.close()
    (tmp_path / "gone.db").unlink()
    with (
        pytest.raises(DatabaseError, match=r"gone\.db cannot be used: it cannot be opened"),
        run_query(opened, "SELECT 1"),
    ):
        pass
