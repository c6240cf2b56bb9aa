"""What a newcomer has: an archive of invented items, and the environment of the command line."""

from __future__ import annotations

import gzip
import json
import os
import random
import subprocess
import sysconfig
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

from vanner.clock import DAY_S, HOUR_S, iso_utc

# 2025-03-03, a Monday, and so long that a desk is ready by README's "three days and 20,000
# words" before the surge.
PAST_START_S = 1_740_960_000.0
PAST_DAYS = 9
ITEMS_A_DAY = 64
SURGE_S = PAST_START_S + 6 * DAY_S + 11 * HOUR_S
# From here on items are less alike, so that chance makes small stories, too.
UNREST_S = SURGE_S + 8 * HOUR_S
# The second source says nothing more from here on.
PRESS_ENDS_S = PAST_START_S + 7 * DAY_S

PLACES = "council market ferry library school station bridge museum hospital quay".split()
DOERS = "clerk skipper teacher baker driver nurse warden keeper surveyor gardener".split()
DEEDS = "opens closes repairs paints inspects counts moves cleans measures praises".split()
THINGS = "timetable railing window ledger bench lantern roof bell engine fence".split()
TIMES = "today tonight tomorrow early late soon weekly again always monday".split()
SMALL = "the of and in with for to on at by".split()
KINDS = (SMALL, PLACES, DOERS, DEEDS, THINGS, TIMES)

SURGE = (
    "Harbour wall collapses at Dunmarrow",
    "Collapsed harbour wall at Dunmarrow shuts slipway",
    "Dunmarrow harbour wall: rubble blocks slipway",
    "Rubble of the collapsed wall fills Dunmarrow harbour",
    "Divers search the rubble of Dunmarrow harbour wall",
    "Dunmarrow slipway stays shut after wall collapses",
    "Engineers weigh rubble of collapsed Dunmarrow harbour wall",
    "Harbour wall rubble at Dunmarrow slipway to be cleared",
)
# A thing of smaller weight: below the threshold of a desk that takes three alerts a day.


def _sentences(rng: random.Random, number: int) -> list[str]:
    """At most ten. No word comes twice, so that no item has a word that is its own, and hardly
    any two items have the same words.
    """
    drawn = [rng.sample(words, number) for words in KINDS]
    return [" ".join(words).capitalize() + "." for words in zip(*drawn, strict=True)]


def _entry(guid: str, time_s: float, title: str, text: str, source: str) -> dict[str, str]:
    return {
        "id": guid,
        "date_published": iso_utc(time_s),
        "title": title,
        "content_text": text,
        "url": f"https://news.ossenhithe.example/{guid}",
        "language": "en",
        "source": source,
    }


def _entries() -> Iterator[dict[str, str]]:
    rng = random.Random(7)
    for number in range(PAST_DAYS * ITEMS_A_DAY):
        time_s = PAST_START_S + (number + rng.random()) * DAY_S / ITEMS_A_DAY
        silent = time_s >= PRESS_ENDS_S
        source = "harbour" if silent or number % 3 else "press"
        title, *text = _sentences(rng, 9)
        if time_s > UNREST_S:
            # Words of the text, so that some come twice and are in the item's foreground.
            title = _sentences(rng, 1)[0]
        yield _entry(f"day-{number}", time_s, title, " ".join(text), source)
    for number, title in enumerate(SURGE):
        text = " ".join((f"{title}.", *_sentences(rng, 2)))
        yield _entry(f"wall-{number}", SURGE_S + number * 900.0, title, text, "harbour")


@dataclass(frozen=True)
class Past:
    """An archive and what is in it."""

    path: Path
    entries: tuple[dict[str, str], ...]


@pytest.fixture(scope="session")
def past(tmp_path_factory) -> Past:
    """Nine invented days of two sources; in the seventh, eight items tell of one event."""
    path = tmp_path_factory.mktemp("past") / "past.jsonl.gz"
    entries = tuple(_entries())
    with gzip.open(path, "wt", encoding="utf-8") as file:
        file.writelines(json.dumps(entry) + "\n" for entry in entries)
    return Past(path, entries)


@pytest.fixture(scope="session")
def environment() -> dict[str, str]:
    """The environment of a shell in which Vanner's virtual environment is activated."""
    scripts = sysconfig.get_path("scripts")
    kept = {name: value for name, value in os.environ.items() if not name.startswith("VANNER_")}
    return kept | {"PATH": os.pathsep.join((scripts, os.environ["PATH"])), "NO_COLOR": "1"}


@pytest.fixture(scope="session")
def shell(environment) -> Callable[[str, Path], subprocess.CompletedProcess[str]]:
    """Runs one line in a POSIX shell, in a folder."""

    def run(line: str, folder: Path) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            ["sh", "-c", line],
            cwd=folder,
            env=environment,
            check=False,
            capture_output=True,
            text=True,
        )

    return run
