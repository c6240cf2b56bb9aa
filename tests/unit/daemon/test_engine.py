"""What the engine writes does not depend on when and how often it is called, or restarted."""

import sqlite3
from contextlib import closing

import numpy as np
import pytest

from vanner.daemon.engine import Engine
from vanner.errors import DatabaseError

START_S = 1_700_006_400.0
BEGIN_S = START_S - 600.0
END_S = START_S + 6 * 3600.0


def _engine(database, plans, **told):
    engine = Engine(database, plans, 60.0, **told)
    engine.begin(BEGIN_S)
    return engine


def test_the_streams_of_these_tests_hold_something_for_every_view(reference):
    for seed in (1, 2):
        _, rows = reference(seed)
        assert sum(alert[1] == "quay" for alert in rows["alerts"]) >= 2
        assert {alert[1] for alert in rows["alerts"]} == {"quay", "mast"}
        assert any(alert[2] == "cleared" for alert in rows["alerts"])
        assert len(rows["digests"]) == 7 + 3
        assert sum(key.startswith("digest-") for key, *_ in rows["mail"]) == 7
        assert sum(key.startswith("alert-") for key, *_ in rows["mail"]) >= 2
        assert all(rows.values())


@pytest.mark.parametrize("seed", [1, 2])
def test_minute_by_minute_equals_one_go(
    open_database, feed, dump, differences, reference, plans, seed
):
    arrivals, expected = reference(seed)
    database = open_database()
    feed(database, [])
    engine = _engine(database, plans)
    waiting, now_s = list(arrivals), BEGIN_S
    while now_s < END_S:
        # In the beginning every minute, then at times that a slow machine would miss.
        pause_s = 60.0 if now_s < START_S + 5400.0 else 60.0 * (1 + now_s // 60 % 7)
        now_s = min(now_s + pause_s, END_S)
        due = [one for one in waiting if one.received_s < now_s]
        del waiting[: len(due)]
        if due:
            feed(database, due)
        engine.advance(now_s)
    assert not waiting
    assert differences(dump(database), expected) == {}


@pytest.mark.parametrize("seed", [1, 2])
@pytest.mark.parametrize("saves", [True, False])
def test_restarts_at_any_time_change_no_row(
    open_database, feed, dump, differences, reference, plans, seed, saves
):
    arrivals, expected = reference(seed)
    rng = np.random.default_rng(seed)
    stops = np.sort(BEGIN_S + rng.random(5) * (END_S - BEGIN_S)).tolist()
    done_s = BEGIN_S
    for stop_s in [*stops, END_S]:
        database = open_database()
        feed(database, [one for one in arrivals if done_s <= one.received_s < stop_s])
        engine = _engine(database, plans, pulses_per_checkpoint=int(rng.integers(2, 40)))
        engine.advance(stop_s)
        if saves:
            engine.save()
        database.close()
        done_s = stop_s
    assert differences(dump(database), expected) == {}


@pytest.mark.parametrize(
    "sizes",
    [
        {"pulses_per_commit": 1, "pulses_per_checkpoint": 2},
        {"pulses_per_commit": 7, "pulses_per_checkpoint": 3},
        {"pulses_per_commit": 100_000, "pulses_per_checkpoint": 100_000},
    ],
)
def test_sizes_of_commits_and_checkpoints_change_no_row(
    open_database, run, dump, differences, reference, plans, sizes
):
    arrivals, expected = reference(1)
    database = open_database()
    run(database, arrivals, plans, END_S, **sizes)
    assert differences(dump(database), expected) == {}


def test_an_engine_goes_on_from_what_was_committed_when_its_caller_failed(
    open_database, feed, dump, differences, reference, plans
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    engine = _engine(database, plans, pulses_per_commit=5, pulses_per_checkpoint=30)
    calls = []

    def fail_now_and_then(progress):
        calls.append(progress.end_s)
        if len(calls) % 15 == 0:
            raise RuntimeError("the terminal is gone")

    failures = 0
    while engine.read_s < END_S:
        try:
            engine.advance(END_S, fail_now_and_then)
        except RuntimeError:
            failures += 1
    assert failures >= 3
    assert differences(dump(database), expected) == {}


def test_a_pulse_that_the_database_refuses_leaves_no_trace_and_succeeds_later(
    open_database, feed, dump, differences, reference, plans
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    engine = _engine(database, plans)
    second = [item_id for desk, item_id, *_ in expected["readings"] if desk == "mast"]
    refused = second[len(second) // 2]
    with closing(sqlite3.connect(database.path, isolation_level=None)) as other:
        other.execute(
            f"CREATE TRIGGER refuse BEFORE INSERT ON reading WHEN NEW.item_id = {refused} "
            "AND NEW.desk = 'mast' BEGIN SELECT RAISE(ABORT, 'no room'); END"
        )
        for _ in range(2):
            with pytest.raises(DatabaseError):
                engine.advance(END_S)
        rows = dump(database)
        assert 0 < len(rows["readings"]) < len(expected["readings"])
        assert not [row for row in rows["readings"] if row[1] >= refused]
        other.execute("DROP TRIGGER refuse")
    engine.advance(END_S)
    assert differences(dump(database), expected) == {}


def test_looking_again_at_the_same_time_writes_nothing(open_database, run, dump, reference, plans):
    arrivals, _ = reference(1)
    database = open_database()
    engine = run(database, arrivals, plans, START_S + 7200.0)
    before = dump(database)
    for until_s in (START_S + 7200.0, START_S + 7259.9, START_S, 0.0):
        engine.advance(until_s)
    assert dump(database) == before
    assert engine.read_s == START_S + 7200.0


def test_progress_tells_of_every_pulse_with_items_and_of_every_alert(
    open_database, feed, reference, plans
):
    arrivals, expected = reference(1)
    database = open_database()
    feed(database, arrivals)
    told = []
    _engine(database, plans, pulses_per_commit=50).advance(END_S, told.append)
    assert sum(progress.items for progress in told) == len(arrivals)
    raised = [line.story_id for progress in told for line in progress.raised]
    assert sorted(raised) == sorted(alert[0] for alert in expected["alerts"])
    assert [one.end_s for one in told] == sorted(one.end_s for one in told)
