"""Opening a database: who made it, which version it is, and how to write and read it.

Every write is a `BEGIN IMMEDIATE` transaction, since a deferred one that turns from reading
to writing is not covered by the busy handler. One process writes through one lock; readers
have connections of their own that cannot write.
"""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import Connection, Engine, QueuePool, create_engine, event

from vanner.errors import DatabaseError
from vanner.store.failures import database_errors
from vanner.store.identity import APPLICATION_ID, check_file
from vanner.store.migrate import current_revision, is_behind, upgrade

__all__ = ["Connection", "Database"]

BUSY_TIMEOUT_S = 10.0
CLOSING_WAIT_S = 5.0


def _engine(path: Path, busy_timeout_s: float, *, writable: bool) -> Engine:
    uri = f"{path.as_uri()}?mode={'rwc' if writable else 'ro'}"

    def connect() -> sqlite3.Connection:
        # The driver's own transaction handling is switched off; `begin` below decides.
        return sqlite3.connect(
            uri, uri=True, timeout=busy_timeout_s, check_same_thread=False, isolation_level=None
        )

    # Connections are made here and not from a URL, which would decode the path once more and
    # so name another file where the path holds a percent sign.
    engine = create_engine("sqlite://", creator=connect, poolclass=QueuePool)

    def on_connect(connection: Any, _record: Any) -> None:  # noqa: ANN401 - the driver's types
        connection.execute("PRAGMA foreign_keys = ON")
        if writable:
            if connection.execute("PRAGMA page_count").fetchone() == (0,):
                # Heeded only before the first page is written, which the journal mode does.
                connection.execute("PRAGMA auto_vacuum = INCREMENTAL")
            connection.execute("PRAGMA journal_mode = WAL")
            connection.execute("PRAGMA synchronous = NORMAL")
        else:
            connection.execute("PRAGMA query_only = ON")

    def on_begin(connection: Connection) -> None:
        connection.exec_driver_sql("BEGIN IMMEDIATE" if writable else "BEGIN")

    event.listen(engine, "connect", on_connect)
    event.listen(engine, "begin", on_begin)
    return engine


class Database:
    """A database in use. `path` is where it lies, absolute."""

    def __init__(self, path: Path, busy_timeout_s: float = BUSY_TIMEOUT_S) -> None:
        self.path = path
        self.busy_timeout_s = busy_timeout_s
        self._writer = _engine(path, busy_timeout_s, writable=True)
        self._reader = _engine(path, busy_timeout_s, writable=False)
        self._lock = threading.RLock()
        self._idle = threading.Condition()
        self._busy = 0
        self._closed = False

    @classmethod
    def open(
        cls,
        path: Path,
        *,
        create: bool = True,
        migrate: bool = True,
        busy_timeout_s: float = BUSY_TIMEOUT_S,
    ) -> Database:
        """Open a database, making it or bringing it up to date where allowed.

        Args:
            path: The file.
            create: Whether to make it where there is none.
            migrate: Whether to upgrade an older one.
            busy_timeout_s: How long to wait while another program holds the database.

        Raises:
            DatabaseError: It is missing, of another program, damaged, newer than this
                version, older and not to be migrated, or not writable.
        """
        try:
            path = path.expanduser().absolute()
        except RuntimeError as error:  # no such user, or one without a home folder
            raise DatabaseError(f"The database {path} is in no known home; check it.") from error
        new = check_file(path)
        if new and not create:
            raise DatabaseError(f"There is no database {path}; check the name.")
        database = cls(path, busy_timeout_s)
        try:
            with database_errors(path):
                database._prepare(new=new, migrate=migrate)
        except BaseException:
            database.close()
            raise
        return database

    def _prepare(self, *, new: bool, migrate: bool) -> None:
        revision = None
        if not new:
            with self._reader.connect() as connection:
                revision = current_revision(connection, self.path)
        if not is_behind(revision):
            return
        if not new and not migrate:
            raise DatabaseError(
                f"The database {self.path} is of an older version "
                f"(schema {revision or 'still empty'}); run `vanner db upgrade` first."
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
        with (
            self._in_use(),
            self._lock,
            database_errors(self.path),
            self._writer.begin() as connection,
        ):
            yield connection

    @contextmanager
    def read(self) -> Iterator[Connection]:
        """A read transaction that sees one state of the database.

        Raises:
            DatabaseError: The database refused.
        """
        with self._in_use(), database_errors(self.path), self._reader.begin() as connection:
            yield connection

    @contextmanager
    def _in_use(self) -> Iterator[None]:
        with self._idle:
            if self._closed:
                raise DatabaseError(f"The database {self.path} has been closed; start again.")
            self._busy += 1
        try:
            yield
        finally:
            with self._idle:
                self._busy -= 1
                self._idle.notify_all()

    def close(self) -> None:
        """Let go of all connections, once other threads have ended theirs. May be called twice.

        Transactions that begin afterwards are refused. A connection must not be closed under
        another thread's hands, so one that does not end within a few seconds is left to it.
        """
        with self._idle:
            self._closed = True
            self._idle.wait_for(lambda: self._busy == 0, timeout=CLOSING_WAIT_S)
        self._reader.dispose()
        self._writer.dispose()
