"""Whether a file is a Vanner database at all, told from its header without opening it."""

from __future__ import annotations

import struct
from pathlib import Path

from vanner.errors import DatabaseError

# Stands in the SQLite header's application id field; ours spells "Vanr".
APPLICATION_ID = int.from_bytes(b"Vanr", "big")

_HEADER_BYTES = 100
_MAGIC = b"SQLite format 3\x00"


def check_file(path: Path) -> bool:
    """Look at a database file before it is opened; whether it is new (absent or empty).

    The header's fields are those of the SQLite file format: page size at 16, size in pages
    at 28, application id at 68.

    Raises:
        DatabaseError: A folder, an unreadable or truncated file, or another program's.
    """
    try:
        if not path.exists():
            return _check_folder(path)
        with path.open("rb") as file:
            header = file.read(_HEADER_BYTES)
        size = path.stat().st_size
    except OSError as error:
        raise DatabaseError(
            f"The database {path} cannot be read ({error.strerror}); check its name and rights."
        ) from error
    if not header:
        return True
    if not header.startswith(_MAGIC):
        raise DatabaseError(f"The file {path} is no SQLite database; name another file.")
    if len(header) < _HEADER_BYTES:
        raise _truncated(path)
    _check_header(path, header, size)
    return False


def _check_folder(path: Path) -> bool:
    if not path.parent.is_dir():
        raise DatabaseError(
            f"The database {path} cannot be made: there is no folder {path.parent}; make it first."
        )
    return True


def _check_header(path: Path, header: bytes, size: int) -> None:
    page_size = int.from_bytes(header[16:18], "big")
    page_size = 65536 if page_size == 1 else page_size
    changes, pages = struct.unpack(">II", header[24:32])
    (valid_for,) = struct.unpack(">I", header[92:96])
    # The size in pages counts only where it was written with the last change. Pages that are
    # still in the write-ahead log may be missing from the file, so that log is looked for.
    log = path.with_name(path.name + "-wal")
    if changes == valid_for and size < pages * page_size and not _holds_pages(log):
        raise _truncated(path)
    application = int.from_bytes(header[68:72], "big")
    if application != APPLICATION_ID and size > 0 and not _holds_pages(log):
        raise DatabaseError(f"The database {path} belongs to another program; name another file.")


def _holds_pages(log: Path) -> bool:
    return log.exists() and log.stat().st_size > 0


def _truncated(path: Path) -> DatabaseError:
    return DatabaseError(
        f"The database {path} is cut short; restore a backup made by `vanner db backup`."
    )
