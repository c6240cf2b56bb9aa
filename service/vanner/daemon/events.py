"""What happens in a desk's time: pulses that hold items, clearings, digests, in their order."""

from __future__ import annotations

from collections.abc import Generator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

from vanner.clock import pulse_of
from vanner.store.pulses import pulses_between

if TYPE_CHECKING:
    from vanner.daemon.desks import Desk
    from vanner.daemon.digesting import DigestBook
    from vanner.daemon.plan import DeskPlan
    from vanner.digests.schedule import Slot
    from vanner.records import StoredItem
    from vanner.store.database import Database


@dataclass(frozen=True, slots=True)
class PulseEvent:
    """A pulse with items, or (with none) one in which a story of some desk clears."""

    end_s: float
    items: tuple[StoredItem, ...]


@dataclass(frozen=True, slots=True)
class DigestEvent:
    """A digest that is due; `end_s` is the end of the last pulse before it."""

    plan: DeskPlan
    schedule: str
    slot: Slot
    end_s: float


Events: TypeAlias = "Generator[PulseEvent | DigestEvent, None, None]"


@dataclass(slots=True)
class Timeline:
    """Finds events. Each must be handled before the next is asked for: it may cause that one."""

    database: Database
    desks: Sequence[Desk]
    digests: DigestBook
    pulse_s: float

    def events(self, from_s: float, until_s: float) -> Events:
        """Events of [from_s, until_s]; at equal times pulses, then clearings, then digests."""
        for end_s, items in pulses_between(self.database, from_s, until_s, self.pulse_s):
            yield from self._quiet(end_s, inclusive=False)
            yield PulseEvent(end_s, tuple(items))
        yield from self._quiet(until_s, inclusive=True)

    def _quiet(self, limit_s: float, *, inclusive: bool) -> Events:
        """Clearings and digests before (or up to) a time."""
        while True:
            due = [desk.model.next_clearing_s() for desk in self.desks]
            clears_s = min((time for time in due if time is not None), default=float("inf"))
            digest = self.digests.next(limit_s)
            slot_s = digest[2].scheduled_s if digest is not None else float("inf")
            first_s = min(clears_s, slot_s)
            if first_s > limit_s or (first_s == limit_s and not inclusive):
                return
            if clears_s <= slot_s or digest is None:
                yield PulseEvent(clears_s, ())
            else:
                self.digests.done(digest)
                yield DigestEvent(*digest, pulse_of(slot_s, self.pulse_s) * self.pulse_s)
