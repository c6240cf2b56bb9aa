"""Opening a database: who made it, which version it is, and how to write and read it.

Every write is a `BEGIN IMMEDIATE` transaction, since a deferred one that turns from reading
to writing is not covered by the busy handler. One process writes through one lock; readers
have connections of their own that cannot write.
"""

from __future__ import annotations

import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import Connection, Engine, create_engine, event

from vanner.errors import DatabaseError
from vanner.store.failures import database_errors
from vanner.store.identity import APPLICATION_ID, check_file
from vanner.store.migrate import current_revision, is_behind, upgrade

__all__ = ["Connection", "Database"]

BUSY_TIMEOUT_S = 10.0


def _engine(path: Path, *, writable: bool) -> Engine:
    mode = "rwc" if writable else "ro"
    url = f"sqlite:///file:{_quoted(path)}?mode={mode}&uri=true"
    engine = create_engine(
        url, connect_args={"timeout": BUSY_TIMEOUT_S, "check_same_thread": False}
    )

    def on_connect(connection: Any, _record: Any) -> None:  # noqa: ANN401 - the driver's types
        # The driver's own transaction handling is switched off; `begin` below decides.
        connection.isolation_level = None
        connection.execute("PRAGMA foreign_keys = ON")
        if writable:
            connection.execute("PRAGMA journal_mode = WAL")
            connection.execute("PRAGMA synchronous = NORMAL")
        else:
            connection.execute("PRAGMA query_only = ON")

    def on_begin(connection: Connection) -> None:
        connection.exec_driver_sql("BEGIN IMMEDIATE" if writable else "BEGIN")

    event.listen(engine, "connect", on_connect)
    event.listen(engine, "begin", on_begin)
    return engine


def _quoted(path: Path) -> str:
    """The path for an SQLite URI: the three characters that mean something there, escaped."""
    return str(path).replace("%", "%25").replace("?", "%3f").replace("#", "%23")


class Database:
    """A database in use. `path` is where it lies."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self._writer = _engine(path, writable=True)
        self._reader = _engine(path, writable=False)
        self._lock = threading.RLock()

    @classmethod
    def open(cls, path: Path, *, create: bool = True, migrate: bool = True) -> Database:
        """Open a database, making it or bringing it up to date where allowed.

        Raises:
            DatabaseError: It is missing, of another program, damaged, newer than this
                version, older and not to be migrated, or not writable.
        """
        path = path.expanduser().absolute()
        new = check_file(path)
        if new and not create:
            raise DatabaseError(f"There is no database {path}; check the name.")
        database = cls(path)
        try:
            with database_errors(path):
                database._prepare(new=new, migrate=migrate)
        except BaseException:
            database.close()
            raise
        return database

    def _prepare(self, *, new: bool, migrate: bool) -> None:
        revision = None
        if new:
            with self._writer.connect() as connection:
                connection.exec_driver_sql("PRAGMA auto_vacuum = INCREMENTAL")
        else:
            with self._reader.connect() as connection:
                revision = current_revision(connection, self.path)
        if not is_behind(revision):
            return
        if not new and not migrate:
            raise DatabaseError(
                f"The database {self.path} is of an older version (schema {revision}); "
                "run `vanner db upgrade` first."
            )
        with self._lock, self._writer.begin() as connection:
            connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
            upgrade(connection)

    @contextmanager
    def write(self) -> Iterator[Connection]:
        """A write transaction: committed when the block ends, rolled back when it raises.

        Raises:
            DatabaseError: The database refused; nothing of the block was kept.
        """
        with self._lock, database_errors(self.path), self._writer.begin() as connection:
            yield connection

    @contextmanager
    def read(self) -> Iterator[Connection]:
        """A read transaction that sees one state of the database.

        Raises:
            DatabaseError: The database refused.
        """
        with database_errors(self.path), self._reader.begin() as connection:
            yield connection

    def close(self) -> None:
        """Let go of all connections. May be called twice."""
        self._reader.dispose()
        self._writer.dispose()
