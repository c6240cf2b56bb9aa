"""Copying what was received, and what cannot be derived from it, into another database."""

from __future__ import annotations

from sqlalchemy import Connection, func, insert, select

from vanner.store.schema import desk_state, item, item_revision, source_state

_ROWS_AT_ONCE = 5000


def copy_received(source: Connection, target: Connection) -> int:
    """Copy items with all revisions and how the sources stand; the number of items.

    Args:
        source: A read transaction on the database that has them.
        target: A write transaction on an empty one.
    """
    for table in (source_state, item, item_revision):
        rows = source.execution_options(yield_per=_ROWS_AT_ONCE).execute(select(table))
        for part in rows.mappings().partitions(_ROWS_AT_ONCE):
            target.execute(insert(table), [dict(row) for row in part])
    starts = source.execute(select(desk_state.c.desk, desk_state.c.started_s)).all()
    if starts:
        target.execute(
            insert(desk_state), [{"desk": row.desk, "started_s": row.started_s} for row in starts]
        )
    return int(target.execute(select(func.count()).select_from(item)).scalar_one())


def received_range_s(connection: Connection) -> tuple[float, float] | None:
    """The earliest and latest time of receipt, or None where there are no items."""
    row = connection.execute(
        select(func.min(item_revision.c.received_s), func.max(item_revision.c.received_s))
    ).one()
    return None if row[0] is None else (row[0], row[1])
