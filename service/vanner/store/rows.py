"""Inserting many rows fast: the driver's own executemany under a statement compiled once.

A pulse writes a few rows into each of several tables, and building a statement anew costs
more than running it.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

from sqlalchemy import Connection, Dialect, Table, insert


@cache
def _statement(table: Table, dialect: Dialect) -> str:
    return str(insert(table).compile(dialect=dialect))


def insert_rows(connection: Connection, table: Table, rows: Sequence[tuple[object, ...]]) -> None:
    """Insert rows that give every column of a table in the order of its definition.

    Args:
        connection: A write transaction.
        table: One whose columns need no conversion between Python and the driver.
        rows: May be empty.
    """
    if rows:
        connection.exec_driver_sql(_statement(table, connection.dialect), list(rows))
