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

    A file that SQLite has made and that never held a table is new too: so it stands while it
    is being made, and after a crash in the midst of that.

    The header's fields are those of the SQLite file format: page size at 16, size in pages
    at 28, schema cookie (0 until the first table is made) at 40, application id at 68.

    Raises:
        DatabaseError: A folder, an unreadable or truncated file, or another program's.
    """
    try:
        if not path.exists():
            return _check_folder(path)
        if not path.is_file():
            raise DatabaseError(f"The database {path} is not a regular file; name another.")
        # Pages that are still in the write-ahead log may be missing from the file. The log is
        # looked at first: it may be folded into the file at any moment.
        logged = _holds_pages(path.with_name(path.name + "-wal"))
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
    return not logged and _check_header(path, header, size)


def _check_folder(path: Path) -> bool:
    if not path.parent.is_dir():
        raise DatabaseError(
            f"The database {path} cannot be made: there is no folder {path.parent}; make it first."
        )
    return True


def _check_header(path: Path, header: bytes, size: int) -> bool:
    """Whether the file never held a table; for one whose pages are all in it."""
    page_size = int.from_bytes(header[16:18], "big")
    page_size = 65536 if page_size == 1 else page_size
    changes, pages = struct.unpack(">II", header[24:32])
    (valid_for,) = struct.unpack(">I", header[92:96])
    application = int.from_bytes(header[68:72], "big")
    tableless = application == 0 and header[40:44] == bytes(4)
    if application != APPLICATION_ID and not tableless:
        raise DatabaseError(f"The database {path} belongs to another program; name another file.")
    # The size in pages counts only where it was written with the last change.
    if changes == valid_for and size < pages * page_size:
        raise _truncated(path)
    return tableless


def _holds_pages(log: Path) -> bool:
    try:
        return log.stat().st_size > 0
    except FileNotFoundError:
        return False


def _truncated(path: Path) -> DatabaseError:
    return DatabaseError(
        f"The database {path} is cut short; restore a backup made by `vanner db backup`."
    )
