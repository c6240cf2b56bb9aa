"""A limit on the whole of a request, which neither a slow nor an endless answer outlasts."""

from __future__ import annotations

import socket
import threading
from collections.abc import Mapping
from types import TracebackType
from typing import Any, Self


class Deadline:
    """Cuts the connection of the requests made within it once `total_s` seconds have passed.

    A read timeout starts anew with every byte, so a server that sends one byte now and then
    could hold a poll for ever. This watches from a timer's thread and shuts the socket down,
    which wakes the reader. Hand `trace` to the request as httpx's "trace" extension: it tells
    the connection's stream. Connecting and the TLS handshake end by the connection timeout and
    name resolution by the resolver's own, so these may come on top of `total_s`.

    Attributes:
        passed: Whether the time was up before the requests ended.
    """

    def __init__(self, total_s: float) -> None:
        self.passed = False
        self._stream: Any = None
        self._lock = threading.Lock()
        self._timer = threading.Timer(total_s, self._cut)
        self._timer.daemon = True

    def __enter__(self) -> Self:
        """Start the timer."""
        self._timer.start()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Stop it."""
        self._timer.cancel()
        with self._lock:
            self._stream = None

    def trace(self, event: str, info: Mapping[str, Any]) -> None:
        """Remember the stream of the newest connection, in the clear or over TLS."""
        if event.endswith(("connect_tcp.complete", "start_tls.complete")):
            with self._lock:
                self._stream = info["return_value"]
                if self.passed:
                    self._shut()

    def _cut(self) -> None:
        with self._lock:
            self.passed = True
            self._shut()

    def _shut(self) -> None:
        connection = self._stream.get_extra_info("socket") if self._stream is not None else None
        if connection is not None:
            try:
                # The plain socket's own way: a TLS socket's would take the session apart
                # under the thread that is reading from it.
                socket.socket.shutdown(connection, socket.SHUT_RDWR)
            except OSError:
                # It has ended by itself in the meantime.
                return
