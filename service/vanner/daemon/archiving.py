"""Archives: replaying them into a database of their own, and teaching a desk from them."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from itertools import islice
from pathlib import Path

from vanner.clock import pulse_end_s, pulse_of
from vanner.daemon.engine import Engine, Progress
from vanner.daemon.plan import DeskPlan
from vanner.errors import DatabaseError, InputError, RejectedItemError
from vanner.intake import take_in
from vanner.intake.fields import date_of
from vanner.records import Item, RawItem
from vanner.sources.archive import ArchiveFault, read_archive
from vanner.store.accept import Accepted, accept, receive_time_s
from vanner.store.copying import received_range_s
from vanner.store.database import Database
from vanner.store.pulses import clock_state
from vanner.store.source_states import register

REPLAY, DEMO = "replay", "demo"  # databases that may be made anew without asking
_BATCH = 1000
BATCHES_A_PULSE = 2  # of taught items
TAUGHT_A_PULSE = _BATCH * BATCHES_A_PULSE
_PULSES_PER_COMMIT = 200
_PULSES_PER_CHECKPOINT = 1_000_000  # a replay that is broken off is begun anew


def open_fresh(path: Path) -> Database:
    """A new database for a replay or the demo; one that either made earlier is replaced.

    Raises:
        DatabaseError: The file is a service's database or something else: it is left alone.
    """
    if path.exists() and path.stat().st_size > 0:
        database = Database.open(path, create=False, migrate=False)
        with database.read() as connection:
            state = clock_state(connection)
        database.close()
        if state is not None and state.purpose not in (REPLAY, DEMO):
            raise DatabaseError(
                f"The database {path} serves a daemon and is not replaced; name another file."
            )
        for name in (path.name, f"{path.name}-wal", f"{path.name}-shm"):
            path.with_name(name).unlink(missing_ok=True)
    return Database.open(path)


def archive_items(paths: Sequence[Path], on_fault: Callable[[str], None]) -> Iterator[RawItem]:
    """The items of archives in their order; faults are reported and left out.

    Raises:
        InputError: An archive cannot be opened.
    """
    for path in paths:
        for entry in read_archive(path):
            if isinstance(entry, ArchiveFault):
                on_fault(entry.sentence)
            else:
                yield entry


def accept_archive(
    database: Database,
    raw_items: Iterable[RawItem],
    default_source: str,
    now_s: float,
    on_fault: Callable[[str], None],
    on_items: Callable[[int], None],
) -> Accepted:
    """Accept an archive's items as received at their published times.

    Args:
        database: A new database.
        raw_items: In any order.
        default_source: For items that name none.
        now_s: Dates beyond it are no dates of an archive.
        on_fault: Told each item that is left out, in a sentence.
        on_items: Told how many more items were accepted.
    """
    total = Accepted()
    taken = _taken_in(raw_items, default_source, now_s, on_fault)
    while batch := list(islice(taken, _BATCH)):
        with database.write() as connection:
            register(connection, sorted({(item.source, "archive") for item in batch}))
            total += accept(connection, batch, None, teaches=False)
        on_items(len(batch))
    return total


def _taken_in(
    raw_items: Iterable[RawItem],
    default_source: str,
    now_s: float,
    on_fault: Callable[[str], None],
) -> Iterator[Item]:
    for raw in raw_items:
        if raw.published_s is None or not date_of(raw.published_s, now_s)[1]:
            on_fault(f'item "{raw.guid}": no usable date ({raw.date_raw}); it is left out.')
            continue
        try:
            item = take_in(raw, default_source, raw.published_s)
        except RejectedItemError as error:
            on_fault(str(error))
            continue
        yield item


def replay(
    database: Database,
    plans: Sequence[DeskPlan],
    on_pulse: Callable[[Progress], None],
    *,
    purpose: str = REPLAY,
) -> float:
    """Run an engine over everything that a database has received; the end of its last pulse.

    Raises:
        InputError: There is nothing to replay.
        DatabaseError: The database refused.
    """
    with database.read() as connection:
        span = received_range_s(connection)
    if span is None:
        raise InputError("The archive holds no usable item; nothing was replayed.")
    pulse_s = plans[0].parameters.pulse_s
    engine = Engine(
        database,
        plans,
        pulse_s,
        purpose=purpose,
        pulses_per_commit=_PULSES_PER_COMMIT,
        pulses_per_checkpoint=_PULSES_PER_CHECKPOINT,
    )
    engine.begin(span[0])
    end_s = pulse_end_s(pulse_of(span[1], pulse_s), pulse_s)
    engine.advance(end_s, on_pulse)
    engine.save()
    return end_s


def teach(
    database: Database,
    raw_items: Iterable[RawItem],
    source: str,
    pulse_s: float,
    now_s: Callable[[], float],
    on_fault: Callable[[str], None],
    on_items: Callable[[int], None],
) -> Accepted:
    """Accept an archive's items into a service's database so that they only teach.

    A daemon, running or started later, reads so many a pulse: each batch counts as received a
    pulse after the one before, so that no pulse is too long for its memory or for others that
    want to write.
    """
    total = Accepted()
    ahead_s = 0.0

    def kept() -> Iterator[Item]:
        for raw in raw_items:
            try:
                yield take_in(raw, source, now_s())
            except RejectedItemError as error:
                on_fault(str(error))

    taken = kept()
    while batch := list(islice(taken, _BATCH)):
        with database.write() as connection:
            received_s = receive_time_s(connection, now_s()) + ahead_s
            total += accept(connection, batch, received_s, teaches=True)
        ahead_s += pulse_s / BATCHES_A_PULSE
        on_items(len(batch))
    return total
