"""What every command shares: its options, its progress, and how it writes lines."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Annotated, Protocol

import structlog
import typer
from rich.console import Console
from rich.progress import (
    BarColumn,
    MofNCompleteColumn,
    Progress,
    TextColumn,
    TimeRemainingColumn,
)

SettingsOption = Annotated[
    Path,
    typer.Option("--settings", "-s", help="The settings file.", envvar="VANNER_SETTINGS"),
]
DEFAULT_SETTINGS = Path("vanner.toml")

_PLAIN_STEP = 0.1  # a plain line each tenth, where there is no terminal to draw on


def say(text: str = "") -> None:
    """One line on standard output."""
    sys.stdout.write(f"{text}\n")
    sys.stdout.flush()


def warn(text: str) -> None:
    """One line on standard error."""
    sys.stderr.write(f"{text}\n")
    sys.stderr.flush()


class Bar(Protocol):
    """How far a piece of work has come."""

    def __call__(self, done: int) -> None:
        """So many more are done."""


@contextmanager
def progress(title: str, total: int | None) -> Iterator[Bar]:
    """A progress bar on a terminal, plain lines elsewhere; both on standard error.

    Args:
        title: What is being done.
        total: How many there are, or None where that is not known.
    """
    console = Console(stderr=True)
    if not console.is_terminal:
        yield _plain(title, total)
        return
    columns = (
        TextColumn("{task.description}"),
        BarColumn(),
        MofNCompleteColumn(),
        TimeRemainingColumn(),
    )
    with Progress(*columns, console=console) as bar:
        task = bar.add_task(title, total=total)
        yield lambda done: bar.update(task, advance=done)


def _plain(title: str, total: int | None) -> Bar:
    step = max(int(total * _PLAIN_STEP), 1) if total else 10_000
    count, told = 0, 0

    def more(done: int) -> None:
        nonlocal count, told
        count += done
        if count >= told + step or (count == total and told != total):
            told = count
            warn(f"{title}: {count:,}" + (f" of {total:,}" if total else ""))

    return more


def set_up_log(form: str, *, quiet: bool = False) -> None:
    """Send log events to standard error as text or JSON lines.

    Args:
        form: "text" or "json".
        quiet: Leave out what is no warning.
    """
    renderer = (
        structlog.processors.JSONRenderer()
        if form == "json"
        else structlog.dev.ConsoleRenderer(colors=sys.stderr.isatty(), pad_event_to=0)
    )
    structlog.configure(
        processors=[
            structlog.processors.add_log_level,
            structlog.processors.TimeStamper(fmt="iso", utc=True),
            structlog.processors.format_exc_info,
            renderer,
        ],
        wrapper_class=structlog.make_filtering_bound_logger(30 if quiet else 20),
        logger_factory=structlog.PrintLoggerFactory(sys.stderr),
        cache_logger_on_first_use=False,
    )
