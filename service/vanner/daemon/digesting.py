"""Which digest is due next, and making it."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime
from typing import TYPE_CHECKING

from vanner.clock import DAY_S
from vanner.daemon.plan import DeskPlan
from vanner.digests import ComposedDigest, compose_digest, digest_message
from vanner.digests.schedule import Slot, slots
from vanner.records import DigestContent
from vanner.store.checkpoints import desk_starts
from vanner.store.digest_content import (
    DigestRow,
    cleared_between,
    has_slot,
    keep_digest,
    latest_digest,
    latest_slot_s,
    noted_between,
    raised_between,
    volumes_between,
)
from vanner.store.outbox import queue
from vanner.store.source_states import source_names

if TYPE_CHECKING:
    from vanner.store.database import Connection

Due = tuple[DeskPlan, str, Slot]
_LOOK_AHEAD_S = 2 * DAY_S
_JUST_BEFORE_S = 1e-3


class DigestBook:
    """Finds the slots that come next. Slots up to a time are looked up once and kept."""

    def __init__(self, plans: Sequence[DeskPlan], from_s: float = 0.0) -> None:
        self._plans = [(plan, cron) for plan in plans for cron in plan.schedules]
        # A slot that falls on the very end of the last pulse read may still be missing.
        self._known_until_s = from_s - _JUST_BEFORE_S
        self._waiting: list[Due] = []

    def next(self, limit_s: float) -> Due | None:
        """The earliest slot up to a time that is not done, or None."""
        while not self._waiting and self._known_until_s < limit_s and self._plans:
            # Beyond the limit too, so that a cron text is not walked again at every pulse.
            until_s = self._known_until_s + _LOOK_AHEAD_S
            self._waiting = [
                (plan, cron, slot)
                for plan, cron in self._plans
                for slot in slots(cron, plan.zone, self._known_until_s, until_s)
            ]
            # Stable: at equal times in the order of the settings.
            self._waiting.sort(key=lambda due: due[2].scheduled_s)
            self._known_until_s = until_s
        if self._waiting and self._waiting[0][2].scheduled_s <= limit_s:
            return self._waiting[0]
        return None

    def done(self, due: Due) -> None:
        """Strike a slot off."""
        self._waiting.remove(due)


def make_digest(
    connection: Connection, plan: DeskPlan, schedule: str, slot: Slot, *, withheld: bool
) -> None:
    """Write a slot's digest and its mail, unless that slot has one.

    Args:
        connection: A write transaction, with every pulse up to the slot committed or in it.
        plan: The desk's plan.
        schedule: The cron text that the slot belongs to.
        slot: The slot.
        withheld: Keep the mail for the record only.
    """
    started_s = desk_starts(connection).get(plan.desk, slot.scheduled_s)
    if slot.scheduled_s <= started_s or has_slot(connection, plan.desk, schedule, slot.local):
        return
    earlier_s = latest_slot_s(connection, plan.desk, slot.scheduled_s)
    from_s = started_s if earlier_s is None else earlier_s
    content = _content(connection, plan, schedule, slot, from_s)
    composed = compose_digest(content, plan.zone)
    keep_digest(
        connection,
        DigestRow(
            plan.desk,
            schedule,
            slot.local,
            slot.scheduled_s,
            content.covers_from_s,
            content.covers_until_s,
            composed.subject,
            composed.body_text,
            composed.body_html,
        ),
        filed=withheld,
    )
    if plan.recipients:
        message = digest_message(content, composed, plan.recipients, slot.scheduled_s)
        queue(connection, message, withheld=withheld)


def _content(
    connection: Connection, plan: DeskPlan, schedule: str, slot: Slot, from_s: float
) -> DigestContent:
    desk, until_s = plan.desk, slot.scheduled_s
    sources = plan.sources if plan.sources is not None else source_names(connection)
    return DigestContent(
        desk=desk,
        schedule=schedule,
        local_slot=slot.local,
        timezone=plan.zone.key,
        scheduled_s=slot.scheduled_s,
        covers_from_s=from_s,
        covers_until_s=until_s,
        raised=tuple(raised_between(connection, desk, from_s, until_s)),
        noted=tuple(noted_between(connection, desk, from_s, until_s)),
        cleared=tuple(cleared_between(connection, desk, from_s, until_s)),
        volumes=tuple(volumes_between(connection, sources, from_s, until_s)),
    )


def preview_digest(connection: Connection, plan: DeskPlan, now_s: float) -> ComposedDigest:
    """What a desk's digest would say now, since its latest one of any schedule."""
    made = latest_digest(connection, plan.desk)
    started_s = desk_starts(connection).get(plan.desk, now_s)
    from_s = started_s if made is None else made.scheduled_s
    local = datetime.fromtimestamp(now_s, plan.zone).strftime("%Y-%m-%dT%H:%M")
    content = _content(connection, plan, "", Slot(local, now_s), from_s)
    return compose_digest(content, plan.zone)
