"""Deriving every result again from the items that a database has received."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

from vanner.daemon.engine import Engine, Progress
from vanner.daemon.plan import DeskPlan, unpack_plan
from vanner.errors import DatabaseError
from vanner.store.checkpoints import checkpoint_of, desk_starts
from vanner.store.copying import copy_received, received_range_s
from vanner.store.database import Database
from vanner.store.outbox import handled, take_over
from vanner.store.pulses import ClockState, clock_state, start_clock

_PULSES_PER_COMMIT = 200
_PULSES_PER_CHECKPOINT = 1_000_000  # a rebuild that is broken off is begun anew


def recorded_plans(database: Database) -> tuple[DeskPlan, ...]:
    """The plans that a database's desks followed last, by name; digests are not recorded."""
    with database.read() as connection:
        saved = [checkpoint_of(connection, desk) for desk in sorted(desk_starts(connection))]
    return tuple(unpack_plan(one.parameters) for one in saved if one is not None)


def rebuild(
    old: Database,
    into: Path,
    plans: Sequence[DeskPlan],
    pulse_s: float,
    on_pulse: Callable[[Progress], None],
) -> int:
    """Fill a new database with the old one's items and derive every result from them.

    Mail that the old database sent or queued keeps its state; mail that it never had is kept
    for the record and not sent.

    Args:
        old: The database to derive from; it is only read and may be in use.
        into: The new file; it must not exist.
        plans: The desks, as they should have been all along.
        pulse_s: Length of a pulse.
        on_pulse: Called after each pulse that held items.

    Returns:
        The number of items.

    Raises:
        DatabaseError: The new file exists, or a database refused.
    """
    if into.exists():
        raise DatabaseError(f"The file {into} exists; name one that does not.")
    new = Database.open(into)
    try:
        with old.read() as source:
            state = clock_state(source)
            starts = desk_starts(source)
            span = received_range_s(source)
            mail = handled(source)
            with new.write() as target:
                items = copy_received(source, target)
        if state is None:
            return items
        first_s = min([*starts.values(), *(span[:1] if span else ())], default=state.read_s)
        _derive(new, plans, replace(state, pulse_s=pulse_s), first_s, on_pulse)
        with new.write() as target:
            take_over(target, mail)
    finally:
        new.close()
    return items


def _derive(
    new: Database,
    plans: Sequence[DeskPlan],
    clock: ClockState,
    first_s: float,
    on_pulse: Callable[[Progress], None],
) -> None:
    """Read everything in a database from `first_s` to where the old one's clock stood."""
    begin_s = first_s // clock.pulse_s * clock.pulse_s
    with new.write() as target:
        start_clock(target, replace(clock, closed_s=begin_s, read_s=begin_s))
    engine = Engine(
        new,
        plans,
        clock.pulse_s,
        purpose=clock.purpose,
        withhold_mail=True,
        pulses_per_commit=_PULSES_PER_COMMIT,
        pulses_per_checkpoint=_PULSES_PER_CHECKPOINT,
    )
    engine.begin(begin_s)
    engine.advance(clock.read_s, on_pulse)
    engine.save()
