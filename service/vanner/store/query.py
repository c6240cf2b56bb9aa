"""Reading the database by the user's own SQL, and backing it up."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from dataclasses import dataclass
from pathlib import Path

from vanner.errors import DatabaseError
from vanner.store.database import Database
from vanner.store.failures import as_database_error, database_errors

# A read-only connection is not enough: ATTACH and VACUUM INTO (which attaches) make files, and
# some pragmas reach beyond the database. Of these only the ones that tell are let through.
_REFUSED = (
    sqlite3.SQLITE_ATTACH,
    sqlite3.SQLITE_DETACH,
    sqlite3.SQLITE_TRANSACTION,
    sqlite3.SQLITE_SAVEPOINT,
)
_TELLING = frozenset(
    {
        "table_list",
        "table_info",
        "table_xinfo",
        "index_list",
        "index_info",
        "index_xinfo",
        "foreign_key_list",
        "integrity_check",
        "quick_check",
    }
)


@dataclass(frozen=True, slots=True)
class Result:
    """A query's column names and its rows, fetched as they are asked for."""

    columns: tuple[str, ...]
    rows: Iterator[tuple[object, ...]]


@contextmanager
def _read_only(database: Database) -> Iterator[sqlite3.Connection]:
    uri = f"{database.path.as_uri()}?mode=ro"
    with (
        database_errors(database.path),
        closing(sqlite3.connect(uri, uri=True, timeout=database.busy_timeout_s)) as connection,
    ):
        connection.execute("PRAGMA query_only = ON")
        yield connection


def _authorize(action: int, name: str | None, *_: str | None) -> int:
    odd_pragma = action == sqlite3.SQLITE_PRAGMA and (name or "").lower() not in _TELLING
    return sqlite3.SQLITE_DENY if odd_pragma or action in _REFUSED else sqlite3.SQLITE_OK


@contextmanager
def run_query(database: Database, sql: str) -> Iterator[Result]:
    """Run one SQL statement that only reads.

    The user's text goes to the driver as it stands: it may hold colons that a query builder
    would take for parameters.

    Raises:
        DatabaseError: The statement is wrong or would write.
    """
    try:
        with _read_only(database) as connection:
            connection.set_authorizer(_authorize)
            cursor = connection.execute(sql)
            columns = tuple(column[0] for column in cursor.description or ())
            yield Result(columns, iter(cursor))
    except UnicodeEncodeError as error:
        raise DatabaseError("The query cannot be run: it is not valid Unicode text.") from error
    except sqlite3.Warning as error:
        raise DatabaseError(_refusal(error)) from error
    except DatabaseError as error:
        cause = error.__cause__
        code = getattr(cause, "sqlite_errorcode", None)
        if code in (sqlite3.SQLITE_AUTH, sqlite3.SQLITE_READONLY):
            raise DatabaseError(
                "The query cannot be run: it does more than read; give one SELECT."
            ) from cause
        if code in (None, sqlite3.SQLITE_ERROR) and isinstance(cause, sqlite3.Error):
            raise DatabaseError(_refusal(cause)) from cause
        raise


def _refusal(error: Exception) -> str:
    return f"The query cannot be run: {str(error).rstrip('.')}; give one SELECT."


def back_up(database: Database, target: Path) -> int:
    """Copy a database in use to a file by SQLite's online backup; the file's size in bytes.

    Raises:
        DatabaseError: The target exists, cannot be written, or the database refused.
    """
    part = target.with_name(target.name + ".part")
    try:
        if target.exists():
            raise DatabaseError(f"The file {target} exists; name one that does not.")
        part.unlink(missing_ok=True)
        try:
            _copy(database, part, target)
            part.replace(target)
        finally:
            part.unlink(missing_ok=True)
    except OSError as error:
        raise DatabaseError(
            f"The backup {target} cannot be written ({error.strerror}); check its folder."
        ) from error
    return target.stat().st_size


def _copy(database: Database, part: Path, target: Path) -> None:
    with _read_only(database) as source:
        # A read transaction of its own: the copying would wait for a lock without end.
        source.execute("BEGIN")
        source.execute("SELECT count(*) FROM sqlite_master").fetchone()
        try:
            with closing(sqlite3.connect(part)) as copy:
                source.backup(copy)
                copy.execute("PRAGMA journal_mode = DELETE")
        except sqlite3.Error as error:
            # The copy is new: if one of the two is damaged, it is the database.
            code = error.sqlite_errorcode & 0xFF
            damaged = code in (sqlite3.SQLITE_CORRUPT, sqlite3.SQLITE_NOTADB)
            raise as_database_error(error, database.path if damaged else target) from error
