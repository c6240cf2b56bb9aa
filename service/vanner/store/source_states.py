"""How each source stands: its cursor, its failures, whether it is still polled."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass

from sqlalchemy import Connection, func, select, update
from sqlalchemy.dialects.sqlite import insert as upsert

from vanner.records import Cursor
from vanner.store.schema import item, source_state


def cursor_of(connection: Connection, source: str) -> Cursor:
    """The cursor that a source's next poll starts from; empty before its first."""
    text = connection.execute(
        select(source_state.c.cursor).where(source_state.c.source == source)
    ).scalar()
    return json.loads(text) if text else {}


def keep_cursor(
    connection: Connection,
    source: str,
    kind: str,
    cursor: Cursor,
    polled_s: float,
    *,
    last_error: str | None = None,
    stopped: str | None = None,
    not_before_s: float | None = None,
) -> None:
    """Store a source's next cursor after a poll that succeeded; in its items' transaction.

    Args:
        connection: A write transaction.
        source: The source's name.
        kind: Its kind.
        cursor: What its next poll starts from.
        polled_s: When it was polled.
        last_error: What of the poll was left out, if anything.
        stopped: Why it will not be polled again, or None.
        not_before_s: Until when the source asked not to be polled, or None.
    """
    values = {
        "kind": kind,
        "cursor": json.dumps(cursor, sort_keys=True),
        "last_polled_s": polled_s,
        "failures": 0,
        "last_error": last_error,
        "stopped": stopped,
        "not_before_s": not_before_s,
    }
    connection.execute(
        upsert(source_state)
        .values(source=source, **values)
        .on_conflict_do_update(index_elements=["source"], set_=values)
    )


def note_failure(
    connection: Connection,
    source: str,
    kind: str,
    polled_s: float,
    sentence: str,
    not_before_s: float | None = None,
) -> int:
    """Note that a poll failed, keeping the cursor; how many have failed in a row."""
    connection.execute(
        upsert(source_state)
        .values(
            source=source,
            kind=kind,
            cursor="{}",
            last_polled_s=polled_s,
            failures=1,
            last_error=sentence,
            not_before_s=not_before_s,
        )
        .on_conflict_do_update(
            index_elements=["source"],
            set_={
                "kind": kind,
                "last_polled_s": polled_s,
                "failures": source_state.c.failures + 1,
                "last_error": sentence,
                "not_before_s": not_before_s,
            },
        )
    )
    failures = connection.execute(
        select(source_state.c.failures).where(source_state.c.source == source)
    ).scalar_one()
    return int(failures)


def stopped_reason(connection: Connection, source: str) -> str | None:
    """Why a source is no longer polled, or None."""
    return connection.execute(
        select(source_state.c.stopped).where(source_state.c.source == source)
    ).scalar()


def source_names(connection: Connection) -> tuple[str, ...]:
    """Every source that has brought an item or was polled, by name."""
    polled = connection.execute(select(source_state.c.source)).scalars().all()
    brought = connection.execute(select(item.c.source).distinct()).scalars().all()
    return tuple(sorted({*polled, *brought}))


def register(connection: Connection, sources: Sequence[tuple[str, str]]) -> None:
    """Make sources known by (name, kind) without changing those that are."""
    if sources:
        connection.execute(
            upsert(source_state).on_conflict_do_nothing(),
            [
                {"source": name, "kind": kind, "cursor": "{}", "failures": 0}
                for name, kind in sources
            ],
        )


@dataclass(frozen=True, slots=True)
class SourceState:
    """How a source stands, for `vanner status`."""

    source: str
    kind: str
    last_polled_s: float | None
    failures: int
    last_error: str | None
    stopped: str | None
    items: int
    last_item_s: float | None


def source_states(connection: Connection) -> list[SourceState]:
    """Every known source with its number of items, by name."""
    received = (
        select(item.c.source, func.count().label("items"), func.max(item.c.received_s).label("s"))
        .group_by(item.c.source)
        .subquery()
    )
    query = (
        select(source_state, func.coalesce(received.c["items"], 0).label("items"), received.c.s)
        .outerjoin(received, received.c.source == source_state.c.source)
        .order_by(source_state.c.source)
    )
    return [
        SourceState(
            row.source,
            row.kind,
            row.last_polled_s,
            row.failures,
            row.last_error,
            row.stopped,
            row.items,
            row.s,
        )
        for row in connection.execute(query)
    ]


def resume(connection: Connection, sources: Sequence[str]) -> dict[str, float]:
    """At a start: poll stopped sources again, whose address may have been corrected.

    Returns:
        Source -> Unix seconds before which it asked not to be polled, where it did.
    """
    mine = source_state.c.source.in_(sources)
    connection.execute(update(source_state).where(mine).values(stopped=None))
    query = select(source_state.c.source, source_state.c.not_before_s).where(
        mine, source_state.c.not_before_s.is_not(None)
    )
    return {row.source: row.not_before_s for row in connection.execute(query)}
