"""Counts over a whole database, for the terminal."""

from __future__ import annotations

from dataclasses import dataclass

from sqlalchemy import Integer, func, select

from vanner.store.database import Database
from vanner.store.schema import item, item_revision, story


@dataclass(frozen=True, slots=True)
class Counts:
    """How much a database holds."""

    items: int
    alerts: int
    noted: int


def item_count(database: Database) -> int:
    """How many revisions of items there are to read."""
    with database.read() as connection:
        return int(connection.execute(select(func.count()).select_from(item_revision)).scalar_one())


def counts(database: Database) -> Counts:
    """Items, alerts and noted stories of all desks."""
    with database.read() as connection:
        items = connection.execute(select(func.count()).select_from(item)).scalar_one()
        alerts, stories = connection.execute(
            select(func.count(story.c.raised_s), func.count())
        ).one()
    return Counts(items, alerts, stories - alerts)


@dataclass(frozen=True, slots=True)
class DeskActivity:
    """How many alerts and noted stories a desk had within some time."""

    desk: str
    raised: int
    running: int
    noted: int


def desk_activity(database: Database, since_s: float) -> list[DeskActivity]:
    """What each desk raised and noted since a time, and how many of its alerts run now."""
    # A sum of conditions has their type, a truth value, unless another one is given.
    raised = func.coalesce(func.sum(story.c.raised_s > since_s, type_=Integer), 0)
    running = func.coalesce(
        func.sum(story.c.raised_s.is_not(None) & story.c.cleared_s.is_(None), type_=Integer), 0
    )
    noted = func.coalesce(
        func.sum((story.c.noted_s > since_s) & story.c.raised_s.is_(None), type_=Integer), 0
    )
    query = (
        select(story.c.desk, raised, running, noted).group_by(story.c.desk).order_by(story.c.desk)
    )
    with database.read() as connection:
        return [DeskActivity(*row) for row in connection.execute(query)]
