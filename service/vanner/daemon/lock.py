"""One daemon a database: an advisory lock on a file beside it.

The operating system drops the lock when the process ends, however it ends, so nothing is
left to clean up after a crash. A row in the database was not taken: it would outlive a kill.
"""

from __future__ import annotations

import fcntl
import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from vanner.errors import DaemonRunningError, DatabaseError


def lock_path(database: Path) -> Path:
    """The lock file of a database."""
    return database.with_name(database.name + ".lock")


@contextmanager
def sole_daemon(database: Path) -> Iterator[None]:
    """Hold the database's lock for the length of the block.

    Raises:
        DaemonRunningError: Another daemon holds it.
        DatabaseError: The lock file cannot be made.
    """
    path = lock_path(database)
    try:
        handle = os.open(path, os.O_RDWR | os.O_CREAT | os.O_CLOEXEC, 0o644)
    except OSError as error:
        raise DatabaseError(
            f"The lock file {path} cannot be made ({error.strerror}); let Vanner write its folder."
        ) from error
    try:
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as error:
            raise DaemonRunningError(
                f"A daemon already serves the database {database}; end it before starting another."
            ) from error
        os.ftruncate(handle, 0)
        os.write(handle, f"{os.getpid()}\n".encode())
        yield
    finally:
        os.close(handle)


def is_served(database: Path) -> bool:
    """Whether a daemon holds the database's lock now."""
    path = lock_path(database)
    if not path.exists():
        return False
    handle = os.open(path, os.O_RDONLY | os.O_CLOEXEC)
    try:
        fcntl.flock(handle, fcntl.LOCK_SH | fcntl.LOCK_NB)
    except OSError:
        return True
    finally:
        os.close(handle)
    return False
