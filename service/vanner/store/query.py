"""Reading the database by the user's own SQL, and backing it up."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from dataclasses import dataclass
from pathlib import Path

from vanner.errors import DatabaseError
from vanner.store.database import Database
from vanner.store.failures import database_errors


@dataclass(frozen=True, slots=True)
class Result:
    """A query's column names and its rows, fetched as they are asked for."""

    columns: tuple[str, ...]
    rows: Iterator[tuple[object, ...]]


@contextmanager
def _read_only(path: Path) -> Iterator[sqlite3.Connection]:
    uri = f"{path.as_uri()}?mode=ro"
    with database_errors(path), closing(sqlite3.connect(uri, uri=True, timeout=10)) as connection:
        connection.execute("PRAGMA query_only = ON")
        yield connection


@contextmanager
def run_query(database: Database, sql: str) -> Iterator[Result]:
    """Run one SQL statement that only reads.

    The user's text goes to the driver as it stands: it may hold colons that a query builder
    would take for parameters.

    Raises:
        DatabaseError: The statement is wrong or would write.
    """
    try:
        with _read_only(database.path) as connection:
            cursor = connection.execute(sql)
            columns = tuple(column[0] for column in cursor.description or ())
            yield Result(columns, iter(cursor))
    except sqlite3.Warning as error:
        raise DatabaseError(f"The query cannot be run: {error}; give one SELECT.") from error
    except DatabaseError as error:
        cause = error.__cause__
        if isinstance(cause, sqlite3.ProgrammingError | sqlite3.OperationalError):
            raise DatabaseError(f"The query cannot be run: {cause}.") from cause
        raise


def back_up(database: Database, target: Path) -> int:
    """Copy a database in use to a file by SQLite's online backup; the file's size in bytes.

    Raises:
        DatabaseError: The target exists, cannot be written, or the database refused.
    """
    if target.exists():
        raise DatabaseError(f"The file {target} exists; name one that does not.")
    part = target.with_name(target.name + ".part")
    try:
        with (
            _read_only(database.path) as source,
            database_errors(part),
            closing(sqlite3.connect(part)) as copy,
        ):
            source.backup(copy)
            copy.execute("PRAGMA journal_mode = DELETE")
        part.replace(target)
    except OSError as error:
        raise DatabaseError(
            f"The backup {target} cannot be written ({error.strerror}); check its folder."
        ) from error
    finally:
        part.unlink(missing_ok=True)
    return target.stat().st_size
