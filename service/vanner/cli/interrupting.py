"""Signals: what Ctrl-C and SIGTERM do while a command runs."""

from __future__ import annotations

import signal
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType


@contextmanager
def stop_signals() -> Iterator[threading.Event]:
    """An event that SIGTERM and SIGINT set, for the length of the block."""
    stop = threading.Event()

    def on_signal(_number: int, _frame: FrameType | None) -> None:
        stop.set()

    earlier = {
        number: signal.signal(number, on_signal) for number in (signal.SIGTERM, signal.SIGINT)
    }
    try:
        yield stop
    finally:
        for number, handler in earlier.items():
            signal.signal(number, handler)


def leave_at_latest(stop: threading.Event, after_s: float, leave: Callable[[], None]) -> None:
    """Call `leave` so long after `stop` was set, unless the process has ended by then."""

    def wait() -> None:
        stop.wait()
        time.sleep(after_s)
        leave()

    threading.Thread(target=wait, daemon=True).start()


@contextmanager
def interrupted_at_once() -> Iterator[None]:
    """Let Ctrl-C end the process itself, for the length of a block that only reads.

    A query's single step may take minutes, and Python acts on signals only between steps.
    Shells report such an end as status 130.
    """
    earlier = signal.signal(signal.SIGINT, signal.SIG_DFL)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, earlier)
