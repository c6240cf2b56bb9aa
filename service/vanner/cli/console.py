"""What every command shares: its options, its progress, and how it writes lines."""

from __future__ import annotations

import shlex
import sys
import unicodedata
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Annotated, Protocol

import typer
from rich.cells import cell_len
from rich.console import Console
from rich.progress import BarColumn, Progress, Task, TextColumn, TimeRemainingColumn
from rich.text import Text

SettingsOption = Annotated[
    Path,
    typer.Option(
        "--settings", "-s", metavar="FILE", help="The settings file.", envvar="VANNER_SETTINGS"
    ),
]
DEFAULT_SETTINGS = Path("vanner.toml")

_PLAIN_STEP = 0.1  # a plain line each tenth, where there is no terminal to draw on
_PLAIN_STEP_ITEMS = 10_000  # and each so many, where the whole number is not known


def say(text: str = "") -> None:
    """One line on standard output."""
    sys.stdout.write(f"{text}\n")
    sys.stdout.flush()


def warn(text: str) -> None:
    """One line on standard error."""
    sys.stderr.write(f"{text}\n")
    sys.stderr.flush()


def counted(number: int, one: str, more: str | None = None) -> str:
    """A number with its noun: "1 alert", "2,000 alerts"; `more` is an irregular plural."""
    return f"{number:,} {one if number == 1 else more or one + 's'}"


def shell_word(path: Path) -> str:
    """A path as it can be pasted into a shell."""
    return shlex.quote(str(path))


def printable(text: str) -> str:
    """The text on one line, without characters that a terminal would obey."""
    return "".join(" " if unicodedata.category(one) in ("Cc", "Zl", "Zp") else one for one in text)


def aligned(rows: Sequence[Sequence[str]], right: frozenset[int] = frozenset()) -> Iterator[str]:
    """Rows as lines in columns, two blanks apart, each column as wide as its widest cell.

    Args:
        rows: As many cells in each.
        right: Places of the columns that are aligned to the right, from 0.
    """
    widths = [max(map(cell_len, column)) for column in zip(*rows, strict=True)]
    for row in rows:
        cells = []
        for place, (cell, width) in enumerate(zip(row, widths, strict=True)):
            blanks = " " * (width - cell_len(cell))
            cells.append(blanks + cell if place in right else cell + blanks)
        yield "  ".join(cells).rstrip()


class Bar(Protocol):
    """How far a piece of work has come."""

    def __call__(self, done: int) -> None:
        """So many more are done."""


class _CountColumn(TextColumn):
    def __init__(self) -> None:
        super().__init__("")

    def render(self, task: Task) -> Text:
        whole = f" of {task.total:,.0f}" if task.total is not None else ""
        return Text(f"{task.completed:,.0f}{whole}")


@contextmanager
def progress(title: str, total: int | None) -> Iterator[Bar]:
    """A progress bar on a terminal, plain lines elsewhere; both on standard error.

    Args:
        title: What is being done.
        total: How many there are, or None where that is not known.
    """
    console = Console(stderr=True)
    # Asked of the stream itself: FORCE_COLOR makes the library draw into files, too.
    if not sys.stderr.isatty() or console.is_dumb_terminal:
        plain = PlainProgress(title, total)
        yield plain
        plain.close()
        return
    columns = (
        TextColumn("{task.description:<10}"),
        BarColumn(),
        _CountColumn(),
        TimeRemainingColumn(),
    )
    with Progress(*columns, console=console) as bar:
        task = bar.add_task(title, total=total)
        yield lambda done: bar.update(task, advance=done)
        # What had no known end has reached it now: the bar stands full.
        bar.update(task, total=bar.tasks[task].completed)


class PlainProgress:
    """Progress in lines, for log files and pipes."""

    def __init__(self, title: str, total: int | None) -> None:
        self._title = title
        self._total = total
        self._step = max(int(total * _PLAIN_STEP), 1) if total else _PLAIN_STEP_ITEMS
        self._count = self._told = 0

    def __call__(self, done: int) -> None:
        """So many more are done."""
        self._count += done
        if self._count >= self._told + self._step:
            self._tell()

    def close(self) -> None:
        """The work is done: tell the whole number, unless it stands there already."""
        if self._count > self._told:
            self._tell()

    def _tell(self) -> None:
        self._told = self._count
        whole = f" of {self._total:,}" if self._total else ""
        warn(f"{self._title}: {self._count:,}{whole}")
