"""From the bytes of an XML document to UTF-8, even where its declared charset is wrong."""

from __future__ import annotations

import codecs
import re

import charset_normalizer

# The longer marks first: UTF-32's little-endian mark begins like UTF-16's.
_MARKS = (
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF32_LE, "utf-32-le"),
    (codecs.BOM_UTF32_BE, "utf-32-be"),
    (codecs.BOM_UTF16_LE, "utf-16-le"),
    (codecs.BOM_UTF16_BE, "utf-16-be"),
)
# "<" in the encodings that an XML declaration read as ASCII cannot name (XML 1.0, appendix F).
_STARTS = (
    (b"<\0\0\0", "utf-32-le"),
    (b"\0\0\0<", "utf-32-be"),
    (b"<\0", "utf-16-le"),
    (b"\0<", "utf-16-be"),
)
_DECLARED = re.compile(rb"\s*<\?xml[^>]{0,200}?encoding\s*=\s*[\"']([\w.:-]{1,40})[\"']")
_HEADER = re.compile(r";\s*charset\s*=\s*[\"']?([\w.:-]{1,40})", re.IGNORECASE)
# Not charsets of documents; decoding a long body by some of them takes quadratic time.
_UNFIT = frozenset(
    {"idna", "mbcs", "oem", "punycode", "raw_unicode_escape", "undefined", "unicode_escape"}
    | {"utf-7", "raw-unicode-escape", "unicode-escape"}
)
# In these every sequence of bytes means something, so that they are believed least.
_SINGLE_BYTE = re.compile(r"ascii|iso8859-\d+|cp\d{3,4}|koi8-\w|mac-\w+|tis-620|hp-roman8")
_MULTI_BYTE_PAGES = frozenset({"cp932", "cp936", "cp949", "cp950"})
# What is sent without a word about its charset is in one of the legacy encodings of the
# WHATWG's Encoding Standard; the old Apple and DOS pages would only mislead the guess.
_GUESSES = (
    *("big5", "euc_jp", "euc_kr", "gb18030", "koi8_r", "shift_jis", "tis_620"),
    *(f"cp{page}" for page in range(1250, 1259)),
)
_GUESS_BYTES = 64 * 1024
_HIGH_BYTE = re.compile(rb"[\x80-\xff]")
_BEYOND_ASCII = re.compile(r"[^\x00-\x7f]")


def to_utf8(data: bytes, content_type: str | None) -> tuple[bytes, str | None]:
    """The document in UTF-8 and, where what it declares does not fit it, a clause that says so.

    Tried in turn: a byte order mark; valid UTF-8 where only a single-byte charset speaks
    against it, because other text hardly ever is valid UTF-8; the charset of `content_type`;
    that of the XML declaration; a guess. Never fails: what cannot be read becomes U+FFFD.
    """
    for mark, name in _MARKS:
        if data.startswith(mark):
            return _utf8(data[len(mark) :].decode(name, "replace")), None
    for start, name in _STARTS:
        if data.startswith(start):
            return _utf8(data.decode(name, "replace")), None
    declared = _declared(data, content_type)
    if all(_is_single_byte(name) for name in declared) and _decoded(data, "utf-8") is not None:
        return data, None
    for name in (*declared, "utf-8"):
        text = _decoded(data, name)
        if text is not None:
            return _utf8(text), _mismatch(declared, name)
    name = _guess(data)
    return _utf8(data.decode(name, "replace")), _mismatch(declared, name)


def _declared(data: bytes, content_type: str | None) -> list[str]:
    """The usable charsets declared, in Python's names, the header's before the document's."""
    names = []
    header = _HEADER.search(content_type or "")
    if header is not None:
        names.append(header[1])
    document = _DECLARED.match(data[:512])
    if document is not None and not document[1].lower().startswith((b"utf-16", b"utf-32", b"ucs")):
        # A declaration that could be read as ASCII is not in UTF-16, whatever it says.
        names.append(document[1].decode("ascii", "replace"))
    return [_canonical(name) for name in names]


def _canonical(name: str) -> str:
    try:
        known = codecs.lookup(name).name
    except LookupError:
        return name.lower()
    # GB 18030 holds all of GB 2312, and more than that is what is sent under its name.
    return "gb18030" if known in ("gb2312", "gbk") else known


def _decoded(data: bytes, name: str) -> str | None:
    if name in _UNFIT:
        return None
    try:
        text = data.decode(name)
    except (UnicodeError, LookupError):
        return None
    # Read by the wrong charset, a document may hold no markup at all.
    return text if "<" in text[:4096] else None


def _guess(data: bytes) -> str:
    """The likeliest charset of bytes that are not valid in any declared one."""
    text = data.decode("utf-8", "replace")
    if text.count("\ufffd") * 10 <= sum(1 for _ in _BEYOND_ASCII.finditer(text)):
        # UTF-8 with a few damaged places.
        return "utf-8"
    start = next(_HIGH_BYTE.finditer(data)).start()
    sample = data[max(0, start - 256) : start + _GUESS_BYTES]
    best = charset_normalizer.from_bytes(sample, cp_isolation=[*_GUESSES]).best()
    return best.encoding if best is not None else "cp1252"


def _is_single_byte(name: str) -> bool:
    return name == "utf-8" or (
        _SINGLE_BYTE.fullmatch(name) is not None and name not in _MULTI_BYTE_PAGES
    )


def _mismatch(declared: list[str], used: str) -> str | None:
    if not declared:
        return None if used == "utf-8" else f"it declares no charset and was read as {used}"
    if used == declared[0]:
        return None
    return f"it declares the charset {declared[0]} and was read as {used}"


def _utf8(text: str) -> bytes:
    return text.encode("utf-8", "replace")
