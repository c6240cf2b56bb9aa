"""vanner status: how the daemon, its desks, sources and mail stand."""

import pytest

from vanner.daemon.lock import sole_daemon
from vanner.records import Message
from vanner.store.database import Database
from vanner.store.outbox import mark, queue
from vanner.store.source_states import keep_cursor, note_failure, register

NOW_S = 1_700_308_800.0


@pytest.fixture
def change(town_database):
    """Writes into the copy of the replay's database."""
    database = Database.open(town_database)

    def write(work, *arguments, **told):
        with database.write() as connection:
            work(connection, *arguments, **told)

    yield write
    database.close()


@pytest.fixture
def show(vanner, town_database):
    def run():
        ended = vanner("status", "--database", town_database)
        assert (ended.status, ended.err) == (0, "")
        return ended.out

    return run


def fact(text, name):
    """What stands behind a name at the top."""
    return next(row.removeprefix(name).strip() for row in text.splitlines() if row.startswith(name))


def row_of(text, head, name):
    """The row of a name in the table under a head, by column; cells are two blanks apart."""
    lines = text.splitlines()
    begin = next(place for place, one in enumerate(lines) if one.startswith(head))
    found = next(one for one in lines[begin:] if one.startswith(f"{name} "))
    return [cell.strip() for cell in found.split("  ") if cell.strip()]


def test_the_top_tells_database_items_and_how_far_it_is_read(show, town_database):
    text = show()
    assert fact(text, "Database") == str(town_database)
    assert fact(text, "Items") == "684"
    assert fact(text, "Read") == "until 2023-11-18T12:12:00Z"
    assert fact(text, "Mail") == "none"


def test_without_a_daemon_it_says_so(show):
    assert fact(show(), "Daemon") == "none serves it"


def test_with_a_daemon_it_says_so(show, town_database):
    with sole_daemon(town_database):
        assert fact(show(), "Daemon") == "serves it"
    assert fact(show(), "Daemon") == "none serves it"


def test_a_desk_shows_its_alerts_of_a_day(show):
    desk, since, raised, _, running = row_of(show(), "DESK", "replay")
    assert (desk, since) == ("replay", "2023-11-15T00:00:00Z")
    assert (raised, running) == ("1", "1")


def test_a_source_shows_its_items_and_the_last_of_them(show):
    text = show()
    rows = [row_of(text, "SOURCE", name) for name in ("gull-radio", "mole-post", "quay-letter")]
    assert sum(int(row[2]) for row in rows) == 684
    assert {row[1] for row in rows} == {"archive"}
    assert max(row[3] for row in rows) == "2023-11-18T12:11:00Z"
    assert {row[4] for row in rows} == {"ok"}


def test_a_failing_source_shows_how_often_and_why(show, change):
    for _ in range(2):
        change(note_failure, "wire", "feed", NOW_S, "wire: it answers with HTTP status 500.")
    row = row_of(show(), "SOURCE", "wire")
    assert row == [
        "wire",
        "feed",
        "0",
        "FAILING, 2 failures in a row: wire: it answers with HTTP status 500.",
    ]


def test_a_stopped_source_shows_why(show, change):
    change(keep_cursor, "wire", "feed", {}, NOW_S, stopped="The feed is gone for good.")
    assert row_of(show(), "SOURCE", "wire")[-1] == "STOPPED: The feed is gone for good."


def test_a_source_that_left_something_out_shows_the_last_of_it(show, change):
    change(keep_cursor, "wire", "feed", {}, NOW_S, last_error="wire: entry 3 has no text.")
    assert row_of(show(), "SOURCE", "wire")[-1] == "ok; left out: wire: entry 3 has no text."


def test_a_source_that_was_never_polled_shows_that(show, change):
    change(register, [("wire", "feed")])
    assert row_of(show(), "SOURCE", "wire") == ["wire", "feed", "0", "not polled yet"]


def test_what_a_source_says_cannot_steer_the_terminal(show, change):
    change(note_failure, "wire", "feed", NOW_S, "odd\x1b[2Janswer\nSOURCE")
    assert row_of(show(), "SOURCE", "wire")[-1].endswith("odd [2Janswer SOURCE")


def test_mail_is_counted_by_state(show, change):
    for number, state in enumerate(["sent", "sent", "unconfirmed", "queued"]):
        message = Message(f"k{number}", "replay", ("a@b.example",), "s", "t", "<p>t</p>", NOW_S)
        change(queue, message)
        change(mark, message.key, state)
    assert fact(show(), "Mail") == "1 queued, 2 sent, 1 unconfirmed"


def test_columns_stand_in_line(show, change):
    change(note_failure, "w", "feed", NOW_S, "Gone.")
    head, *rows = show().split("\n\n")[-1].strip().splitlines()
    assert len(rows) == 4
    for name in ("KIND", "STATE"):
        place = head.index(name)
        assert {(row[place - 2 : place], row[place] == " ") for row in rows} == {("  ", False)}
    end = head.index("ITEMS") + len("ITEMS")
    assert all(row[end - 1].isdigit() and row[end] == " " for row in rows)


def test_a_database_that_nothing_has_served_says_that_nothing_is_read(vanner, tmp_path):
    Database.open(tmp_path / "new.db").close()
    ended = vanner("status", "-d", "new.db")
    assert ended.status == 0
    assert fact(ended.out, "Read") == "nothing yet"
    assert fact(ended.out, "Items") == "0"
    assert "DESK" not in ended.out
