"""The running service: its jobs beside one another, from start to stop."""

import random
import sys
import threading
import time

import pytest
from structlog.testing import capture_logs

from vanner.daemon.engine import Engine
from vanner.daemon.posting import Postman
from vanner.daemon.service import Service
from vanner.intake import take_in
from vanner.records import Poll, RawItem
from vanner.settings import FeedSettings
from vanner.sources.archive import ArchiveSource
from vanner.sources.feed import FeedSource
from vanner.store.accept import accept, receive_time_s
from vanner.store.pulses import ClockState, start_clock
from vanner.store.source_states import source_states

PATIENCE_S = 60


def wait_until(holds):
    """Look again and again until something holds; what hangs fails here."""
    for _ in range(PATIENCE_S * 50):
        if holds():
            return
        time.sleep(0.02)
    pytest.fail("it never came about")


@pytest.fixture
def database(open_database):
    return open_database()


@pytest.fixture
def logs():
    with capture_logs() as captured:
        yield captured


@pytest.fixture
def build(database, plan):
    """A service of one desk that reads every source, with pulses of a second."""
    built = []

    def of(*sources, every_s=1.0, on_pulse=None):
        plans = (plan("quay", pulse_s=1.0),)
        service = Service(
            database,
            Engine(database, plans, 1.0),
            Postman(database, plans, None, None, time.time),
            [(source, "test", every_s) for source in sources],
            random.Random(1),
            time.time,
            on_pulse,
        )
        built.append(service)
        return service

    yield of
    for service in built:
        service.stop()


@pytest.fixture
def archive(tmp_path):
    path = tmp_path / "past.jsonl"
    path.write_text('{"id": "a", "title": "Tide tables"}\n')
    return ArchiveSource("past", path)


def count(database, view):
    with database.read() as connection:
        return connection.exec_driver_sql(f"SELECT count(*) FROM {view}").scalar_one()  # noqa: S608 - constants


class Broken:
    """A source with a mistake in it."""

    name = "broken"
    polls = 0

    def poll(self, _cursor, _now_s):
        self.polls += 1
        raise ZeroDivisionError("nobody foresaw this")

    def close(self):
        """Nothing is open."""


def events(logs, name):
    return [one for one in logs if one["event"] == name]


def test_a_source_that_raises_stops_no_other(build, database, archive, logs):
    broken = Broken()
    build(broken, archive).start()
    wait_until(lambda: count(database, "readings") == 1)
    wait_until(lambda: events(logs, "poll_failed"))
    assert broken.polls == 1
    assert events(logs, "poll_failed")[0]["source"] == "broken"
    assert events(logs, "poll_failed")[0]["log_level"] == "error"


def test_a_source_that_is_gone_stops_no_other(build, database, archive, logs, http_server):
    url = http_server.set("/feed", status=410)
    gone = FeedSource(FeedSettings(name="wire", kind="feed", url=url))
    build(gone, archive).start()
    wait_until(lambda: count(database, "readings") == 1)
    wait_until(lambda: events(logs, "source_stopped"))
    gone.close()
    assert events(logs, "source_stopped") == [
        {"event": "source_stopped", "log_level": "warning", "source": "wire"}
    ]


class Hanging:
    """A source whose server never answers, until the test is over."""

    def __init__(self, name, begun, over):
        self.name, self._begun, self._over = name, begun, over

    def poll(self, cursor, _now_s):
        self._begun.append(self.name)
        self._over.wait()
        return Poll((), cursor)

    def close(self):
        """Nothing is open."""


def test_polls_that_hang_hold_no_pulse_up(build, database):
    begun, over = [], threading.Event()
    try:
        build(*(Hanging(f"wire {number}", begun, over) for number in range(40))).start()
        wait_until(lambda: len(begun) >= 30)
        with database.write() as connection:
            now_s = receive_time_s(connection, time.time())
            accept(
                connection, [take_in(RawItem("a", "Tide"), "inbox", now_s)], now_s, teaches=False
            )
        wait_until(lambda: count(database, "readings") == 1)
    finally:
        over.set()


def test_a_start_makes_every_source_known(build, database):
    build(Broken()).start()
    with database.read() as connection:
        assert [(one.source, one.kind) for one in source_states(connection)] == [("broken", "test")]


def test_a_start_reads_what_waited(build, database):
    begun_s = time.time() // 1 - 100
    with database.write() as connection:
        start_clock(connection, ClockState(1.0, begun_s, begun_s, "service"))
        item = take_in(RawItem("a", "Ferry aground"), "wire", begun_s)
        accept(connection, [item], begun_s + 10, teaches=False)
    build().start()
    wait_until(lambda: count(database, "readings") == 1)


def test_start_and_stop_are_logged(build, logs):
    service = build(Broken())
    service.start()
    service.stop()
    assert events(logs, "service_started") == [
        {"event": "service_started", "log_level": "info", "sources": 1, "desks": 1}
    ]
    assert len(events(logs, "service_stopped")) == 1


def test_a_stop_saves_the_desks_as_they_stand(build, database, archive):
    service = build(archive)
    service.start()
    wait_until(lambda: count(database, "readings") == 1)
    service.stop()
    with database.read() as connection:
        saved, read = connection.exec_driver_sql(
            "SELECT checkpoint_s, read_s FROM desk_state, clock"
        ).one()
    assert saved == read


@pytest.mark.slow
def test_a_database_that_refuses_ends_no_job(build, database, archive, logs):
    with database.write() as connection:
        connection.exec_driver_sql(
            "CREATE TRIGGER full_disk BEFORE INSERT ON reading "
            "BEGIN SELECT RAISE(ABORT, 'no room'); END"
        )
    build(archive).start()
    wait_until(lambda: events(logs, "pulse_failed"))
    with database.write() as connection:
        connection.exec_driver_sql("DROP TRIGGER full_disk")
    # The pulse is tried again some seconds later.
    wait_until(lambda: count(database, "readings") == 1)


@pytest.fixture
def busy_threads():
    """Threads take turns all the time, as on a machine with much to do."""
    before = sys.getswitchinterval()
    sys.setswitchinterval(1e-6)
    yield
    sys.setswitchinterval(before)


class Dripping:
    """A source that brings one item a poll."""

    def __init__(self, name="drip"):
        self.name = name

    def poll(self, cursor, _now_s):
        number = cursor.get("number", 0)
        return Poll((RawItem(f"n{number}", f"Tide {number}"),), {"number": number + 1})

    def close(self):
        """Nothing is open."""


@pytest.mark.slow
@pytest.mark.usefixtures("busy_threads")
def test_pulses_that_take_longer_than_a_pulse_follow_one_another(build):
    ends_s = []

    def linger(progress):
        ends_s.append(progress.end_s)
        time.sleep(1.05)  # longer than the pulse of a second

    build(Dripping(), every_s=0.3, on_pulse=linger).start()
    wait_until(lambda: len(ends_s) >= 4)
    assert ends_s == sorted(set(ends_s))


def test_a_stop_amid_the_work_ends_without_a_fault(build, logs):
    # A fault in a thread of the service fails the test, too.
    for number in range(12):
        service = build(*(Dripping(f"drip {one}") for one in range(8)))
        service.start()
        time.sleep(number * 0.004)  # somewhere in the first turns of its jobs
        service.stop()
    assert len(events(logs, "service_stopped")) == 12
    assert [one for one in logs if one["log_level"] != "info"] == []


def test_after_a_stop_nothing_is_polled_or_read(build, database):
    source = Broken()
    service = build(source)
    service.start()
    wait_until(lambda: source.polls)
    service.stop()
    polls = source.polls
    with database.read() as connection:
        read = connection.exec_driver_sql("SELECT read_s FROM clock").scalar_one()
    time.sleep(2.5)  # longer than a pulse and than the source's interval
    assert source.polls == polls
    with database.read() as connection:
        assert connection.exec_driver_sql("SELECT read_s FROM clock").scalar_one() == read
