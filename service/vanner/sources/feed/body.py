"""A response body within bounds: decompressed step by step, so that no bomb goes off."""

from __future__ import annotations

import zlib
from collections.abc import Iterable, Iterator

_STEP_BYTES = 64 * 1024
_GZIP_OR_ZLIB = zlib.MAX_WBITS | 32
_RAW_DEFLATE = -zlib.MAX_WBITS
_GZIP_MAGIC = b"\x1f\x8b"


class BodyError(Exception):
    """A body that cannot be taken; the message is a clause that tells why."""


def bounded_body(chunks: Iterable[bytes], encoding: str, body_bytes: int) -> bytes:
    """The whole body, decompressed, holding little more than `body_bytes` at any moment.

    Args:
        chunks: The body as it came over the line.
        encoding: The value of `Content-Encoding`; empty means none.
        body_bytes: The largest body taken, in bytes; it bounds the compressed size too.

    Raises:
        BodyError: The body is larger, its encoding is unknown, or the data is damaged.
    """
    names = [name for name in (part.strip().lower() for part in encoding.split(",")) if name]
    names = [name for name in names if name != "identity"]
    within = _within(chunks, body_bytes)
    if not names:
        return b"".join(within)
    if len(names) > 1 or names[0] not in ("gzip", "x-gzip", "deflate"):
        raise BodyError(f"it is sent with the content encoding {encoding[:40]!r}, not gzip")
    return b"".join(_within(_inflated(within), body_bytes))


def _within(chunks: Iterable[bytes], body_bytes: int) -> Iterator[bytes]:
    size = 0
    for chunk in chunks:
        size += len(chunk)
        if size > body_bytes:
            raise BodyError(f"it is larger than {body_bytes / 1024**2:g} MiB")
        yield chunk


def _inflated(chunks: Iterable[bytes]) -> Iterator[bytes]:
    """Inflate gzip members or one zlib or raw deflate stream, at most a step at a time."""
    inflater = None
    for chunk in chunks:
        data = chunk
        while data:
            if inflater is None:
                inflater = _inflater_for(data)
            elif inflater.eof:
                # After a gzip member comes another one or padding, which means nothing.
                if not data.startswith(_GZIP_MAGIC):
                    break
                inflater = zlib.decompressobj(_GZIP_OR_ZLIB)
            try:
                yield inflater.decompress(data, _STEP_BYTES)
            except zlib.error as error:
                raise BodyError("its compressed data is damaged") from error
            data = inflater.unused_data if inflater.eof else inflater.unconsumed_tail
    if inflater is None or inflater.eof:
        return
    tail = inflater.flush(_STEP_BYTES)
    if tail:
        yield tail
    if not inflater.eof:
        raise BodyError("its compressed data ends too early")


def _inflater_for(data: bytes) -> zlib._Decompress:
    # Some servers send "deflate" without zlib's two bytes of header, so the start decides.
    is_zlib = data[0] & 0x0F == 8 and (len(data) < 2 or (data[0] << 8 | data[1]) % 31 == 0)
    is_gzip = _GZIP_MAGIC.startswith(data[:2])
    return zlib.decompressobj(_GZIP_OR_ZLIB if is_zlib or is_gzip else _RAW_DEFLATE)
