"""Fitting untrusted text into lines of a known width, counted in terminal cells.

Titles come from outside. Before one is shown it becomes a single line without control
characters and without the marks that reorder text, which could make a line read as something
that its source never wrote.
"""

from __future__ import annotations

import unicodedata

WIDTH = 76  # cells; leaves room for one quoting mark within the 78 columns of RFC 5322, 2.1.1
ELLIPSIS = "…"

# Embeddings, overrides and isolates of the Unicode bidirectional algorithm (UAX #9, 2.1-2.4).
_REORDERING = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")


def one_line(text: str) -> str:
    """Text as one line: white space collapsed, control and reordering characters taken out.

    Lone surrogates, which no mail or file can hold, become U+FFFD. Empty text stays empty.
    """
    kept = []
    for character in text:
        category = unicodedata.category(character)
        if category == "Cs":
            kept.append("\ufffd")
        elif category in ("Cc", "Zl", "Zp"):
            kept.append(" ")
        elif character not in _REORDERING:
            kept.append(character)
    return " ".join("".join(kept).split())


def _cells_of(character: str) -> int:
    if unicodedata.category(character) in ("Mn", "Me", "Cf"):
        return 0
    return 2 if unicodedata.east_asian_width(character) in ("W", "F") else 1


def cells(text: str) -> int:
    """The columns that a terminal takes to show a line: wide characters count as two."""
    return sum(_cells_of(character) for character in text)


def _split_at(text: str, width: int) -> tuple[str, str]:
    """The longest head of a text that fits a width, and what is left."""
    used = 0
    for place, character in enumerate(text):
        used += _cells_of(character)
        if used > width:
            return text[:place], text[place:]
    return text, ""


def cut(text: str, width: int = WIDTH) -> str:
    """The text as one line of at most `width` cells, ending in an ellipsis where it was cut."""
    line = one_line(text)
    if cells(line) <= width:
        return line
    head, _ = _split_at(line, width - 1)
    return head.rstrip(" \u200d") + ELLIPSIS


def padded(text: str, width: int) -> str:
    """The text cut to a width and filled up to it with spaces."""
    line = cut(text, width)
    return line + " " * (width - cells(line))


def wrap(
    text: str, first: str = "", rest: str = "", width: int = WIDTH, most: int | None = None
) -> str:
    """The text broken into lines of at most `width` cells.

    Args:
        text: Any text; it is made one line before it is broken.
        first: What stands before the first line; it counts towards the width.
        rest: What stands before the others; less wide than `width`.
        width: In cells.
        most: At most that many lines, the last one cut with an ellipsis; None for all.
    """
    lines: list[str] = []
    left = one_line(text)
    while True:
        start = rest if lines else first
        room = width - cells(start)
        if most is not None and len(lines) == most - 1:
            lines.append(start + cut(left, room))
            break
        head, left = _broken(left, room)
        lines.append(start + head)
        if not left:
            break
    return "\n".join(lines)


def _broken(text: str, room: int) -> tuple[str, str]:
    """A line's worth of text, broken at a space where it has one, and what is left."""
    head, tail = _split_at(text, room)
    if not tail:
        return head, ""
    if not head:
        # Not even one character fits; an endless line is worse than one that is too wide.
        return text[:1], text[1:].lstrip()
    if not tail.startswith(" "):
        before, space, after = head.rpartition(" ")
        if space:
            head, tail = before, after + tail
    return head.rstrip(), tail.lstrip()
