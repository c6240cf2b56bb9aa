"""The log: events of our own and warnings of libraries, as text or as JSON lines."""

from __future__ import annotations

import io
import logging
import os
import sys
from contextlib import suppress

import structlog


def set_up_log(form: str, *, quiet: bool = False) -> None:
    """Send log events to standard error as text or JSON lines.

    Args:
        form: "text" or "json".
        quiet: Leave out what is no warning.
    """
    structlog.configure(
        processors=[
            structlog.processors.add_log_level,
            structlog.processors.TimeStamper(fmt="iso", utc=True),
            *_renderers(form),
        ],
        wrapper_class=structlog.make_filtering_bound_logger(
            logging.WARNING if quiet else logging.INFO
        ),
        # Looked up at each event: while a progress bar is drawn, lines must go above it.
        logger_factory=lambda *_: structlog.PrintLogger(_StandardError()),
        cache_logger_on_first_use=False,
    )
    # What libraries report joins the same stream, so that every line of it has one form.
    logging.root.handlers[:] = [_LibraryHandler()]
    logging.root.setLevel(logging.WARNING)
    logging.captureWarnings(True)


def _renderers(form: str) -> list[structlog.typing.Processor]:
    if form == "json":
        return [
            structlog.processors.format_exc_info,
            structlog.processors.JSONRenderer(),
        ]
    colours = sys.stderr.isatty() and not os.environ.get("NO_COLOR")
    return [
        structlog.dev.ConsoleRenderer(
            colors=colours,
            pad_event_to=0,
            exception_formatter=structlog.dev.plain_traceback,
        )
    ]


class _StandardError(io.StringIO):
    """Standard error as it is at each line; what it refuses is lost, and nothing else.

    A log on a full disk, or into a pipe whose reader has gone, must not end the work that it
    tells of.
    """

    def write(self, text: str) -> int:
        """Write, or not."""
        with suppress(OSError, ValueError):
            sys.stderr.write(text)
        return len(text)

    def flush(self) -> None:
        """Flush, or not."""
        with suppress(OSError, ValueError):
            sys.stderr.flush()


class _LibraryHandler(logging.Handler):
    """Turns a library's log record into an event."""

    def emit(self, record: logging.LogRecord) -> None:
        structlog.get_logger().log(
            record.levelno,
            "library_message",
            library=record.name,
            message=record.getMessage(),
            exc_info=record.exc_info,
        )
