"""The demo: an invented town's last two weeks replayed, then a live minute of it."""

from __future__ import annotations

import random
import threading
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from vanner.clock import DAY_S, MINUTE_S
from vanner.daemon.archiving import DEMO, accept_archive, replay
from vanner.daemon.engine import Engine, Progress
from vanner.daemon.plan import DeskPlan, replay_plan
from vanner.daemon.posting import Postman
from vanner.daemon.service import Service
from vanner.records import StoryLine
from vanner.sources.demo import (
    PlantedStory,
    demo_archive,
    demo_desks,
    demo_drip,
    planted_live,
    planted_stories,
)
from vanner.store.database import Database
from vanner.store.stories import raised_guids, story_line

DAYS = 15.0
LIVE_PULSE_S = 2.0
_DRIP_EVERY_S = 0.5
# An alert is about a planted story when it holds at least so many of its items.
_ENOUGH_ITEMS = 2


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a planted story; `alert` is the first that holds its items, or None."""

    story: PlantedStory
    alert: StoryLine | None


def demo_plans(pulse_s: float) -> tuple[DeskPlan, ...]:
    """The plans of the demo's two desks."""
    return tuple(
        _plan(desk.name, desk.sources, desk.alerts_per_day, pulse_s) for desk in demo_desks()
    )


def _plan(name: str, sources: Sequence[str], alerts_per_day: float, pulse_s: float) -> DeskPlan:
    plan = replay_plan(alerts_per_day, "UTC", pulse_s)
    return replace(plan, parameters=replace(plan.parameters, desk=name), sources=tuple(sources))


def archive_start_s(now_s: float) -> float:
    """Where the demo's two weeks begin, so that they end now."""
    return now_s // MINUTE_S * MINUTE_S - DAYS * DAY_S


def take_in_archive(
    database: Database, start_s: float, random_state: int, on_items: Callable[[int], None]
) -> int:
    """Accept the two weeks' items; how many they are."""
    faults: list[str] = []
    raw_items = demo_archive(start_s, DAYS, random_state)
    end_s = start_s + DAYS * DAY_S
    return accept_archive(database, raw_items, "demo", end_s, faults.append, on_items).new


def replay_archive(database: Database, on_pulse: Callable[[Progress], None]) -> None:
    """Replay the two weeks."""
    replay(database, demo_plans(MINUTE_S), on_pulse, purpose=DEMO)


def run_live(
    database: Database,
    seconds: float,
    random_state: int,
    clock: Callable[[], float],
    stop: threading.Event,
    on_pulse: Callable[[Progress], None],
) -> float:
    """Run the daemon on the dripping source for some seconds; when that began."""
    plans = demo_plans(LIVE_PULSE_S)
    start_s = clock()
    service = Service(
        database,
        Engine(database, plans, LIVE_PULSE_S, purpose=DEMO),
        Postman(database, plans, None, None, clock),
        [(source, "demo", _DRIP_EVERY_S) for source in demo_drip(start_s, seconds, random_state)],
        random.Random(random_state),  # noqa: S311 - jitter of polling times, not secrecy
        clock,
        on_pulse,
    )
    service.start()
    stop.wait(seconds)
    service.stop()
    return start_s


def outcomes(
    database: Database,
    archive_s: float,
    live_s: float,
    seconds: float,
    random_state: int,
    clock_s: float,
) -> list[Outcome]:
    """What became of every planted story until now, those of the archive first."""
    planted = [
        *planted_stories(archive_s, DAYS, random_state),
        *planted_live(live_s, seconds, random_state),
    ]
    with database.read() as connection:
        alerts = raised_guids(connection)
        return [
            Outcome(story, None if found is None else story_line(connection, found, clock_s))
            for story, found in ((story, _alert_about(story, alerts)) for story in planted)
        ]


def _alert_about(story: PlantedStory, alerts: dict[int, tuple[str, frozenset[str]]]) -> int | None:
    guids = frozenset(story.guids)
    for alert_id, (desk, held) in sorted(alerts.items()):
        if desk == story.desk and len(guids & held) >= _ENOUGH_ITEMS:
            return alert_id
    return None
