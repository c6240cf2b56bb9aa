"""Text as the database and the terminal may hold it: NFC, bounded, without disguises."""

from __future__ import annotations

import functools
import re
import unicodedata

_LINE_ENDS = re.compile("\r\n|[\r\v\f\x1e\x85\u2028\u2029]")
# Control characters; the byte order mark; embeddings, overrides and isolates, which can show
# a text in another order than it has; lone surrogates, which no encoding can write. Joiners
# and directional marks stay: scripts need them.
_UNWANTED = re.compile(
    "[\x00-\x08\x0b-\x1f\x7f-\x9f\ufeff\u202a-\u202e\u2066-\u2069\ud800-\udfff]+"
)
_MOST_MARKS = 30
# No combining mark is encoded beyond; a test looks through all of Unicode.
_MARKS_END = 0x20000


def clean_text(text: str, most_bytes: int) -> str:
    """The text in NFC with line feeds as its only control characters, stripped.

    It is cut at a character boundary so that its UTF-8 takes at most `most_bytes`.
    """
    if not text.replace("\n", " ").isprintable():
        text = _UNWANTED.sub("", _LINE_ENDS.sub("\n", text)).replace("\t", " ")
    # A character takes a byte at least: what is cut here could not have stayed.
    return _cut(_composed(text.strip()[:most_bytes]), most_bytes).rstrip()


def clean_line(text: str, most_characters: int) -> str:
    """The same as one line, its white space single spaces, of so many characters at most."""
    line = " ".join(clean_text(text, 40 * most_characters).split())
    return line[:most_characters].rstrip()


def _composed(text: str) -> str:
    if text.isascii() or unicodedata.is_normalized("NFC", text):
        return text
    # Putting marks into their canonical order takes the square of their number, so runs of
    # more than 30 are cut, the bound of the Stream-Safe Text Format (UAX #15).
    return unicodedata.normalize("NFC", _long_run_of_marks().sub(r"\1", text))


@functools.cache
def _long_run_of_marks() -> re.Pattern[str]:
    marks = re.escape("".join(filter(_begins_with_mark, map(chr, range(0x300, _MARKS_END)))))
    return re.compile(f"([{marks}]{{{_MOST_MARKS}}})[{marks}]+")


def _begins_with_mark(character: str) -> bool:
    return unicodedata.combining(unicodedata.normalize("NFD", character)[0]) > 0


def _cut(text: str, most_bytes: int) -> str:
    if len(text) * 4 <= most_bytes or (text.isascii() and len(text) <= most_bytes):
        return text
    data = text.encode("utf-8")
    return text if len(data) <= most_bytes else data[:most_bytes].decode("utf-8", "ignore")
