"""vanner db query: rows as a table, as CSV and as JSON, and nothing but reading."""

import csv
import io
import json
import signal
import sqlite3
from contextlib import closing

import pytest

MIXED = (
    "SELECT 1.25 AS share, NULL AS absent, 'Möwen 海' AS words, 7 AS number, "
    "'[bold]Ferry[/bold] [x]' AS title, x'00ff' AS bytes, 1700006400.75 AS seconds"
)


@pytest.fixture
def query(vanner, town_database):
    def run(sql, *options):
        return vanner("db", "query", "--database", town_database, sql, *options)

    return run


def test_a_table_shows_every_kind_of_value(query):
    head, row = query(MIXED).out.splitlines()
    assert head.split() == ["share", "absent", "words", "number", "title", "bytes", "seconds"]
    shown = {name: row[head.index(name) :] for name in ("words", "title", "bytes")}
    assert row.split()[0] == "1.25"
    # The CJK character is two cells wide: what follows it stands one place further left.
    assert shown["words"].startswith("Möwen 海")
    assert "[bold]Ferry[/bold] [x]" in row
    assert row.split()[-2:] == ["00ff", "1700006400.8"]


def test_csv_is_read_back_as_it_was(query):
    rows = list(csv.reader(io.StringIO(query(MIXED, "--format", "csv").out)))
    assert rows == [
        ["share", "absent", "words", "number", "title", "bytes", "seconds"],
        ["1.25", "", "Möwen 海", "7", "[bold]Ferry[/bold] [x]", "00ff", "1700006400.75"],
    ]


def test_json_is_read_back_as_it_was(query):
    assert json.loads(query(MIXED, "--format", "json").out) == [
        {
            "share": 1.25,
            "absent": None,
            "words": "Möwen 海",
            "number": 7,
            "title": "[bold]Ferry[/bold] [x]",
            "bytes": "00ff",
            "seconds": 1700006400.75,
        }
    ]


def test_json_of_no_rows_is_an_empty_array(query):
    assert json.loads(query("SELECT * FROM items WHERE item_id < 0", "-f", "json").out) == []


def test_json_keeps_columns_of_one_name_apart(query):
    found = json.loads(query("SELECT 1 AS n, 2 AS n, 3 AS n", "-f", "json").out)
    assert found == [{"n": 1, "n:1": 2, "n:2": 3}]


def test_json_has_no_number_that_json_lacks(query):
    def refuse(name):
        raise AssertionError(name)

    text = query("SELECT 9e999 AS high, -9e999 AS low", "-f", "json").out
    assert json.loads(text, parse_constant=refuse) == [{"high": "inf", "low": "-inf"}]


def test_csv_keeps_commas_quotes_and_line_ends(query):
    text = query("SELECT 'a, \"b\"' || char(10) || 'c' AS words", "-f", "csv").out
    assert list(csv.reader(io.StringIO(text))) == [["words"], ['a, "b"\nc']]


def test_a_table_of_no_rows_has_its_head(query):
    head = query("SELECT item_id, title FROM items WHERE item_id < 0").out
    assert head == "item_id  title\n"


def test_numbers_stand_to_the_right_and_words_to_the_left(query):
    sql = (
        "SELECT 'one' AS word, 7 AS number UNION ALL SELECT 'three', 1234 UNION ALL SELECT '', NULL"
    )
    assert query(sql).out.splitlines() == [
        "word   number",
        "one         7",
        "three    1234",
        "",
    ]


@pytest.mark.parametrize(
    ("number", "shown"),
    [
        ("0.123456", "0.1235"),
        ("1e-9", "1e-09"),
        ("12.0", "12"),
        ("-999.96", "-1000"),
        ("123456.78", "123456.8"),
        ("1e300", "1e+300"),
    ],
)
def test_a_table_rounds_fractions_and_never_whole_units(query, number, shown):
    assert query(f"SELECT {number} AS n").out.splitlines()[1].strip() == shown


@pytest.mark.parametrize("form", ["table", "csv", "json"])
def test_wide_rows_are_not_cut_in_a_pipe(query, form):
    out = query(
        "SELECT printf('%.*c', 900, 'x') AS a, printf('%.*c', 900, 'y') AS b", "-f", form
    ).out
    assert "x" * 900 in out
    assert "y" * 900 in out


def test_a_row_of_a_table_is_one_line_and_nothing_that_a_terminal_obeys(query):
    sql = "SELECT 'a' || char(10) || 'b' || char(27) || '[31m' || char(8232) || 'c' AS t"
    assert query(sql).out == "t\na b [31m c\n"


def test_a_title_with_square_brackets_stands_as_it_is(query):
    assert "Ferry [aground] off Möwenhook 海" in query("SELECT headline FROM alerts").out


@pytest.mark.slow
def test_on_a_terminal_a_long_cell_is_folded_and_not_cut(terminal, town_database):
    sql = "SELECT printf('%.*c', 90, 'x') AS a, '[red]' AS \"[b]\""
    status, drawn = terminal("db", "query", "-d", town_database, sql, columns=60)
    assert status == 0
    assert drawn.count("x") == 90
    assert "[red]" in drawn
    assert "[b]" in drawn


@pytest.mark.parametrize(
    "sql",
    [
        "DELETE FROM item",
        "UPDATE clock SET purpose = 'replay'",
        "DROP VIEW alerts",
        "CREATE TABLE mine (a)",
        "INSERT INTO desk_state (desk, started_s) VALUES ('x', 1)",
    ],
)
def test_writing_is_refused(query, sql, town_database):
    ended = query(sql)
    assert (ended.status, ended.out) == (3, "")
    assert ended.err.startswith("vanner: The query cannot be run: ")
    assert ended.err.count("\n") == 1
    with closing(sqlite3.connect(town_database)) as connection:
        assert connection.execute("SELECT count(*) FROM alerts").fetchone() == (1,)
        assert connection.execute("SELECT purpose FROM clock").fetchone() == ("replay",)


@pytest.mark.parametrize(
    ("sql", "named"),
    [
        ("SELECT nothing FROM alerts", "nothing"),
        ("SELEKT 1", "SELEKT"),
        ("SELECT * FROM nowhere", "nowhere"),
        ("SELECT 1; SELECT 2", "one statement"),
        ("SELECT :name", "give one SELECT|bind"),
        ("", "SELECT"),
        ("/* only a comment */", "SELECT"),
    ],
)
def test_wrong_sql_is_one_sentence(query, sql, named):
    ended = query(sql)
    assert (ended.status, ended.out) == (3, "")
    assert ended.err.startswith("vanner: The query ")
    assert ended.err.count("\n") == 1
    assert ended.err.endswith(".\n")
    assert not ended.err.endswith("..\n")
    assert any(one in ended.err for one in named.split("|"))


@pytest.mark.slow
def test_ctrl_c_ends_a_query_that_would_take_for_ever(start, town_database):
    # Many rows at once, which show that the query runs, then one that takes for ever.
    endless = (
        "WITH RECURSIVE n(i) AS (SELECT 1 UNION ALL SELECT i + 1 FROM n LIMIT 9000) "
        "SELECT i FROM n UNION ALL SELECT count(*) FROM item a, item b, item c, item d"
    )
    running = start("db", "query", "-f", "csv", "-d", town_database, endless)
    assert running.stdout.readline() == "i\n"
    running.send_signal(signal.SIGINT)
    _, err = running.communicate(timeout=60)
    assert running.returncode == -signal.SIGINT  # a shell reports it as 130
    assert err == ""
