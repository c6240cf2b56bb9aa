"""An engine whose database refuses in the middle: the rows end up as if nothing had happened."""

import random
import sqlite3
from contextlib import ExitStack, closing, contextmanager
from dataclasses import dataclass, replace

import pytest

from vanner.daemon.engine import Engine
from vanner.daemon.plan import replay_plan
from vanner.errors import DatabaseBusyError, DatabaseError
from vanner.store.accept import accept
from vanner.store.database import Database
from vanner.store.source_states import register

START_S = 1_756_713_600.0
HOUR_S = 3600.0
END_S = START_S + 160 * HOUR_S  # after which every story has cleared
VIEWS = "SELECT name FROM sqlite_master WHERE type = 'view' ORDER BY name"
# All but the saved states, which an undisturbed run saves at other times.
TABLES = "SELECT name FROM sqlite_master WHERE type = 'table' AND name <> 'desk_state'"


@dataclass(frozen=True)
class Left:
    """What a run left: every row of every view and table."""

    views: dict[str, list[tuple[object, ...]]]
    tables: dict[str, list[tuple[object, ...]]]


def contents(path, names):
    with closing(sqlite3.connect(path)) as connection:
        return {
            name: sorted(connection.execute(f"SELECT * FROM {name}"), key=repr)  # noqa: S608 - from the schema
            for (name,) in connection.execute(names).fetchall()
        }


@contextmanager
def full(database):
    """No page more than there are, as in `test_full_disk`; pages that are free are used up."""
    with database.write() as connection:
        pages = connection.exec_driver_sql("PRAGMA page_count").scalar()
        connection.exec_driver_sql(f"PRAGMA max_page_count = {pages}")
    yield
    with database.write() as connection:
        connection.exec_driver_sql("PRAGMA max_page_count = 1000000000")


@contextmanager
def held(database):
    """Another program writes, and does not come to an end."""
    with closing(sqlite3.connect(database.path, isolation_level=None)) as holder:
        holder.execute("BEGIN IMMEDIATE")
        yield
        holder.execute("ROLLBACK")


def refused_twice(engine, disturb, pulses):
    """Advance until the database refuses, after so many pulses; try again, and lift it."""
    seen = 0
    with ExitStack() as stack:

        def on_pulse(_progress):
            nonlocal seen
            seen += 1
            if seen == pulses:
                stack.enter_context(disturb(engine.database))

        for _ in range(2):
            with pytest.raises(DatabaseError) as caught:
                engine.advance(END_S, on_pulse)
            assert (disturb is held) == isinstance(caught.value, DatabaseBusyError)
        assert seen >= pulses


def harbour_items(make_item):
    """Four days of a made-up harbour's ordinary talk, and then something that is new in it."""
    rng = random.Random(7)
    ordinary = [f"{a}{b}" for a in ("quay", "tide", "crane", "rope") for b in "abcdefghijkl"]
    for number in range(100):
        # The lantern is known, if rarely spoken of: two mentions in an hour are worth a note.
        text = " ".join(rng.choices(ordinary, k=250) + ["lantern"] * (number % 30 == 0))
        published_s = START_S + number * HOUR_S + rng.randrange(600)
        source = rng.choice(("quay-wire", "mill-desk"))
        yield make_item(f"talk {number}", text, source=source, published_s=published_s)
    for number in range(9):
        text = " ".join([*rng.choices(ordinary, k=30), *["dredger", "aground", "sandbar"] * 4])
        published_s = START_S + 100 * HOUR_S + number * 240
        yield make_item(f"new {number}", text, published_s=published_s)
    for number in range(2):
        text = " ".join([*rng.choices(ordinary, k=60), "lantern"])
        published_s = START_S + 105 * HOUR_S + number * 1800
        yield make_item(f"weak {number}", text, source="mill-desk", published_s=published_s)
    # The same key again, in the midst of what is new: a revision.
    yield make_item("new 0", "The dredger is afloat.", published_s=START_S + 100.3 * HOUR_S)


@pytest.fixture(scope="module")
def run(blank, make_item, tmp_path_factory):
    """Runs an engine over all items, disturbed before pulses of some numbers; what it left."""

    def go(disturb=None, before=(), pulses_per_commit=1):
        path = tmp_path_factory.mktemp("engine") / "vanner.db"
        path.write_bytes(blank.read_bytes())
        database = Database.open(path, busy_timeout_s=0.02)
        with database.write() as connection:
            register(connection, [("quay-wire", "feed"), ("mill-desk", "folder")])
            accept(connection, list(harbour_items(make_item)), None, teaches=False)
        plan = replace(
            replay_plan(1, "UTC", 60.0),
            schedules=("0 8 * * *",),
            recipients=("rota@harbour.example",),
            mails_alerts=True,
        )
        engine = Engine(
            database, [plan], 60.0, pulses_per_checkpoint=7, pulses_per_commit=pulses_per_commit
        )
        engine.begin(START_S)
        for number in before:
            refused_twice(engine, disturb, number)
        engine.advance(END_S)
        left = Left(contents(path, VIEWS), contents(path, TABLES))
        database.close()
        return left

    return go


@pytest.fixture(scope="module")
def undisturbed(run):
    return run()


def test_the_undisturbed_run_has_something_in_every_view(undisturbed):
    # Whether the lantern is noted or raised is the model's affair; both are of one table.
    assert {name for name, rows in undisturbed.views.items() if not rows} <= {"noted"}
    assert len(undisturbed.tables["story"]) == 2
    assert len(undisturbed.views["readings"]) == 111
    assert undisturbed.tables["message"]
    states = {row[2] for row in undisturbed.views["alerts"]}
    assert states == {"cleared"}


@pytest.mark.parametrize(("disturb", "pulses_per_commit"), [(full, 5), (held, 1)])
def test_after_a_refusal_the_next_advance_gives_the_rows_of_an_undisturbed_run(
    run, undisturbed, disturb, pulses_per_commit
):
    left = run(disturb, before=(10, 40, 20), pulses_per_commit=pulses_per_commit)
    assert left.views == undisturbed.views
    assert left.tables == undisturbed.tables
