"""Making an XML document harmless before a feed is read from it.

A feed's parser follows what the document says: entities that multiply, documents elsewhere,
thousands of attributes. What a news item never needs is taken out here, and a document that
is out of all proportion is refused, so that reading what remains takes bounded time and room.
"""

from __future__ import annotations

import re
from collections import Counter
from xml.parsers import expat

# Ten megabytes of a real feed hold some tens of thousands of tags.
MAX_TAGS = 200_000
MAX_REFERENCES = 300_000
MAX_ATTRIBUTES = 200
MAX_PREFIXES = 200
_MAX_EXPANSION_BYTES = 1_000_000

_DECLARATION = b'<?xml version="1.0" encoding="utf-8"?>\n'
_ROOT = re.compile(rb"<\w")
_SPACE = re.compile(rb"\s*")
_SUBSET_END = re.compile(rb"\]\s*>")
_ENTITY = re.compile(rb'<!ENTITY\s+(\w{1,64})\s+"([^"&%<]{0,1000}|&#\w{1,8};)"\s*>')
_REFERENCE = re.compile(rb"&(\w{1,64});")
_CHARACTER = re.compile(rb"&#([xX]?)([0-9a-fA-F]+);?")
# Blanks of one byte and, in UTF-8, the no-break, general-punctuation and ideographic ones.
_BLANKS = re.compile(rb"(?:\s|\xc2[\x85\xa0]|\xe2\x80[\x80-\x8a\xa8\xa9\xaf]|\xe3\x80\x80){200,}+")
# No item of ours has an author or a category, and splitting these into names, addresses and
# tags takes time quadratic in their length; under another name nobody splits them.
_UNUSED = re.compile(
    rb"(</?(?:[\w.-]{1,64}:)?)(?:author|managingeditor|creator|owner|publisher|webmaster"
    rb"|contributor|category|subject|keywords|tags)(?![\w.:-])",
    re.IGNORECASE,
)
_LONG_TAG = re.compile(rb"<[^<>]{65536}")
_CONTROLS = bytes(code for code in range(32) if code not in (9, 10, 13))
_SPECIAL = frozenset(b"\"&'<>")


class MarkupError(Exception):
    """A document that is no XML, or out of proportion; the message is a clause."""


def harmless(document: bytes) -> tuple[bytes, tuple[str, ...]]:
    """The same XML document in UTF-8 without what could harm, and clauses on what went.

    Declared entities stay only where they are plain text and expand to little.

    Raises:
        MarkupError: It holds no element at all, or too many tags, attributes or prefixes.
    """
    notes: list[str] = []
    doctype, body = _split(document.translate(None, _CONTROLS))
    root = _ROOT.search(body)
    if root is None:
        raise MarkupError("it is not XML")
    if root.start() > 0:
        notes.append("there is text before its first element")
    body = _CHARACTER.sub(_character, body[root.start() :])
    entities = dict(_ENTITY.findall(doctype)[:200])
    if _expansion_bytes(body, entities) > _MAX_EXPANSION_BYTES:
        entities = {}
    if doctype.count(b"<!ENTITY") > len(entities):
        notes.append("entities that it defines were left out")
    body = _BLANKS.sub(b" ", _UNUSED.sub(rb"\1unused", body))
    result = _DECLARATION + _declared(entities) + body
    _check_proportion(result)
    return result, tuple(notes)


def _split(document: bytes) -> tuple[bytes, bytes]:
    """The document type declaration (may be empty) and all from the first element on."""
    at, doctype = 0, b""
    while True:
        blank = _SPACE.match(document, at)
        at = blank.end() if blank is not None else at
        if document.startswith(b"<!--", at):
            end = _after(document, b"-->", at + 4)
        elif document.startswith(b"<?", at):
            end = _after(document, b"?>", at + 2)
        elif document[at : at + 9].upper() == b"<!DOCTYPE":
            end = _doctype_end(document, at)
            doctype = document[at : max(at, end)]
        else:
            return doctype, document[at:]
        if end < 0:
            # It never ends; whatever element follows its beginning is taken as the first.
            return doctype, document[at + 2 :]
        at = end


def _after(document: bytes, mark: bytes, start: int) -> int:
    found = document.find(mark, start)
    return found + len(mark) if found >= 0 else -1


def _doctype_end(document: bytes, start: int) -> int:
    end = _after(document, b">", start)
    subset = document.find(b"[", start, end if end >= 0 else len(document))
    if subset < 0:
        return end
    closed = _SUBSET_END.search(document, subset)
    return closed.end() if closed is not None else -1


def _character(reference: re.Match[bytes]) -> bytes:
    """A character reference as the character, as the blank, or as U+FFFD where it names none.

    What means something to markup stays a reference. Some parsers fail altogether on a
    reference beyond Unicode, and they pass each one on by itself, which costs time.
    """
    hexadecimal = bool(reference[1])
    digits = reference[2].lstrip(b"0") or b"0"
    if not hexadecimal and not digits.isdigit():
        return reference[0]
    code = int(digits, 16 if hexadecimal else 10) if len(digits) <= 8 else 0
    if code in (9, 10, 13, 32):
        return b" "
    if code in _SPECIAL:
        return reference[0]
    named = 32 < code < 0xD800 or 0xE000 <= code < 0xFFFE or 0x10000 <= code <= 0x10FFFF
    return chr(code if named else 0xFFFD).encode()


def _expansion_bytes(body: bytes, entities: dict[bytes, bytes]) -> int:
    if not entities:
        return 0
    counts = Counter(found[1] for found in _REFERENCE.finditer(body) if found[1] in entities)
    # Each reference costs a call as well, however short its value.
    return sum(count * (len(entities[name]) + 10) for name, count in counts.items())


def _declared(entities: dict[bytes, bytes]) -> bytes:
    if not entities:
        return b""
    lines = b"".join(b'<!ENTITY %s "%s">\n' % pair for pair in entities.items())
    return b"<!DOCTYPE feed [\n" + lines + b"]>\n"


def _check_proportion(document: bytes) -> None:
    tags, references = _count_markup(document)
    if tags > MAX_TAGS:
        raise MarkupError(f"it holds more than {MAX_TAGS} tags")
    prefixes: set[str] = set()

    def start(_name: str, attributes: dict[str, str]) -> None:
        prefixes.update(name for name in attributes if name.startswith("xmlns"))
        if len(attributes) > MAX_ATTRIBUTES or len(prefixes) > MAX_PREFIXES:
            raise MarkupError("it holds elements with hundreds of attributes")

    parser = expat.ParserCreate()
    parser.StartElementHandler = start
    try:
        parser.Parse(document, True)
    except expat.ExpatError as error:
        # The forgiving parser that takes over costs more for each of them.
        if references > MAX_REFERENCES or _LONG_TAG.search(document):
            raise MarkupError("it is not well-formed and too large to be mended") from error


def _count_markup(document: bytes) -> tuple[int, int]:
    """How many "<" and "&" stand outside CDATA sections; an unclosed one runs to the end."""
    tags = references = at = 0
    while at >= 0:
        start = document.find(b"<![CDATA[", at)
        stop = start if start >= 0 else len(document)
        tags += document.count(b"<", at, stop)
        references += document.count(b"&", at, stop)
        at = _after(document, b"]]>", start) if start >= 0 else -1
    return tags, references
