"""Everything concluded can be derived again from what was received: rebuild and replay."""

import shutil
import sqlite3
from contextlib import closing

import pytest

from vanner.daemon.archiving import DEMO, REPLAY, accept_archive, open_fresh, replay
from vanner.daemon.engine import Engine
from vanner.daemon.plan import replay_plan
from vanner.daemon.rebuilding import rebuild, recorded_plans
from vanner.errors import DatabaseError, InputError
from vanner.records import RawItem
from vanner.store.database import Database
from vanner.store.outbox import counts_by_state, mark
from vanner.store.source_states import keep_cursor, note_failure

START_S = 1_700_006_400.0
BEGIN_S = START_S - 600.0
END_S = START_S + 6 * 3600.0


@pytest.fixture(scope="module")
def served(run, reference, plans, tmp_path_factory):
    """The file of a service that ran several times, the second desk added in between."""
    arrivals, _ = reference(2)
    database = Database.open(tmp_path_factory.mktemp("served") / "vanner.db")
    run(database, arrivals, plans[:1], START_S + 3600.0, pulses_per_commit=1).save()
    for until_s in (START_S + 3 * 3600.0, END_S):
        engine = Engine(database, plans, 60.0, pulses_per_checkpoint=11)
        engine.begin(BEGIN_S)
        engine.advance(until_s)
    with database.write() as connection:
        keep_cursor(connection, "town gazette", "feed", {"etag": "x"}, END_S - 30.0)
        note_failure(connection, "weather mast", "feed", END_S - 20.0, "The mast is down.")
    database.close()
    return database.path


@pytest.fixture
def original(served, open_database, tmp_path):
    """A copy of the service's database for one test."""
    shutil.copy(served, tmp_path / "original.db")
    return open_database("original.db")


def _without_states(rows):
    return rows | {"mail": [row[:-1] for row in rows["mail"]]}


def test_a_rebuilt_database_has_every_row_of_the_original(
    original, open_database, dump, differences, plans, tmp_path
):
    before = dump(original)
    items = rebuild(original, tmp_path / "new.db", plans, 60.0, lambda _: None)
    assert items == len(before["items"])
    assert dump(original) == before
    rebuilt = dump(open_database("new.db"))
    assert all(rebuilt.values())
    # Numbers of stories and digests follow the order of their making, which is the same.
    assert differences(_without_states(rebuilt), _without_states(before)) == {}


def test_a_rebuilt_database_sends_nothing_that_was_sent_and_nothing_never_queued(
    original, open_database, dump, plans, tmp_path
):
    keys = sorted(row[0] for row in dump(original)["mail"])
    with original.write() as connection:
        mark(connection, keys[0], "sent", now_s=END_S)
        mark(connection, keys[1], "refused", last_error="no such mailbox")
        connection.exec_driver_sql("DELETE FROM message WHERE key = ?", (keys[2],))
    rebuild(original, tmp_path / "new.db", plans, 60.0, lambda _: None)
    states = {row[0]: row[-1] for row in dump(open_database("new.db"))["mail"]}
    assert [states[key] for key in keys[:3]] == ["sent", "refused", "withheld"]
    assert {states[key] for key in keys[3:]} == {"queued"}


def test_the_service_goes_on_from_a_rebuilt_database_as_from_the_original(
    original, open_database, feed, dump, differences, arrival, plans, tmp_path
):
    rebuild(original, tmp_path / "new.db", plans, 60.0, lambda _: None)
    later = [
        arrival(f"later{n}", f"lantern festival ordinary{n} ordinary1", END_S + 60.0 * n)
        for n in range(12)
    ]
    dumps = []
    for database in (original, open_database("new.db")):
        feed(database, later)
        engine = Engine(database, plans, 60.0)
        engine.begin(END_S)
        engine.advance(END_S + 3 * 3600.0)
        dumps.append(dump(database))
    assert differences(*dumps) == {}
    assert "lantern" in {row[1] for row in dumps[0]["alert_terms"]}


def test_a_rebuild_under_other_parameters_reads_as_if_they_had_held_all_along(
    original, open_database, run, dump, differences, reference, plan, tmp_path
):
    stricter = [plan("quay", background_share=0.8, alerts_per_day=2.0)]
    rebuild(original, tmp_path / "new.db", stricter, 60.0, lambda _: None)
    fresh = open_database("fresh.db")
    run(fresh, reference(2)[0], stricter, END_S)
    rebuilt, expected = dump(open_database("new.db")), dump(fresh)
    for rows in (rebuilt, expected):
        del rows["source_health"]
    assert differences(rebuilt, expected) == {}


def test_the_plans_that_desks_followed_are_recorded(original, plans):
    recorded = recorded_plans(original)
    assert [one.desk for one in recorded] == ["mast", "quay"]
    told = {one.desk: one for one in plans}
    assert all(one.parameters == told[one.desk].parameters for one in recorded)
    assert all(one.sources == told[one.desk].sources for one in recorded)


def test_a_rebuild_never_overwrites_a_file(original, plans, tmp_path):
    (tmp_path / "kept.db").write_text("mine")
    with pytest.raises(DatabaseError, match=r"kept\.db exists"):
        rebuild(original, tmp_path / "kept.db", plans, 60.0, lambda _: None)
    assert (tmp_path / "kept.db").read_text() == "mine"


def test_a_database_that_nothing_has_served_is_rebuilt_without_results(
    open_database, feed, dump, stream, plans, tmp_path
):
    database = open_database()
    feed(database, stream(3, hours=1))
    items = rebuild(database, tmp_path / "new.db", plans, 60.0, lambda _: None)
    rows = dump(open_database("new.db"))
    assert items == len(rows["items"])
    assert rows["readings"] == rows["digests"] == []


@pytest.fixture
def archive(reference):
    """A stream as an archive's items."""
    return [
        RawItem(
            one.item.guid,
            one.item.title,
            one.item.content_text,
            published_s=one.received_s,
            source=one.item.source,
        )
        for one in reference(1)[0]
    ]


def _replayed(path, archive, **told):
    database = open_fresh(path)
    accept_archive(database, archive, "archive", 2e9, pytest.fail, lambda _: None)
    end_s = replay(database, [replay_plan(24.0, "UTC", 60.0)], lambda _: None, **told)
    return database, end_s


def _text(path):
    with closing(sqlite3.connect(path)) as connection:
        return "\n".join(connection.iterdump()).encode("utf-8", "surrogatepass")


def test_replaying_twice_gives_byte_for_byte_the_same_database(archive, dump, tmp_path):
    texts = []
    for name in ("one.db", "two.db"):
        database, end_s = _replayed(tmp_path / name, archive)
        rows = dump(database)
        database.close()
        assert rows["readings"]
        assert end_s - 60.0 <= max(one.published_s for one in archive) < end_s
        texts.append(_text(tmp_path / name))
    assert texts[0] == texts[1]


def test_replaying_into_the_same_file_begins_anew(archive, tmp_path):
    path = tmp_path / "replay.db"
    texts = []
    for _ in range(2):
        _replayed(path, archive)[0].close()
        texts.append(_text(path))
    assert texts[0] == texts[1]


def test_a_replay_of_nothing_says_so(tmp_path):
    database = open_fresh(tmp_path / "replay.db")
    with pytest.raises(InputError, match="no usable item"):
        replay(database, [replay_plan(5.0, "UTC", 60.0)], lambda _: None)
    database.close()


def test_items_without_a_date_are_left_out_of_a_replay_and_named(tmp_path):
    database, faults = open_fresh(tmp_path / "replay.db"), []
    raw = [RawItem("dated", "Tide", published_s=START_S), RawItem("dateless", "Quay")]
    taken = accept_archive(database, raw, "archive", 2e9, faults.append, lambda _: None)
    database.close()
    assert taken.new == 1
    (fault,) = faults
    assert "dateless" in fault


@pytest.mark.parametrize("purpose", [REPLAY, DEMO])
def test_a_replays_own_database_is_replaced(tmp_path, archive, purpose):
    _replayed(tmp_path / "replay.db", archive[:5], purpose=purpose)[0].close()
    database = open_fresh(tmp_path / "replay.db")
    with database.read() as connection:
        assert counts_by_state(connection) == {}
        assert connection.exec_driver_sql("SELECT count(*) FROM items").scalar() == 0
    database.close()


def test_a_services_database_is_never_replaced(original, dump):
    before = dump(original)
    with pytest.raises(DatabaseError, match="serves a daemon"):
        open_fresh(original.path)
    assert dump(original) == before
