"""The daemon and the commands beside it, as real processes."""

import json
import os
import signal
import sqlite3
import subprocess
import sys
import threading
import time
from contextlib import closing

import pytest

PATIENCE_S = 60
SECRET = "tarpaulin-9-lantern"  # noqa: S105 - known to this test only

SETTINGS = """
[service]
pulse = "1s"
log = "{log}"

[[source]]
name = "inbox"
kind = "folder"
path = "inbox"
every = "1s"

[[desk]]
name = "metro"
sources = ["inbox"{more}]
warm_up = "1s"
warm_up_words = 0
"""
WIRE = """
[[source]]
name = "wire"
kind = "feed"
url = "{url}"
username = "desk"
password = {{ env = "WIRE_SECRET" }}
"""


class Daemon:
    """`vanner run` as a process; the lines of its log are gathered as they come."""

    def __init__(self, folder):
        self.process = subprocess.Popen(
            [sys.executable, "-m", "vanner", "run"],
            cwd=folder,
            env=os.environ | {"WIRE_SECRET": SECRET},
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        )
        self.log = []
        self._reader = threading.Thread(target=self._read)
        self._reader.start()

    def _read(self):
        for line in self.process.stderr:
            self.log.append(line)

    def wait_for(self, words):
        wait_until(lambda: any(words in line for line in self.log), self.log)

    def end(self):
        """Tell it to end, and give its exit status and what it wrote on stdout."""
        self.process.send_signal(signal.SIGTERM)
        # A fault ends the test here; how fast it is beyond that is not looked at.
        self.process.wait(timeout=30)
        self._reader.join()
        return self.process.returncode, self.process.stdout.read()

    def close(self):
        if self.process.poll() is None:
            self.process.kill()
        self._reader.join()
        with self.process:
            pass


def wait_until(holds, shown=None):
    """Look again and again until something holds; what hangs fails here."""
    for _ in range(PATIENCE_S * 20):
        if holds():
            return
        time.sleep(0.05)
    pytest.fail(f"it never came about: {shown}")


@pytest.fixture
def write_settings(tmp_path):
    def write(log="text", url=None):
        text = SETTINGS.format(log=log, more="" if url is None else ', "wire"')
        (tmp_path / "vanner.toml").write_text(text + ("" if url is None else WIRE.format(url=url)))

    return write


@pytest.fixture
def serve(tmp_path):
    """Starts `vanner run` in the test's folder and waits until it serves."""
    running = []

    def start():
        running.append(Daemon(tmp_path))
        running[-1].wait_for("service_started")
        return running[-1]

    yield start
    for daemon in running:
        daemon.close()


@pytest.fixture
def vanner(tmp_path):
    """Runs another command beside the daemon."""

    def run(*arguments):
        return subprocess.run(
            [sys.executable, "-m", "vanner", *arguments],
            cwd=tmp_path,
            env=os.environ | {"WIRE_SECRET": SECRET},
            check=False,
            capture_output=True,
            text=True,
            timeout=PATIENCE_S,
        )

    return run


@pytest.fixture
def ask(tmp_path):
    def of(sql):
        with closing(sqlite3.connect(tmp_path / "vanner.db")) as connection:
            return connection.execute(sql).fetchall()

    return of


@pytest.mark.slow
def test_a_second_daemon_is_refused_while_the_first_goes_on(
    write_settings, serve, vanner, ask, tmp_path
):
    write_settings()
    first = serve()
    second = vanner("run")
    assert (second.returncode, second.stdout) == (4, "")
    assert second.stderr == (
        f"vanner: A daemon already serves the database {tmp_path / 'vanner.db'}; "
        "end it before starting another.\n"
    )
    assert "Daemon    serves it" in vanner("status").stdout
    (tmp_path / "inbox" / "note.txt").write_text("Ferry aground off the mole")
    wait_until(lambda: ask("SELECT count(*) FROM readings") == [(1,)], first.log)
    assert first.end() == (0, "")
    assert first.log[-1].rstrip().endswith("service_stopped")


@pytest.mark.slow
def test_sigterm_ends_a_daemon_whose_poll_hangs_and_its_log_is_json(
    write_settings, serve, http_server
):
    def silence():
        http_server.over.wait()
        yield b""

    write_settings("json", http_server.set("/feed", silence))
    daemon = serve()
    wait_until(lambda: http_server.requests, daemon.log)
    assert daemon.end() == (0, "")
    events = [json.loads(line) for line in daemon.log]
    assert events[0]["event"] == "service_started"
    assert (events[0]["sources"], events[0]["desks"], events[0]["level"]) == (2, 1, "info")
    assert events[-1]["event"] == "service_stopped"
    assert all(event["timestamp"].endswith("Z") for event in events)


@pytest.mark.slow
def test_a_secret_reaches_its_server_and_neither_the_log_nor_the_database(
    write_settings, serve, http_server, vanner, tmp_path
):
    write_settings("json", http_server.set("/feed", status=401))
    daemon = serve()
    daemon.wait_for("poll_failed")
    shown = vanner("status").stdout
    daemon.end()
    sent = [request.headers["Authorization"] for request in http_server.requests]
    assert any(sent)
    failed = next(json.loads(line) for line in daemon.log if "poll_failed" in line)
    assert (failed["source"], failed["failures"], failed["level"]) == ("wire", 1, "warning")
    assert "FAILING, 1 failure in a row" in shown
    encoded = next(one for one in sent if one).removeprefix("Basic ")
    kept = b"".join(path.read_bytes() for path in tmp_path.glob("vanner.db*"))
    for secret in (SECRET, encoded):
        assert secret not in "".join(daemon.log) + shown
        assert secret.encode() not in kept


@pytest.mark.slow
def test_a_running_daemon_takes_in_what_is_imported_and_raises_nothing_of_it(
    write_settings, serve, vanner, ask, tmp_path
):
    write_settings()
    daemon = serve()
    lines = [
        json.dumps(
            {
                "id": f"n{number}",
                "date_published": f"2023-11-15T{number // 60:02}:{number % 60:02}:00Z",
                "title": "Ferry aground" if number > 40 else f"Tide table {number}",
            }
        )
        for number in range(60)
    ]
    (tmp_path / "past.jsonl").write_text("\n".join(lines))
    ended = vanner("import", "past.jsonl", "--source", "inbox")
    assert (ended.returncode, ended.stderr) == (0, "Importing: 60\n")
    assert ended.stdout == (
        "60 items to learn from, 0 revisions, 0 known already; "
        "they are read from the next pulse on, 2,000 a pulse.\n"
    )
    wait_until(lambda: ask("SELECT count(*) FROM readings") == [(60,)], daemon.log)
    assert daemon.end() == (0, "")
    assert ask("SELECT count(*) FROM alerts") == [(0,)]
    assert ask("SELECT count(*) FROM noted") == [(0,)]
    assert ask("SELECT DISTINCT status FROM items") == [("taught",)]
