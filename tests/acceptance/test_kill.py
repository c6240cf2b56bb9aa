"""Twenty kills at moments drawn from a fixed random state, and nothing lost or doubled."""

import random
import signal
import socket
import sqlite3
import subprocess
import sys
import threading
import time
from collections import Counter
from email import message_from_bytes
from pathlib import Path

import pytest
from aiosmtpd.controller import Controller

KILLS = 20
VIEWS = (
    "alerts",
    "noted",
    "alert_terms",
    "alert_items",
    "items",
    "item_topics",
    "readings",
    "term_hours",
    "source_health",
    "digests",
)
# Invented topics; each comes in bursts, so that there is something to raise.
TOPICS = (
    "lantern parade cancelled after gale tears the bunting",
    "turbine blade dropped across the causeway",
    "otters seen nesting beneath the custom house",
    "baker accused of weighing loaves with a magnet",
    "sinkhole swallows the bandstand overnight",
)
ROUTINE = (
    "council meets ferry timetable weather mild fish landed tide tables library hours choir".split()
)

SETTINGS = """
[service]
database = "sqlite:///desk.db"
pulse = "1s"
[[source]]
name = "wire"
kind = "feed"
url = "{feed}"
every = "1s"
[[source]]
name = "drop"
kind = "folder"
path = "drop"
every = "1s"
[[desk]]
name = "metro"
sources = ["wire", "drop"]
alerts_per_day = 1000
false_alerts_per_day = 100
digests = ["* * * * *"]
recipients = ["desk@example.org"]
digest_folder = "digests"
warm_up = "1s"
warm_up_words = 40
clear_after = "15s"
[mail]
host = "127.0.0.1"
port = {port}
sender = "vanner@example.org"
encryption = "none"
"""


class Mailbox:
    """Keeps the Message-ID of every mail that a real SMTP server took."""

    def __init__(self):
        self.ids: list[str] = []
        self.port = 0

    async def handle_DATA(self, _server, _session, envelope):  # noqa: N802 - aiosmtpd's name
        self.ids.append(message_from_bytes(envelope.content)["Message-ID"])
        return "250 OK"


class World:
    """A feed that grows and a folder that files are dropped into, at their own pace."""

    def __init__(self, folder: Path, rng: random.Random):
        self.folder = folder
        self.rng = rng
        self.entries: list[str] = []
        self.served: set[str] = set()
        self.dropped: set[str] = set()
        self.lock = threading.Lock()
        self.over = threading.Event()
        self.began_s = time.monotonic()

    def text(self) -> str:
        words = self.rng.choices(ROUTINE, k=8)
        if self.rng.random() < 0.6:
            words += TOPICS[int((time.monotonic() - self.began_s) / 14) % len(TOPICS)].split()
        return " ".join(words)

    def live(self) -> None:
        number = 0
        while not self.over.wait(0.15):
            number += 1
            with self.lock:
                self.entries.append(
                    f"<item><guid>entry-{number}</guid><title>{self.text()} {number}</title></item>"
                )
            if number % 4 == 0:
                path = self.folder / f"note-{number}.jsonl"
                part = path.with_suffix(".part")
                part.write_text(
                    f'{{"id": "file-{number}", "date_published": "2026-01-05T00:00:00Z", '
                    f'"title": "{self.text()}", "content_text": "note {number}"}}\n'
                )
                part.rename(path)
                self.dropped.add(f"file-{number}")

    def feed(self) -> bytes:
        with self.lock:
            body = "".join(self.entries)
            self.served.update(f"entry-{n + 1}" for n in range(len(self.entries)))
        return f"<rss version='2.0'><channel><title>wire</title>{body}</channel></rss>".encode()


def start(folder: Path, log) -> subprocess.Popen:
    return subprocess.Popen(
        [sys.executable, "-m", "vanner", "run"], cwd=folder, stdout=log, stderr=log
    )


def wait_for_start(log: Path, kill: int, process: subprocess.Popen) -> None:
    """Wait until the run that was begun last says that it serves."""
    before = log.read_bytes().count(b"service_started")
    for _ in range(600):
        if log.read_bytes().count(b"service_started") > before:
            return
        assert process.poll() is None, f"run {kill} ended by itself: {log.read_text()[-2000:]}"
        time.sleep(0.05)
    raise AssertionError(f"run {kill} did not start in time")


def dump(database: Path, view: str) -> list[tuple]:
    with sqlite3.connect(f"file:{database}?mode=ro", uri=True) as connection:
        rows = connection.execute(f"SELECT * FROM {view}").fetchall()  # noqa: S608 - our own names
    connection.close()
    return sorted(rows, key=repr)


def read_until(database: Path, expected: set[str], process: subprocess.Popen) -> None:
    """Wait until every item is accepted and read."""
    for _ in range(600):
        assert process.poll() is None
        connection = sqlite3.connect(f"file:{database}?mode=ro", uri=True)
        rows = connection.execute("SELECT guid, status FROM items").fetchall()
        connection.close()
        if expected <= {guid for guid, _ in rows} and all(s != "waiting" for _, s in rows):
            return
        time.sleep(0.1)
    missing = expected - {guid for guid, _ in rows}
    raise AssertionError(f"not accepted or read in time: {sorted(missing)[:5]}")


@pytest.fixture
def mailbox():
    box = Mailbox()
    with socket.socket() as probe:  # the controller cannot choose a port by itself
        probe.bind(("127.0.0.1", 0))
        box.port = probe.getsockname()[1]
    controller = Controller(box, hostname="127.0.0.1", port=box.port)
    controller.start()
    yield box
    controller.stop()


@pytest.mark.slow
def test_twenty_kills_lose_and_double_nothing(tmp_path, http_server, mailbox):
    rng = random.Random(20)
    (tmp_path / "drop").mkdir()
    world = World(tmp_path / "drop", random.Random(1))
    # The body is made when it is asked for: a callable gives chunks.
    feed = http_server.set("/wire.xml", lambda: [world.feed()])
    (tmp_path / "vanner.toml").write_text(SETTINGS.format(feed=feed, port=mailbox.port))
    living = threading.Thread(target=world.live)
    living.start()
    database = tmp_path / "desk.db"
    try:
        with (tmp_path / "log").open("wb") as log:
            for kill in range(KILLS):
                process = start(tmp_path, log)
                if kill % 4:  # every fourth falls into the start itself
                    wait_for_start(tmp_path / "log", kill, process)
                time.sleep(rng.uniform(0.0, 2.5))
                process.send_signal(signal.SIGKILL)
                assert process.wait() == -signal.SIGKILL, (tmp_path / "log").read_text()
            process = start(tmp_path, log)
            time.sleep(5.0)
            world.over.set()
            living.join()
            world.feed()
            everything = {f"entry-{n + 1}" for n in range(len(world.entries))} | world.dropped
            read_until(database, everything, process)
            process.send_signal(signal.SIGTERM)
            assert process.wait(timeout=10) == 0
    finally:
        world.over.set()
        living.join()
        process.kill()
        process.wait()
    assert_everything_is_there_once(database, world)
    assert_rebuilt_alike(tmp_path, database)
    assert_nothing_went_out_twice(database, mailbox)


def assert_everything_is_there_once(database: Path, world: World) -> None:
    guids = Counter(row[2] for row in dump(database, "items"))
    assert set(guids) == world.served | world.dropped
    assert set(guids.values()) == {1}
    done = {path.stem for path in (world.folder / "done").iterdir()}
    waiting = {path.stem for path in world.folder.glob("*.jsonl")}
    assert len(done | waiting) == len(world.dropped)
    assert not list((world.folder / "failed").iterdir())


def assert_rebuilt_alike(folder: Path, database: Path) -> None:
    again = folder / "again.db"
    subprocess.run(
        [sys.executable, "-m", "vanner", "rebuild", "--into", str(again)],
        cwd=folder,
        check=True,
        capture_output=True,
    )
    for view in VIEWS:
        rows = dump(database, view)
        assert dump(again, view) == rows, view
        assert rows or view == "noted", f"{view} is empty, so the comparison says nothing"


def assert_nothing_went_out_twice(database: Path, mailbox: Mailbox) -> None:
    assert len(mailbox.ids) == len(set(mailbox.ids))
    slots = Counter(row[2] for row in dump(database, "digests"))
    assert set(slots.values()) == {1}
    connection = sqlite3.connect(f"file:{database}?mode=ro", uri=True)
    states = Counter(row[0] for row in connection.execute("SELECT state FROM message"))
    connection.close()
    # Every mail was sent, or cut off in the very moment of sending and not repeated.
    assert set(states) <= {"sent", "unconfirmed"}
    assert states["sent"] <= len(mailbox.ids) <= states["sent"] + states["unconfirmed"]
    assert mailbox.ids
