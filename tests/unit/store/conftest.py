"""A database in a folder of the test, and records to put into it."""

from __future__ import annotations

import hashlib
import shutil
import sqlite3
from collections.abc import Callable, Iterator
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from vanner.records import Item, Reading, StoryItem, StoryRecord, StoryTerm, Topic
from vanner.store.accept import accept
from vanner.store.database import Database
from vanner.store.pulses import ClockState, start_clock

# 2025-09-01T08:00:00Z, the end of a pulse of 60 s.
START_S = 1_756_713_600.0
PULSE_S = 60.0


@pytest.fixture(scope="session")
def blank(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A database that holds nothing, made once: copying it is quicker than migrating."""
    path = tmp_path_factory.mktemp("store") / "blank.db"
    Database.open(path).close()
    return path


@pytest.fixture
def database(tmp_path: Path, blank: Path) -> Iterator[Database]:
    shutil.copyfile(blank, tmp_path / "vanner.db")
    opened = Database.open(tmp_path / "vanner.db", busy_timeout_s=0.05)
    yield opened
    opened.close()


@pytest.fixture
def start_clock_at(database: Database) -> Callable[[float], None]:
    """Starts the clock with every pulse up to a time closed and read."""

    def start(time_s: float) -> None:
        with database.write() as connection:
            start_clock(connection, ClockState(PULSE_S, time_s, time_s, "service"))

    return start


@pytest.fixture(scope="session")
def make_item() -> Callable[..., Item]:
    def make(
        guid: str,
        text: str = "The ferry to Ostrand is late.",
        *,
        source: str = "quay-wire",
        title: str = "",
        published_s: float = START_S,
    ) -> Item:
        digest = hashlib.sha256(f"{title}\n{text}".encode()).hexdigest()
        return Item(source, guid, title, text, None, "en", None, published_s, True, digest)

    return make


@pytest.fixture
def receive(database: Database, make_item: Callable[..., Item]) -> Callable[..., int]:
    """Accepts one item at a time of receipt and returns its number."""

    def one(guid: str, received_s: float = START_S, *, teaches: bool = False, **told: Any) -> int:
        made = make_item(guid, **told)
        with database.write() as connection:
            accept(connection, [made], received_s, teaches=teaches)
        query = "SELECT item_id FROM item WHERE source = ? AND guid = ?"
        with closing(sqlite3.connect(database.path)) as connection:
            ((number,),) = connection.execute(query, (made.source, guid))
        return int(number)

    return one


@pytest.fixture
def sql(database: Database) -> Callable[..., list[tuple[object, ...]]]:
    """Rows of a query, read as any other program would read them."""

    def run(query: str) -> list[tuple[object, ...]]:
        with closing(sqlite3.connect(database.path)) as connection:
            return connection.execute(query).fetchall()

    return run


@pytest.fixture
def make_reading() -> Callable[..., Reading]:
    def make(item_id: int, *terms: str, words: int = 8) -> Reading:
        topics = tuple(Topic(term, 0.5, 0.75, 2) for term in terms)
        return Reading(item_id, words, 0.4, 0.3, 0.2, 0.1, 9.5, topics)

    return make


@pytest.fixture
def make_story() -> Callable[..., StoryRecord]:
    def make(
        number: int,
        items: dict[int, float],
        *,
        desk: str = "harbour",
        noted_s: float = START_S,
        raised_s: float | None = None,
        cleared_s: float | None = None,
        bits: float = 20.0,
        terms: tuple[str, ...] = ("dredger", "aground"),
    ) -> StoryRecord:
        return StoryRecord(
            desk=desk,
            number=number,
            noted_s=noted_s,
            raised_s=raised_s,
            last_activity_s=max(items.values()),
            cleared_s=cleared_s,
            headline_item_id=min(items),
            bits=bits,
            threshold_bits=16.0,
            terms=tuple(StoryTerm(term, bits, 4, 0.25, noted_s) for term in terms),
            items=tuple(StoryItem(item_id, added_s) for item_id, added_s in items.items()),
        )

    return make
