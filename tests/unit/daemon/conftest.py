"""Real databases with invented items, plans of desks, and dumps of all that a user can see."""

import sqlite3
from contextlib import closing
from dataclasses import dataclass

import numpy as np
import pytest

from vanner.daemon.engine import Engine
from vanner.daemon.plan import DeskPlan
from vanner.intake import take_in
from vanner.model.desk import DeskParameters
from vanner.records import Item, RawItem
from vanner.store.accept import accept
from vanner.store.database import Database
from vanner.store.source_states import register

HOUR_S = 3600.0
START_S = 1_700_006_400.0  # 2023-11-15 00:00 UTC, a Wednesday
BEGIN_S = START_S - 600.0  # when the desks begin: between two digests
END_S = START_S + 6 * HOUR_S  # an hour after the last item of a stream
SOURCES = ("harbour bulletin", "town gazette", "weather mast")
# The public views, as the design names them.
VIEWS = (
    "alerts",
    "noted",
    "alert_terms",
    "alert_items",
    "items",
    "item_topics",
    "readings",
    "term_hours",
    "source_health",
    "digests",
)
EVENTS = ("sinkhole quarry cordon", "ferry aground sandbank", "dredger mutiny captain")


@dataclass(frozen=True)
class Arrival:
    received_s: float
    item: Item
    teaches: bool = False


@pytest.fixture(scope="session")
def arrival():
    """Builds one item and the time of its receipt."""

    def build(guid, text, received_s, *, source=SOURCES[0], title="", teaches=False, late_s=0.0):
        raw = RawItem(guid, title, text, published_s=received_s - late_s)
        return Arrival(received_s, take_in(raw, source, received_s), teaches)

    return build


@pytest.fixture(scope="session")
def stream(arrival):
    """Builds hours of ordinary talk from three sources, with three events, copies and revisions."""

    def build(seed, hours=5, start_s=START_S):
        rng = np.random.default_rng(seed)
        ordinary = 1.0 / np.arange(1, 121)
        ordinary /= ordinary.sum()
        found = []

        def talk(count):
            return " ".join(f"ordinary{n}" for n in rng.choice(120, count, p=ordinary))

        def add(at_s, text, **told):
            source = SOURCES[rng.integers(0, 3)]
            found.append((float(round(at_s, 3)), text, {"source": source} | told))

        for at_s in np.sort(start_s + rng.random(hours * 10) * hours * HOUR_S):
            text = talk(16)
            if found and rng.random() < 0.1:  # somebody passes on what another wrote
                text = found[rng.integers(0, len(found))][1]
            add(at_s, text, late_s=float(rng.choice([0.0, 0.0, 900.0, 3 * 86400.0])))
        for event, words in enumerate(EVENTS):
            begun_s = start_s + (0.25 + 0.22 * event) * hours * HOUR_S
            for _ in range(8):
                add(begun_s + rng.random() * 1500.0, f"{words} {talk(6)}", title=words.title())
        found.sort(key=lambda one: one[0])
        arrivals = [
            arrival(f"g{number}", text, at_s, **told)
            for number, (at_s, text, told) in enumerate(found)
        ]
        for number in rng.choice(len(found), 6, replace=False):  # corrected half an hour later
            at_s, text, told = found[number]
            # What is shown of it stays: its title or the beginning of its text, and its date.
            told = told | {"late_s": told.get("late_s", 0.0) + 1800.0}
            arrivals.append(arrival(f"g{number}", f"{text} {talk(3)}", at_s + 1800.0, **told))
        return sorted(arrivals, key=lambda one: one.received_s)

    return build


@pytest.fixture(scope="session")
def plan():
    """Builds a desk's plan: ready after an hour, its stories clearing after one and a half."""

    def build(desk="quay", sources=None, schedules=(), recipients=(), **changes):
        told = {
            "desk": desk,
            "zone": "UTC",
            "pulse_s": 60.0,
            "alerts_per_day": 12.0,
            "false_alerts_per_day": 2.0,
            "warm_up_s": HOUR_S,
            "warm_up_words": 100,
            "warm_up_at_most_s": 2 * HOUR_S,
            "standing_half_life_s": 28 * 24 * HOUR_S,
            "running_half_life_s": 24 * HOUR_S,
            "background_share": 0.9,
            "clear_after_s": 1.5 * HOUR_S,
        }
        parameters = DeskParameters(**told | changes)
        return DeskPlan(parameters, sources, tuple(schedules), tuple(recipients), bool(recipients))

    return build


@pytest.fixture(scope="session")
def feed():
    """Accepts arrivals into a database, each at its own time of receipt."""

    def into(database, arrivals):
        with database.write() as connection:
            register(connection, [(source, "feed") for source in SOURCES])
            for one in arrivals:
                accept(connection, [one.item], one.received_s, teaches=one.teaches)

    return into


@pytest.fixture
def open_database(tmp_path):
    """Opens a database of the test's own folder by its name; all are closed afterwards."""
    opened = []

    def by_name(name="vanner.db"):
        opened.append(Database.open(tmp_path / name))
        return opened[-1]

    yield by_name
    for database in opened:
        database.close()


@pytest.fixture(scope="session")
def run(feed):
    """Accepts arrivals into a new database and runs an engine over them in one go."""

    def over(database, arrivals, plans, until_s, **told):
        feed(database, arrivals)
        engine = Engine(database, plans, 60.0, **({"pulses_per_commit": 100} | told))
        engine.begin(BEGIN_S)
        engine.advance(until_s)
        return engine

    return over


@pytest.fixture(scope="session")
def dump():
    """All rows of the ten public views and of the outgoing mail, by name, each sorted."""

    def of(database):
        queries = {view: f"SELECT * FROM {view}" for view in VIEWS}  # noqa: S608 - constants
        queries["mail"] = "SELECT key, subject, body_text, body_html, created_s, state FROM message"
        with closing(sqlite3.connect(database.path)) as connection:
            return {
                name: sorted(connection.execute(query).fetchall(), key=repr)
                for name, query in queries.items()
            }

    return of


@pytest.fixture(scope="session")
def differences():
    """The views in which two dumps differ, each with the rows that only one of both has."""

    def between(rows, expected):
        return {
            name: sorted(set(map(repr, rows[name])) ^ set(map(repr, expected[name])))
            for name in expected
            if rows[name] != expected[name]
        }

    return between


@pytest.fixture(scope="session")
def plans(plan):
    """Two desks that share two sources; the first alone has digests and alerts by mail."""
    return (
        plan("quay", schedules=("0 * * * *",), recipients=("watch@quay.example",)),
        plan("mast", ("weather mast", "town gazette"), schedules=("30 */2 * * *",)),
    )


@pytest.fixture(scope="session")
def reference(run, dump, stream, plans, tmp_path_factory):
    """Arrivals of a seed and the rows of one go over them, until END_S."""
    known = {}

    def of(seed):
        if seed not in known:
            arrivals = stream(seed)
            database = Database.open(tmp_path_factory.mktemp("whole") / "vanner.db")
            run(database, arrivals, plans, END_S)
            known[seed] = arrivals, dump(database)
            database.close()
        return known[seed]

    return of
