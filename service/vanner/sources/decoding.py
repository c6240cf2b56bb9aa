"""Bytes of a source as text, whatever charset they were declared to be in.

Intake uses it for all bytes that sources hand on; a source uses it where it must see text.
"""

from __future__ import annotations

import codecs
import re

from charset_normalizer import from_bytes

# UTF-32 stands before UTF-16, whose little-endian mark is the beginning of its own.
_MARKS = (
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF32_LE, "utf-32-le"),
    (codecs.BOM_UTF32_BE, "utf-32-be"),
    (codecs.BOM_UTF16_LE, "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16-be"),
)
# Python calls these text encodings, but no document is written in them, and some take
# quadratic time or give warnings.
_NO_CHARSETS = {
    "idna", "mbcs", "oem", "punycode", "raw-unicode-escape", "raw_unicode_escape",
    "undefined", "unicode-escape", "unicode_escape", "unicode_internal", "utf-7",
}  # fmt: skip
# The WHATWG Encoding Standard reads this name as windows-1252.
_WEST = "iso8859-1"
_META = re.compile(rb"""<meta[^>]{1,1000}?charset\s*=\s*["']?\s*([\w.:-]{1,40})""", re.IGNORECASE)
_META_WITHIN_BYTES = 4096
_HIGH = re.compile(rb"[\x80-\xff]")
_EBCDIC = ["cp037", "cp273", "cp424", "cp500", "cp875", "cp1026", "cp1140", "utf_7"]
_WINDOW_BYTES = 16384
_FEWEST_HIGH_BYTES = 8


def decode(data: bytes, declared: str | None = None, *, html: bool = False) -> str:
    """The text that the bytes hold; never fails, and gives "" for no bytes.

    Tried in this order: a byte order mark, the declared charset, an HTML document's own
    meta charset, UTF-8 (each only where every byte can be read), UTF-8 with few damaged
    places, charset-normalizer's best guess from a window of 16 KiB, windows-1252.
    """
    for mark, encoding in _MARKS:
        if data.startswith(mark):
            return data[len(mark) :].decode(encoding, "replace")
    for name in (declared, _meta_charset(data) if html else None, "utf-8"):
        text = _strictly(data, name)
        if text is not None:
            return text
    return _damaged_utf8(data) or data.decode(_guess(data), "replace")


def _strictly(data: bytes, name: str | None) -> str | None:
    """The bytes read by a named charset, or None where it is unknown or does not fit."""
    encoding = _python_name(name)
    if encoding is None:
        return None
    try:
        return data.decode(encoding)
    except (LookupError, ValueError):
        return None


def _python_name(name: str | None) -> str | None:
    if name is None or len(name) > 40:
        return None
    try:
        encoding = codecs.lookup(name.strip(" \t\r\n\"'")).name
    except (LookupError, ValueError):
        return None
    if encoding in _NO_CHARSETS:
        return None
    return "cp1252" if encoding == _WEST else encoding


def _meta_charset(data: bytes) -> str | None:
    found = _META.search(data[:_META_WITHIN_BYTES])
    if found is None:
        return None
    name = found[1].decode("ascii", "replace")
    # A mark-up that ASCII could read is not in UTF-16, whatever it says of itself.
    return None if name.lower().startswith(("utf-16", "utf-32", "ucs-")) else name


def _damaged_utf8(data: bytes) -> str | None:
    """UTF-8 with a damaged place or a cut end: at least ten good characters for each."""
    text = data.decode("utf-8", "replace")
    damaged = text.count("\ufffd")
    # Each character beyond ASCII takes at least one byte more than it counts.
    beyond = (len(data) - len(text)) // 3
    return text if damaged * 10 <= beyond else None


def _guess(data: bytes) -> str:
    first = _HIGH.search(data)
    if first is None:
        return "cp1252"
    start = max(0, first.start() - 1024)
    window = data[start : start + _WINDOW_BYTES]
    if len(_HIGH.findall(window)) < _FEWEST_HIGH_BYTES:
        # So few say nothing: a guess would make any alphabet of a single accent.
        return "cp1252"
    best = from_bytes(window, cp_exclusion=_EBCDIC).best()
    return "cp1252" if best is None else best.encoding
