"""Turns what the database driver says into one sentence for the user."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from sqlalchemy.exc import DBAPIError

from vanner.errors import DatabaseBusyError, DatabaseError

# SQLite's primary result codes (sqlite.org, Result and Error Codes) and what to do about them.
_ADVICE = {
    sqlite3.SQLITE_FULL: "there is no room left on its disk; make room and start again",
    sqlite3.SQLITE_READONLY: "it cannot be written; let Vanner write the file and its folder",
    sqlite3.SQLITE_CANTOPEN: "it cannot be opened; check its folder and rights",
    sqlite3.SQLITE_PERM: "access is not permitted; give Vanner the right to read and write it",
    sqlite3.SQLITE_AUTH: "access is not permitted; give Vanner the right to read and write it",
    sqlite3.SQLITE_NOTADB: "it is no SQLite database; name another file",
    sqlite3.SQLITE_CORRUPT: "it is damaged; restore a backup made by `vanner db backup`",
    sqlite3.SQLITE_IOERR: "its disk reports an error; check the disk, then start again",
}
_BUSY = (sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED)


def as_database_error(error: BaseException, path: Path) -> DatabaseError:
    """The user's error for a driver's error on the database at `path`."""
    original = error.orig if isinstance(error, DBAPIError) else error
    code = getattr(original, "sqlite_errorcode", None)
    primary = code & 0xFF if isinstance(code, int) else None
    if primary in _BUSY:
        return DatabaseBusyError(
            f"The database {path} is in use by another program; end that program or try again."
        )
    if primary in _ADVICE:
        return DatabaseError(f"The database {path} cannot be used: {_ADVICE[primary]}.")
    return DatabaseError(f"The database {path} refused a statement: {original}.")


@contextmanager
def database_errors(path: Path) -> Iterator[None]:
    """Let driver errors leave the block as a DatabaseError chained to the original."""
    try:
        yield
    except (DBAPIError, sqlite3.Error) as error:
        raise as_database_error(error, path) from error
