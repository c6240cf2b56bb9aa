"""status, digest: looking at a service from outside."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, aligned, counted, printable, say
from vanner.cli.database import DatabaseOption, path_of
from vanner.clock import DAY_S, iso_utc, now_s
from vanner.daemon.digesting import preview_digest
from vanner.daemon.lock import is_served
from vanner.daemon.plan import plans_from
from vanner.errors import SettingsError
from vanner.settings import load_settings
from vanner.store.checkpoints import desk_starts
from vanner.store.database import Database
from vanner.store.digest_content import latest_digest
from vanner.store.outbox import counts_by_state
from vanner.store.overview import DeskActivity, counts, desk_activity
from vanner.store.pulses import clock_state
from vanner.store.source_states import SourceState, source_states


def status(settings: SettingsOption = DEFAULT_SETTINGS, database: DatabaseOption = None) -> None:
    """Show how the daemon, its desks, sources and mail stand.

    Example: vanner status
    """
    opened = Database.open(path_of(database, settings), create=False, migrate=False)
    try:
        _show(opened)
    finally:
        opened.close()


def _show(database: Database) -> None:
    total = counts(database)
    with database.read() as connection:
        clock = clock_state(connection)
        starts = desk_starts(connection)
        sources = source_states(connection)
        mail = counts_by_state(connection)
    read_s = None if clock is None else clock.read_s
    facts = [
        ("Database", str(database.path)),
        ("Daemon", "serves it" if is_served(database.path) else "none serves it"),
        ("Items", f"{total.items:,}"),
        ("Read", "nothing yet" if read_s is None else f"until {iso_utc(read_s)}"),
        ("Mail", ", ".join(f"{n:,} {state}" for state, n in sorted(mail.items())) or "none"),
    ]
    for line in aligned(facts):
        say(line)
    if starts and read_s is not None:
        say()
        active = desk_activity(database, read_s - DAY_S)
        for line in aligned(_desk_rows(starts, active), frozenset({2, 3, 4})):
            say(line)
    if sources:
        say()
        for line in aligned([_SOURCE_HEAD, *map(_source_row, sources)], frozenset({2})):
            say(line)


def _desk_rows(
    starts: Mapping[str, float], activity: Sequence[DeskActivity]
) -> list[tuple[str, ...]]:
    """The counts are those of the 24 hours before the last pulse read."""
    active = {one.desk: one for one in activity}
    rows: list[tuple[str, ...]] = [("DESK", "SINCE", "ALERTS IN 24 H", "NOTED IN 24 H", "RUNNING")]
    for desk, started_s in sorted(starts.items()):
        one = active.get(desk, DeskActivity(desk, 0, 0, 0))
        rows.append(
            (desk, iso_utc(started_s), f"{one.raised:,}", f"{one.noted:,}", f"{one.running:,}")
        )
    return rows


_SOURCE_HEAD = ("SOURCE", "KIND", "ITEMS", "LAST ITEM", "STATE")


def _source_row(source: SourceState) -> tuple[str, ...]:
    last = "" if source.last_item_s is None else iso_utc(source.last_item_s)
    return source.source, source.kind, f"{source.items:,}", last, printable(_state(source))


def _state(source: SourceState) -> str:
    if source.stopped:
        return f"STOPPED: {source.stopped}"
    if source.failures:
        times = counted(source.failures, "failure")
        return f"FAILING, {times} in a row: {source.last_error}"
    if source.last_error:
        return f"ok; left out: {source.last_error}"
    return "ok" if source.last_polled_s is not None or source.items else "not polled yet"


def digest(
    desk: Annotated[
        str | None,
        typer.Argument(metavar="DESK", help="The desk; may be left out if there is one only."),
    ] = None,
    last: Annotated[
        bool, typer.Option("--last", help="Print the latest one that was made.")
    ] = False,
    settings: SettingsOption = DEFAULT_SETTINGS,
) -> None:
    """Print what a desk's digest would say now; nothing is sent.

    It tells what has happened since the latest one that was made.

    Example: vanner digest metro
    """
    told = load_settings(settings)
    plans = {plan.desk: plan for plan in plans_from(told)}
    name = _desk_of(desk, tuple(plans), settings)
    database = Database.open(told.database_path, create=False, migrate=False)
    try:
        with database.read() as connection:
            made = latest_digest(connection, name)
            if last:
                text = f"{made.subject}\n\n{made.body_text}" if made else None
            else:
                composed = preview_digest(connection, plans[name], now_s())
                text = f"{composed.subject}\n\n{composed.body_text}"
    finally:
        database.close()
    say(text if text is not None else f"Desk {name} has had no digest yet.")


def _desk_of(named: str | None, desks: Sequence[str], settings: Path) -> str:
    names = ", ".join(desks)
    if named is None:
        if len(desks) == 1:
            return desks[0]
        raise SettingsError(f"Name one of the desks of {settings}: {names}.")
    if named not in desks:
        raise SettingsError(f'There is no desk "{named}" in {settings}; there are: {names}.')
    return named


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("status")(status)
    app.command("digest")(digest)
