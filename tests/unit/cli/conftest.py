"""The command as users run it: in this process for most tests, as a real process for the rest."""

import io
import json
import logging
import os
import pty
import random
import shutil
import subprocess
import sys
import threading
from contextlib import suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

import pytest
import structlog

from vanner.cli import main

BEGUN_S = 1_700_006_400.0  # 2023-11-15 00:00 UTC
HOUR_S = 3600.0
OUTLETS = ("gull-radio", "quay-letter", "mole-post")
EVENT = "Ferry [aground] off Möwenhook 海"


@dataclass(frozen=True)
class Ended:
    status: int
    out: str
    err: str


@pytest.fixture(autouse=True)
def _own_folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for name in ("VANNER_SETTINGS", "VANNER_TRACEBACK", "FORCE_COLOR", "NO_COLOR"):
        monkeypatch.delenv(name, raising=False)
    monkeypatch.setenv("COLUMNS", "80")


@pytest.fixture
def vanner(capsys, monkeypatch):
    """Runs the command in this process, from its arguments to its exit status."""
    root = logging.getLogger()
    handlers, level = root.handlers[:], root.level

    def run(*arguments):
        monkeypatch.setattr(sys, "argv", ["vanner", *map(str, arguments)])
        capsys.readouterr()
        with pytest.raises(SystemExit) as ended:
            main()
        written = capsys.readouterr()
        return Ended(ended.value.code or 0, written.out, written.err)

    yield run
    structlog.reset_defaults()
    logging.captureWarnings(False)
    root.handlers[:], root.level = handlers, level


def command(*arguments):
    return [sys.executable, "-m", "vanner", *map(str, arguments)]


@pytest.fixture
def process():
    """Runs the command as a process of its own, without a terminal."""

    def run(*arguments, **told):
        ended = subprocess.run(
            command(*arguments),
            check=False,
            capture_output=True,
            text=True,
            stdin=subprocess.DEVNULL,
            timeout=60,
            **told,
        )
        return Ended(ended.returncode, ended.stdout, ended.stderr)

    return run


@pytest.fixture
def start():
    """Starts the command as a process that the test ends; its stderr is a pipe."""
    started = []

    def begin(*arguments):
        running = subprocess.Popen(
            command(*arguments),
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            stdin=subprocess.DEVNULL,
            text=True,
        )
        # What hangs is ended, so that the test fails instead of waiting for ever.
        alarm = threading.Timer(60, running.kill)
        alarm.start()
        started.append((running, alarm))
        return running

    yield begin
    for running, alarm in started:
        alarm.cancel()
        alarm.join()
        if running.poll() is None:
            running.kill()
        with running:
            pass


@pytest.fixture
def terminal():
    """Runs the command on a terminal of its own: its exit status and all that it drew."""

    def run(*arguments, columns=80):
        master, slave = pty.openpty()
        environment = os.environ | {"TERM": "xterm", "COLUMNS": str(columns), "LINES": "24"}
        with subprocess.Popen(
            command(*arguments), stdin=slave, stdout=slave, stderr=slave, env=environment
        ) as running:
            os.close(slave)
            drawn = io.BytesIO()
            # The terminal reports an error, not an end, once its last user has gone.
            with suppress(OSError):
                while piece := os.read(master, 65536):
                    drawn.write(piece)
            os.close(master)
        return running.returncode, drawn.getvalue().decode()

    return run


def line(number, title, text, time_s, source=None):
    entry = {
        "id": f"n{number}",
        "date_published": datetime.fromtimestamp(time_s, UTC).isoformat(),
        "title": title,
        "content_text": text,
    }
    return json.dumps(entry | ({"source": source} if source else {}), ensure_ascii=False)


@pytest.fixture(scope="session")
def archive_line():
    """Builds a line of an archive."""
    return line


@pytest.fixture(scope="session")
def few_lines():
    """Six items of plain talk, some minutes apart."""
    return [line(n, f"Tide table {n}", f"water at mark {n}", BEGUN_S + 60 * n) for n in range(6)]


def _town_lines():
    """Three days and a half of talk in hourly bursts, enough to warm a desk up; then an event."""
    rng = random.Random(7)
    words = [f"harbour{n}" for n in range(90)]
    lines = []
    for hour in range(84):
        for _ in range(8):
            text = " ".join(rng.choices(words, k=34))
            time_s = BEGUN_S + hour * HOUR_S
            lines.append(line(len(lines), "Notices", text, time_s, rng.choice(OUTLETS)))
    for n in range(12):
        text = "Ferry aground off Moewenhook, passengers taken off by cutter " + "after" * (n % 7)
        time_s = BEGUN_S + 84 * HOUR_S + 60 * n
        lines.append(line(len(lines), EVENT, text, time_s, OUTLETS[n % 3]))
    return lines


@pytest.fixture(scope="session")
def town(tmp_path_factory):
    """An archive that holds one event, and the database of its replay by the command."""
    folder = tmp_path_factory.mktemp("town")
    archive = folder / "town.jsonl"
    archive.write_text("\n".join(_town_lines()) + "\n", encoding="utf-8")
    ended = subprocess.run(
        command("replay", archive, "--database", folder / "town.db"),
        check=False,
        capture_output=True,
        text=True,
        timeout=60,
    )
    return archive, folder / "town.db", Ended(ended.returncode, ended.stdout, ended.stderr)


@pytest.fixture
def town_database(town, tmp_path):
    """A copy of the replay's database that a test may change."""
    return Path(shutil.copy(town[1], tmp_path / "town.db"))


@pytest.fixture
def write_archive(tmp_path):
    """Writes an archive and gives its path."""

    def write(lines, name="few.jsonl"):
        path = tmp_path / name
        path.write_text("".join(f"{one}\n" for one in lines), encoding="utf-8")
        return path

    return write


@pytest.fixture
def settings(tmp_path):
    """Writes vanner.toml: one folder, the desks "metro" and "port", and what is added."""

    def write(more="", *, folder=True):
        first = '[[source]]\nname = "inbox"\nkind = "folder"\npath = "inbox"\n' if folder else ""
        desks = "".join(
            f'[[desk]]\nname = "{name}"\nsources = ["{"inbox" if folder else "wire"}"]\n'
            for name in ("metro", "port")
        )
        path = tmp_path / "vanner.toml"
        path.write_text(first + desks + more, encoding="utf-8")
        return path

    return write
