"""The engine: takes a database from pulse to pulse.

Daemon, replay and rebuild all run it. What it writes is a function of the items and of the
order in which they were received; when it is called and how often does not matter.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from contextlib import closing
from dataclasses import dataclass
from typing import TYPE_CHECKING

import structlog

from vanner.alerts.mail import compose_alert
from vanner.clock import pulse_end_s, pulse_of
from vanner.daemon.desks import Desk, leave_desk, load_desk, step, term_items
from vanner.daemon.digesting import DigestBook, make_digest
from vanner.daemon.events import DigestEvent, PulseEvent, Timeline
from vanner.daemon.plan import DeskPlan
from vanner.store.checkpoints import begin_desk, desk_starts, keep_checkpoint
from vanner.store.outbox import queue
from vanner.store.pulses import (
    ClockState,
    clock_state,
    close_until,
    keep_readings,
    keep_stories,
    mark_read,
    start_clock,
)
from vanner.store.stories import story_line

if TYPE_CHECKING:
    from vanner.model.desk import PulseResult
    from vanner.records import StoryLine
    from vanner.store.database import Connection, Database

log = structlog.get_logger()

# A restart derives at most so many pulses again, and none after one with very many items.
PULSES_PER_CHECKPOINT = 60
ITEMS_FOR_CHECKPOINT = 2000


@dataclass(frozen=True, slots=True)
class Step:
    """What a desk concluded, to be written; `revised` are items that it may have read before."""

    desk: Desk
    result: PulseResult
    revised: frozenset[int]


@dataclass(frozen=True, slots=True)
class Progress:
    """What a caller may show after a pulse."""

    end_s: float
    items: int
    raised: tuple[StoryLine, ...]


class Engine:
    """Runs desks over a database. Use from one thread at a time."""

    def __init__(
        self,
        database: Database,
        plans: Sequence[DeskPlan],
        pulse_s: float,
        *,
        purpose: str = "service",
        withhold_mail: bool = False,
        pulses_per_commit: int = 1,
        pulses_per_checkpoint: int = PULSES_PER_CHECKPOINT,
    ) -> None:
        self.database = database
        self.plans = tuple(plans)
        self.pulse_s = pulse_s
        self.purpose = purpose
        self.withhold_mail = withhold_mail
        self.pulses_per_commit = pulses_per_commit
        self.pulses_per_checkpoint = pulses_per_checkpoint
        self.desks: tuple[Desk, ...] = ()
        self.read_s = 0.0
        self._timeline = Timeline(database, (), DigestBook(()), pulse_s)
        self._pulses_since = 0
        self._stale = True

    def begin(self, start_s: float) -> None:
        """Load the desks, deriving again what their checkpoints do not hold yet.

        Args:
            start_s: Where the clock of a new database begins; floored to a pulse.

        Raises:
            DatabaseError: The database refused, or holds a state that cannot be read.
        """
        begin_s = pulse_of(start_s, self.pulse_s) * self.pulse_s
        with self.database.write() as connection:
            state = clock_state(connection) or ClockState(
                self.pulse_s, begin_s, begin_s, self.purpose
            )
            start_clock(
                connection, ClockState(self.pulse_s, state.closed_s, state.read_s, self.purpose)
            )
            for plan in self.plans:
                begin_desk(connection, plan.desk, state.read_s)
            starts = desk_starts(connection)
        self.read_s = state.read_s
        self.desks = tuple(
            load_desk(self.database, plan, self.read_s, starts[plan.desk]) for plan in self.plans
        )
        for name in starts.keys() - {plan.desk for plan in self.plans}:
            leave_desk(self.database, name, self.read_s, starts[name])
        digests = DigestBook(self.plans, self.read_s)
        self._timeline = Timeline(self.database, self.desks, digests, self.pulse_s)
        self._pulses_since = 0
        self._stale = False

    def advance(
        self,
        until_s: float,
        on_pulse: Callable[[Progress], None] | None = None,
        stopping: Callable[[], bool] = lambda: False,
    ) -> None:
        """Close every pulse that ends by `until_s` and commit what it concludes.

        Args:
            until_s: Unix seconds; floored to the end of a whole pulse.
            on_pulse: Called after each pulse that held items.
            stopping: Asked between commits whether to leave the rest for the next call.

        Raises:
            DatabaseError: The database refused. What was committed stands; the next call
                begins from there.
        """
        if self._stale:
            self.begin(until_s)
        end_s = pulse_of(until_s, self.pulse_s) * self.pulse_s
        if end_s <= self.read_s:
            return
        try:
            with self.database.write() as connection:
                close_until(connection, end_s)
            self.read_s = self._run(end_s, on_pulse, stopping)
        except BaseException:
            # The models may be ahead of what was committed: load them anew before going on.
            self._stale = True
            raise

    def _run(
        self,
        end_s: float,
        on_pulse: Callable[[Progress], None] | None,
        stopping: Callable[[], bool],
    ) -> float:
        """Handle events in transactions; the end of the last pulse that is read."""
        more, read_s = True, self.read_s
        with closing(self._timeline.events(self.read_s, end_s)) as events:
            while more and not stopping():
                told: list[Progress] = []
                number = 0
                # The first event of a transaction is computed before the lock is taken, so that
                # a service, which commits each by itself, holds it for writing only.
                event = next(events, None)
                computed = self._compute(event)
                with self.database.write() as connection:
                    while event is not None:
                        told += self._write(connection, event, computed)
                        # A desk that returns may first clear stories of an earlier time.
                        read_s = max(read_s, event.end_s)
                        number += 1
                        if number == self.pulses_per_commit:
                            break
                        event = next(events, None)
                        computed = self._compute(event)
                    more = event is not None
                    read_s = read_s if more else end_s
                    mark_read(connection, read_s)
                self._tell(told, on_pulse)
        return read_s

    def _compute(self, event: PulseEvent | DigestEvent | None) -> list[Step]:
        """What every desk makes of a pulse. The models move on; nothing is written yet."""
        if not isinstance(event, PulseEvent):
            return []
        counted = list(zip(event.items, term_items(event.items), strict=True))
        steps = []
        for desk in self.desks:
            if event.end_s <= desk.started_s:
                continue
            mine = [terms for item, terms in counted if desk.plan.reads(item.source)]
            due_s = desk.model.next_clearing_s()
            if mine or (due_s is not None and due_s <= event.end_s):
                revised = frozenset(one.item_id for one in mine if one.revision > 1)
                steps += [
                    Step(desk, result, revised) for result in step(desk.model, event.end_s, mine)
                ]
        return steps

    def _write(
        self, connection: Connection, event: PulseEvent | DigestEvent, steps: Sequence[Step]
    ) -> list[Progress]:
        if isinstance(event, DigestEvent):
            make_digest(
                connection, event.plan, event.schedule, event.slot, withheld=self.withhold_mail
            )
            return []
        raised = [line for one in steps for line in self._keep(connection, one, event.end_s)]
        self._pulses_since += 1
        due = self._pulses_since >= self.pulses_per_checkpoint
        if due or len(event.items) >= ITEMS_FOR_CHECKPOINT:
            self._keep_states(connection, event.end_s)
        return [Progress(event.end_s, len(event.items), tuple(raised))]

    def _keep(self, connection: Connection, one: Step, end_s: float) -> list[StoryLine]:
        plan, ids = one.desk.plan, one.desk.story_ids
        keep_readings(connection, plan.desk, one.result.readings, one.revised)
        keep_stories(connection, plan.desk, one.result.stories, end_s, ids)
        raised = [
            story_line(connection, ids[story.number], end_s)
            for story in one.result.stories
            if story.raised_s == end_s
        ]
        if plan.mails_alerts and plan.recipients:
            for line in raised:
                mail = compose_alert(line, plan.zone, plan.recipients, end_s)
                queue(connection, mail, withheld=self.withhold_mail)
        return raised

    @staticmethod
    def _tell(told: Sequence[Progress], on_pulse: Callable[[Progress], None] | None) -> None:
        """Log and show what was committed; never before, for it might be rolled back."""
        for progress in told:
            for line in progress.raised:
                bits = round(line.bits, 1)
                log.info("alert_raised", desk=line.desk, alert_id=line.story_id, bits=bits)
            if on_pulse is not None:
                on_pulse(progress)

    def _keep_states(self, connection: Connection, at_s: float) -> None:
        for desk in self.desks:
            keep_checkpoint(connection, desk.plan.desk, desk.checkpoint(at_s))
        self._pulses_since = 0

    def save(self) -> None:
        """Save the models' states, so that the next start derives nothing again.

        Raises:
            DatabaseError: The database refused.
        """
        if self._stale or not self._pulses_since:
            return
        with self.database.write() as connection:
            self._keep_states(connection, self.read_s)

    def next_end_s(self, now_s: float) -> float:
        """When the pulse that holds `now_s` closes."""
        return pulse_end_s(pulse_of(now_s, self.pulse_s), self.pulse_s)
