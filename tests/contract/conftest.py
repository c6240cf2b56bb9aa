"""One rig for each kind of source: what the contract needs to do to the world outside it."""

from __future__ import annotations

import json
import os
from abc import ABC, abstractmethod

import httpx
import pytest

from vanner.errors import InputError, SourceError, VannerError
from vanner.records import Source
from vanner.settings import FeedSettings, FolderSettings
from vanner.sources.archive import ArchiveSource
from vanner.sources.feed import FeedSource
from vanner.sources.folder import FolderSource

NAME = "harbour"
FIRST_S = 1_930_982_400  # 2031-03-11 08:00:00 UTC; item n is n minutes younger


class Rig(ABC):
    """A source's surroundings. Items are numbered from 0, the oldest."""

    # What a failed poll raises.
    error: type[VannerError] = SourceError

    def __init__(self) -> None:
        self.count = 0

    @abstractmethod
    def make(self) -> Source:
        """A new source that looks at these surroundings."""

    @abstractmethod
    def publish(self) -> None:
        """Make the items 0 to `count` - 1 available, where they are not yet."""

    @abstractmethod
    def break_down(self) -> None:
        """Let every poll fail from now on."""

    @abstractmethod
    def mend(self) -> None:
        """Undo `break_down`."""

    def add(self, count: int = 1) -> None:
        self.count += count
        self.publish()


class FeedRig(Rig):
    def __init__(self, server, client) -> None:
        super().__init__()
        self._server, self._client = server, client
        self.publish()

    def make(self) -> Source:
        settings = FeedSettings(name=NAME, kind="feed", url=self._server.url("/feed"))
        return FeedSource(settings, client=self._client)

    def publish(self) -> None:
        # Feeds list the newest first.
        items = [
            {"id": str(n), "title": f"Item {n}", "date_published": f"2031-03-11T08:{n:02}:00Z"}
            for n in reversed(range(self.count))
        ]
        feed = {"version": "https://jsonfeed.org/version/1.1", "title": NAME, "items": items}
        self._server.set("/feed", json.dumps(feed).encode())

    def break_down(self) -> None:
        self._server.set("/feed", b"upkeep", status=503)

    def mend(self) -> None:
        self.publish()


class FolderRig(Rig):
    def __init__(self, path) -> None:
        super().__init__()
        self._path, self._dropped = path / "drop", 0
        self._path.mkdir()

    def make(self) -> Source:
        return FolderSource(FolderSettings(name=NAME, kind="folder", path=self._path))

    def publish(self) -> None:
        for n in range(self._dropped, self.count):
            file = self._path / f"item-{n}.txt"
            file.write_text(f"Item {n}\n\nFog in the port.", encoding="utf-8")
            os.utime(file, (FIRST_S + 60 * n,) * 2)
        self._dropped = self.count

    def break_down(self) -> None:
        self._path.rename(self._path.with_name("elsewhere"))
        self._path.write_text("a file where the folder was")

    def mend(self) -> None:
        self._path.unlink()
        self._path.with_name("elsewhere").rename(self._path)


class ArchiveRig(Rig):
    # An archive is named by hand, so the one who named it is told.
    error = InputError

    def __init__(self, path) -> None:
        super().__init__()
        self._path = path / "archive.jsonl"
        self.publish()

    def make(self) -> Source:
        return ArchiveSource(NAME, self._path)

    def publish(self) -> None:
        lines = [
            {"id": str(n), "title": f"Item {n}", "date_published": f"2031-03-11T08:{n:02}:00Z"}
            for n in range(self.count)
        ]
        text = "".join(json.dumps(line) + "\n" for line in lines)
        self._path.write_text(text, encoding="utf-8")

    def break_down(self) -> None:
        self._path.rename(self._path.with_suffix(".gone"))

    def mend(self) -> None:
        self._path.with_suffix(".gone").rename(self._path)


@pytest.fixture
def feed_rig(http_server):
    with httpx.Client(trust_env=False) as client:
        yield FeedRig(http_server, client)


@pytest.fixture
def folder_rig(tmp_path):
    return FolderRig(tmp_path)


@pytest.fixture
def archive_rig(tmp_path):
    return ArchiveRig(tmp_path)


# A new kind of source adds its rig above and its fixture's name here.
@pytest.fixture(params=["feed_rig", "folder_rig", "archive_rig"])
def rig(request):
    return request.getfixturevalue(request.param)
