"""Lines of a plain or gzip file, in bounded memory and up to any damage."""

from __future__ import annotations

import zlib
from collections.abc import Iterator
from typing import BinaryIO

_CHUNK_BYTES = 65536
_GZIP = b"\x1f\x8b"


class DamagedFileError(Exception):
    """The file cannot be read beyond this place; its text says why, as a clause."""


def bounded_lines(file: BinaryIO, line_bytes: int) -> Iterator[tuple[int, bytes | None]]:
    """Each line's number from 1 and its bytes without the line feed; None where it is longer
    than `line_bytes`.

    Whether the file is gzip is told by its first bytes. A last line without a line feed
    counts where the file ends whole.

    Raises:
        DamagedFileError: After the last whole line before the damage.
    """
    pieces: list[bytes] = []
    size = number = 0
    for chunk in _plain(file):
        *ended, tail = chunk.split(b"\n")
        for end in ended:
            number += 1
            long = size + len(end) > line_bytes
            yield number, None if long else b"".join([*pieces, end])
            pieces, size = [], 0
        size += len(tail)
        if size > line_bytes:
            pieces = []
        elif tail:
            pieces.append(tail)
    if size:
        yield number + 1, None if size > line_bytes else b"".join(pieces)


def _plain(file: BinaryIO) -> Iterator[bytes]:
    chunks = _chunks(file)
    head = next(chunks, b"")
    if head.startswith(_GZIP):
        yield from _inflate(head, chunks)
    else:
        yield head
        yield from chunks


def _chunks(file: BinaryIO) -> Iterator[bytes]:
    while True:
        try:
            chunk = file.read(_CHUNK_BYTES)
        except OSError as error:
            raise DamagedFileError(f"it cannot be read on ({error.strerror})") from error
        if not chunk:
            return
        yield chunk


def _inflate(head: bytes, chunks: Iterator[bytes]) -> Iterator[bytes]:
    """What one or several gzip members hold, each output at most a chunk long."""
    member, begun, pending, data = zlib.decompressobj(wbits=31), False, False, head
    while True:
        if not begun:
            # Zeros between and after members are padding.
            data = data.lstrip(b"\0")
        if not data and not pending:
            data = next(chunks, b"")
            if not data:
                break
            continue
        before = member.copy()
        try:
            plain = member.decompress(data, _CHUNK_BYTES)
        except zlib.error as error:
            yield from _up_to_damage(before, data)
            raise DamagedFileError("the gzip data are damaged") from error
        yield plain
        if member.eof:
            member, begun, pending, data = (
                zlib.decompressobj(wbits=31), False, False, member.unused_data,
            )  # fmt: skip
        else:
            # A full output may leave more in the member without any input left.
            begun, pending, data = True, len(plain) == _CHUNK_BYTES, member.unconsumed_tail
    if begun:
        raise DamagedFileError("the gzip data end too early")


def _up_to_damage(member: zlib._Decompress, data: bytes) -> Iterator[bytes]:
    """What the bytes before the damaged one give: zlib withholds it when it fails."""
    for place in range(len(data)):
        try:
            yield member.decompress(data[place : place + 1])
        except zlib.error:
            return
