"""Fixtures that several kinds of tests share."""

from __future__ import annotations

import threading
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from email.message import Message
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer

import pytest

Body = bytes | Callable[[], Iterable[bytes]]


@dataclass
class Answer:
    status: int
    headers: Mapping[str, str]
    body: Body


@dataclass
class Request:
    path: str
    headers: Message


@dataclass
class HttpServer:
    """A real HTTP server on loopback; each path answers with what was last set for it."""

    base_url: str
    requests: list[Request] = field(default_factory=list)
    answers: dict[str, Answer | Callable[[Request], Answer]] = field(default_factory=dict)
    # Set when the test is over: a body that waits for ever waits for this.
    over: threading.Event = field(default_factory=threading.Event)

    def url(self, path: str) -> str:
        return self.base_url + path

    def set(
        self,
        path: str,
        body: Body = b"",
        *,
        status: int = 200,
        headers: Mapping[str, str] | None = None,
    ) -> str:
        """Answer `path` so from now on. A callable body gives chunks, without a length."""
        self.answers[path] = Answer(status, headers or {}, body)
        return self.url(path)

    def set_handler(self, path: str, handler: Callable[[Request], Answer]) -> str:
        """Let `handler` answer each request for `path`."""
        self.answers[path] = handler
        return self.url(path)


def _handler_for(server: HttpServer) -> type[BaseHTTPRequestHandler]:
    class Handler(BaseHTTPRequestHandler):
        def do_GET(self) -> None:
            request = Request(self.path, self.headers)
            server.requests.append(request)
            answer = server.answers.get(self.path.partition("?")[0], Answer(404, {}, b""))
            if callable(answer):
                answer = answer(request)
            try:
                self._send(answer)
            except OSError:
                # The client has gone, which some tests are about.
                self.close_connection = True

        def _send(self, answer: Answer) -> None:
            self.send_response(answer.status)
            for name, value in answer.headers.items():
                self.send_header(name, value)
            if callable(answer.body):
                self.end_headers()
                for chunk in answer.body():
                    self.wfile.write(chunk)
            else:
                self.send_header("Content-Length", str(len(answer.body)))
                self.end_headers()
                self.wfile.write(answer.body)

        def log_message(self, *args: object) -> None:
            """Keep the tests' output quiet."""

    return Handler


@pytest.fixture
def http_server() -> Iterator[HttpServer]:
    server = HttpServer("")
    listener = ThreadingHTTPServer(("127.0.0.1", 0), _handler_for(server))
    # Joined at the end, so that no thread or socket outlives its test.
    listener.daemon_threads = False
    server.base_url = f"http://127.0.0.1:{listener.server_address[1]}"
    thread = threading.Thread(target=listener.serve_forever, kwargs={"poll_interval": 0.01})
    thread.start()
    try:
        yield server
    finally:
        server.over.set()
        listener.shutdown()
        thread.join()
        listener.server_close()
