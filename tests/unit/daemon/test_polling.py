"""Polling one source: items and cursor are accepted together or not at all."""

import json
import random

import pytest
from structlog.testing import capture_logs

from vanner.daemon.polling import BACKLOG_WAIT_S, POLLS_IN_A_ROW, Poller
from vanner.errors import DatabaseError
from vanner.records import Poll, RawItem
from vanner.settings import FeedSettings
from vanner.sources.archive import ArchiveSource
from vanner.sources.feed import FeedSource
from vanner.store.accept import Accepted
from vanner.store.pulses import ClockState, start_clock
from vanner.store.source_states import cursor_of, source_states

NOW_S = 1_700_006_400.0
EVERY_S = 300.0


@pytest.fixture
def database(open_database):
    return open_database()


@pytest.fixture
def poller(database):
    """Builds a poller of a source; its clock stands."""
    opened = []

    def build(source, kind="archive", now_s=NOW_S):
        opened.append(source)
        return Poller(database, source, kind, EVERY_S, random.Random(1), lambda: now_s)

    yield build
    for source in opened:
        source.close()


@pytest.fixture
def archive(tmp_path):
    def write(entries):
        path = tmp_path / "past.jsonl"
        path.write_text("".join(f"{json.dumps(one)}\n" for one in entries))
        return path

    return write


@pytest.fixture
def feed(http_server):
    """A feed source whose server answers as a test sets it."""
    settings = FeedSettings(name="wire", kind="feed", url=http_server.url("/feed"))
    return FeedSource(settings)


def rss(*titles):
    entries = "".join(f"<item><guid>{t}</guid><title>{t}</title></item>" for t in titles)
    text = f'<?xml version="1.0"?><rss version="2.0"><channel>{entries}</channel></rss>'
    return text.encode()


def entries(count):
    return [{"id": f"n{number}", "title": f"Tide table {number}"} for number in range(count)]


def state_of(database, name):
    with database.read() as connection:
        return next(one for one in source_states(connection) if one.source == name)


def titles(database):
    with database.read() as connection:
        return list(
            connection.exec_driver_sql("SELECT title FROM items ORDER BY item_id").scalars()
        )


def test_a_turn_accepts_items_and_their_cursor(database, poller, archive):
    polled = poller(ArchiveSource("past", archive(entries(3)))).turn()
    assert polled.accepted == Accepted(new=3)
    assert (polled.faults, polled.failed) == ((), None)
    assert titles(database) == ["Tide table 0", "Tide table 1", "Tide table 2"]
    with database.read() as connection:
        assert cursor_of(connection, "past") == {"line": 3}
    assert state_of(database, "past").last_polled_s == NOW_S


def test_a_turn_goes_on_while_the_source_has_more(database, poller, archive):
    source = ArchiveSource("past", archive(entries(7)), batch_items=2)
    assert poller(source).turn().accepted == Accepted(new=7)
    assert len(titles(database)) == 7


class Endless:
    """A source that always has more."""

    name = "endless"
    polls = 0

    def poll(self, cursor, _now_s):
        self.polls += 1
        number = cursor.get("number", 0)
        return Poll((RawItem(f"n{number}", "Tide"),), {"number": number + 1}, more=True)

    def close(self):
        """Nothing is open."""


def test_a_source_that_always_has_more_waits_for_its_next_turn(database, poller):
    source = Endless()
    polled = poller(source).turn()
    assert source.polls == POLLS_IN_A_ROW
    assert polled.accepted == Accepted(new=POLLS_IN_A_ROW)
    assert polled.next_s == NOW_S + BACKLOG_WAIT_S
    with database.read() as connection:
        assert cursor_of(connection, "endless") == {"number": POLLS_IN_A_ROW}


def test_items_without_title_and_text_cost_only_themselves(database, poller, archive):
    path = archive([{"id": "a", "title": "Tide"}, {"id": "empty"}, {"id": "b", "title": "Ebb"}])
    with capture_logs() as logs:
        polled = poller(ArchiveSource("past", path)).turn()
    assert titles(database) == ["Tide", "Ebb"]
    assert polled.accepted == Accepted(new=2)
    assert len(polled.faults) == 1
    left_out = [one for one in logs if one["event"] == "item_left_out"]
    assert left_out == [
        {
            "event": "item_left_out",
            "log_level": "warning",
            "source": "past",
            "reason": polled.faults[0],
        }
    ]


def test_what_a_source_itself_left_out_is_told_and_kept_as_its_last_error(
    database, poller, archive
):
    path = archive(entries(1))
    path.write_text("{\n" + path.read_text() + "[]\n")
    with capture_logs() as logs:
        polled = poller(ArchiveSource("past", path)).turn()
    assert polled.accepted == Accepted(new=1)
    assert [fault.partition(":")[0] for fault in polled.faults] == [
        "past.jsonl, line 1",
        "past.jsonl, line 3",
    ]
    assert sum(one["event"] == "item_left_out" for one in logs) == 2
    state = state_of(database, "past")
    assert (state.last_error, state.failures) == (polled.faults[-1], 0)


def test_accepted_items_are_logged_with_their_numbers(poller, archive):
    with capture_logs() as logs:
        poller(ArchiveSource("past", archive(entries(2)))).turn()
    assert logs == [
        {
            "event": "items_accepted",
            "log_level": "info",
            "source": "past",
            "new": 2,
            "revised": 0,
            "known": 0,
            "teaches": True,
        }
    ]


def test_a_failure_keeps_the_cursor_and_counts(database, poller, feed, http_server):
    http_server.set("/feed", rss("Tide"), headers={"ETag": '"one"'})
    wire = poller(feed, "feed")
    wire.turn()
    with database.read() as connection:
        before = cursor_of(connection, "wire")
    assert before["etag"] == '"one"'
    http_server.set("/feed", status=500)
    for failures in (1, 2, 3):
        with capture_logs() as logs:
            polled = wire.turn()
        assert "500" in polled.failed
        assert [(one["event"], one["failures"]) for one in logs] == [("poll_failed", failures)]
        state = state_of(database, "wire")
        assert (state.failures, state.last_error) == (failures, polled.failed)
    with database.read() as connection:
        assert cursor_of(connection, "wire") == before


def test_a_success_ends_the_count_of_failures(database, poller, feed, http_server):
    http_server.set("/feed", status=500)
    wire = poller(feed, "feed")
    wire.turn()
    http_server.set("/feed", rss("Tide"))
    assert wire.turn().failed is None
    state = state_of(database, "wire")
    assert (state.failures, state.last_error) == (0, None)


def test_failures_push_the_next_turn_further_away(poller, feed, http_server):
    http_server.set("/feed", status=500)
    wire = poller(feed, "feed")
    waits_s = [wire.turn().next_s - NOW_S for _ in range(5)]
    # Half of min(300 * 2^n, 3600) up to all of it, and never less than the interval.
    for failures, wait_s in enumerate(waits_s, start=1):
        longest_s = min(EVERY_S * 2**failures, 3600)
        assert max(longest_s / 2, EVERY_S) <= wait_s <= longest_s


def test_a_server_that_asks_for_a_pause_is_left_alone_for_so_long(poller, feed, http_server):
    http_server.set("/feed", status=503, headers={"Retry-After": "5000"})
    assert poller(feed, "feed").turn().next_s == NOW_S + 5000


def test_a_stopped_source_is_never_polled_again(database, poller, feed, http_server):
    http_server.set("/feed", status=410)
    wire = poller(feed, "feed")
    first = wire.turn()
    assert first.next_s is None
    assert len(http_server.requests) == 1
    http_server.set("/feed", rss("Tide"))
    second = wire.turn()
    assert (second.next_s, second.accepted) == (None, Accepted())
    assert second.failed == first.failed
    assert len(http_server.requests) == 1
    state = state_of(database, "wire")
    assert state.stopped == first.failed


def test_items_and_cursor_are_kept_together_or_not_at_all(database, poller, archive):
    source = ArchiveSource("past", archive(entries(4)), batch_items=2)
    past = poller(source)
    with database.write() as connection:
        # From the second poll on, storing the cursor fails after the items were stored.
        connection.exec_driver_sql(
            "CREATE TRIGGER full_disk BEFORE UPDATE ON source_state "
            "BEGIN SELECT RAISE(ABORT, 'no room'); END"
        )
    with pytest.raises(DatabaseError):
        past.turn()
    assert titles(database) == ["Tide table 0", "Tide table 1"]
    with database.read() as connection:
        assert cursor_of(connection, "past") == {"line": 2}
    with database.write() as connection:
        connection.exec_driver_sql("DROP TRIGGER full_disk")
    assert past.turn().accepted == Accepted(new=2)
    assert len(titles(database)) == 4


def test_an_item_never_falls_into_a_pulse_that_has_closed(database, poller, archive):
    closed_s = NOW_S + 600
    with database.write() as connection:
        start_clock(connection, ClockState(60.0, closed_s, closed_s, "service"))
    poller(ArchiveSource("past", archive(entries(1)))).turn()
    with database.read() as connection:
        received = connection.exec_driver_sql("SELECT received_s FROM item").scalar_one()
    assert received == closed_s
