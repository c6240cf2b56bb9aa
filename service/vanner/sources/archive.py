"""Archives: JSON Lines, plain or gzip, one item a line; and a source that reads one.

The keys are those of the JSON Feed item object (`id`, `date_published`, `title`,
`content_text`, `content_html`, `url`, `language`) and `source`; others are ignored.
"""

from __future__ import annotations

import codecs
import json
import math
from collections.abc import Generator, Iterator
from dataclasses import dataclass
from decimal import Decimal
from pathlib import Path
from typing import Any, BinaryIO

from vanner.clock import parse_iso
from vanner.errors import InputError
from vanner.records import Cursor, Poll, RawItem
from vanner.sources.batch import Batch
from vanner.sources.lines import DamagedFileError, bounded_lines

LINE_BYTES = 4 * 2**20


@dataclass(frozen=True, slots=True)
class ArchiveFault:
    """A line that was left out, or the place from which on a file cannot be read.

    Attributes:
        line: Its number from 1; for a damaged file the last whole line before the damage.
        reason: A clause that says what is wrong.
        ends_file: Whether all that follows is lost, too.
    """

    path: Path
    line: int
    reason: str
    ends_file: bool = False

    @property
    def sentence(self) -> str:
        """One sentence for the user: where, what, and what was done about it."""
        if self.ends_file:
            return f"{self.path.name}, after line {self.line}: {self.reason}; the rest is lost."
        return f"{self.path.name}, line {self.line}: {self.reason}; the line is left out."


@dataclass(frozen=True, slots=True)
class Line:
    """What became of one line that was not blank.

    Attributes:
        size_bytes: The line's length, 0 where it was left out.
    """

    number: int
    size_bytes: int
    result: RawItem | ArchiveFault


def read_archive(path: Path, *, line_bytes: int = LINE_BYTES) -> Iterator[RawItem | ArchiveFault]:
    """The items of an archive in its order, with a fault for each line that gives none.

    A date that is missing or cannot be read gives `published_s` None; blank lines are
    skipped; an empty file gives nothing.

    Raises:
        InputError: At the first step, where the file cannot be opened.
    """
    with open_archive(path) as file:
        for line in archive_lines(file, path, line_bytes=line_bytes):
            yield line.result


def open_archive(path: Path) -> BinaryIO:
    """The file, opened for reading.

    Raises:
        InputError: It does not exist, is no file or may not be read.
    """
    try:
        return path.open("rb")
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "its name is none"
        raise InputError(f"{path} cannot be opened ({reason}); name a readable file.") from error


def archive_lines(
    file: BinaryIO, path: Path, *, line_bytes: int = LINE_BYTES, after_line: int = 0
) -> Iterator[Line]:
    """Every line that is not blank, beyond the line numbered `after_line`."""
    number = 0
    try:
        for number, line in bounded_lines(file, line_bytes):
            if number <= after_line or (line is not None and not line.strip()):
                continue
            result = f"longer than {line_bytes} bytes" if line is None else parse_line(line)
            if isinstance(result, str):
                yield Line(number, 0, ArchiveFault(path, number, result))
            else:
                yield Line(number, len(line or b""), result)
    except DamagedFileError as error:
        yield Line(number, 0, ArchiveFault(path, number, str(error), ends_file=True))


def parse_line(line: bytes) -> RawItem | str:
    """The item of one archive line, or a clause that says why there is none."""
    found = _object(line)
    if isinstance(found, str):
        return found
    guid = _identifier(found.get("id"))
    if guid is None:
        return 'no "id"' if found.get("id") in (None, "") else 'an "id" of neither text nor number'
    for key in ("title", "content_text", "content_html"):
        if not isinstance(found.get(key), str | None):
            return f'"{key}" is no text'
    return _raw_item(guid, found)


def _object(line: bytes) -> dict[str, Any] | str:
    try:
        found = json.loads(line.removeprefix(codecs.BOM_UTF8).decode("utf-8"))
    except UnicodeDecodeError:
        return "not UTF-8"
    except RecursionError:
        return "nested too deeply"
    except ValueError:
        return "not JSON"
    return found if isinstance(found, dict) else "no JSON object"


def _raw_item(guid: str, found: dict[str, Any]) -> RawItem:
    date = found.get("date_published")
    dated = isinstance(date, str | int | float) and not isinstance(date, bool)
    return RawItem(
        guid=guid,
        title=found.get("title") or "",
        content_text=found.get("content_text"),
        content_html=found.get("content_html"),
        url=_text(found.get("url")),
        language=_text(found.get("language")),
        date_raw=str(date) if dated else None,
        published_s=_seconds(date) if isinstance(date, str) else None,
        source=_text(found.get("source")) or None,
    )


def _identifier(value: object) -> str | None:
    """Text as it is, a number in decimals; None for anything else and for empty text."""
    if isinstance(value, str):
        return value if value.strip() else None
    if isinstance(value, bool) or not isinstance(value, int | float):
        return None
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return format(Decimal(repr(value)), "f")


def _text(value: object) -> str | None:
    return value if isinstance(value, str) else None


def _seconds(date: str) -> float | None:
    try:
        return parse_iso(date)
    except (ValueError, OverflowError):
        return None


class ArchiveSource:
    """An archive as a source whose items teach the background only.

    The cursor holds the last line that was read. The open file is kept between polls, and
    is read anew only where a poll does not continue the one before it.
    """

    def __init__(self, name: str, path: Path, *, batch_items: int = 1000) -> None:
        self._name = name
        self._path = path
        self._batch_items = batch_items
        self._lines: Generator[Line, None, None] | None = None
        self._at_line: int | None = None

    @property
    def name(self) -> str:
        """The name under which the items are kept, where a line names no source."""
        return self._name

    def poll(self, cursor: Cursor, now_s: float) -> Poll:  # noqa: ARG002 - the interface's
        """The next items of the archive, at most a batch; the last poll may bring none.

        Raises:
            InputError: The archive cannot be opened.
        """
        line = cursor.get("line")
        at_line = line if isinstance(line, int) else 0
        batch = Batch(self._batch_items)
        for read in self._lines_after(at_line):
            at_line = read.number
            if isinstance(read.result, ArchiveFault):
                batch.faults.append(read.result.sentence)
            else:
                batch.add(read.result, read.size_bytes)
            if batch.full:
                break
        # A reader that came to its end or failed is of no further use.
        self._at_line = at_line if batch.full else None
        return Poll(
            items=tuple(batch.items),
            cursor={"line": at_line},
            teaches=True,
            more=batch.full,
            faults=tuple(batch.faults),
        )

    def _lines_after(self, line: int) -> Iterator[Line]:
        if self._lines is None or self._at_line != line:
            self.close()
            self._lines = self._read(line)
        self._at_line = None
        return self._lines

    def _read(self, after_line: int) -> Generator[Line, None, None]:
        with open_archive(self._path) as file:
            yield from archive_lines(file, self._path, after_line=after_line)

    def close(self) -> None:
        """Close the archive's file where it is open."""
        if self._lines is not None:
            self._lines.close()
        self._lines = None
