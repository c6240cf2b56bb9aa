"""Encoded words (RFC 2047) in a mail's headers."""

from __future__ import annotations

import binascii
import quopri
import re

from vanner.sources.decoding import decode

_WORD = re.compile(r"=\?([^?\s]{1,75})\?([BbQq])\?([^?\r\n]*)\?=")
_BETWEEN = re.compile(r"(\?=)[ \t]+(?==\?)")


def decode_words(header: str) -> str:
    """An unfolded header as text; what is broken in it stays as it stands.

    Neighbouring words in one charset are joined before they are decoded, since many senders
    cut within a character. Lone surrogates are bytes beyond ASCII that were never encoded.
    """
    pieces: list[tuple[bytes, str | None]] = []
    place, header = 0, _BETWEEN.sub(r"\1", header)
    for word in _WORD.finditer(header):
        _add(pieces, _unescaped(header[place : word.start()]), None)
        data = _word_bytes(word[3], word[2].lower())
        # A language may follow the charset (RFC 2231).
        charset = None if data is None else word[1].partition("*")[0].lower()
        _add(pieces, _unescaped(word[0]) if data is None else data, charset)
        place = word.end()
    _add(pieces, _unescaped(header[place:]), None)
    return "".join(decode(data, charset) for data, charset in pieces).strip()


def _add(pieces: list[tuple[bytes, str | None]], data: bytes, charset: str | None) -> None:
    if pieces and pieces[-1][1] == charset:
        data = pieces.pop()[0] + data
    if data:
        pieces.append((data, charset))


def _unescaped(text: str) -> bytes:
    return text.encode("utf-8", "surrogateescape")


def _word_bytes(text: str, encoding: str) -> bytes | None:
    data = _unescaped(text)
    if encoding == "q":
        return quopri.decodestring(data, header=True)
    try:
        return binascii.a2b_base64(data + b"=" * (-len(data) % 4))
    except binascii.Error:
        return None
