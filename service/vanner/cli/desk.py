"""status, digest: looking at a service from outside."""

from __future__ import annotations

from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, say
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
from vanner.store.overview import counts, desk_activity
from vanner.store.pulses import clock_state
from vanner.store.source_states import SourceState, source_states


def status(settings: SettingsOption = DEFAULT_SETTINGS, database: DatabaseOption = None) -> None:
    """Show how the service, its desks, sources and mail stand.

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
    served = "a daemon serves it" if is_served(database.path) else "no daemon serves it"
    say(f"{database.path}: {served}; {total.items:,} items")
    if clock is None:
        say("Nothing has been read yet.")
        return
    say(f"Read until {iso_utc(clock.read_s)}, pulse {clock.pulse_s:g} s")
    active = {one.desk: one for one in desk_activity(database, clock.read_s - DAY_S)}
    for desk, started_s in sorted(starts.items()):
        one = active.get(desk)
        raised, running, noted = (one.raised, one.running, one.noted) if one else (0, 0, 0)
        say(
            f"  desk {desk}: since {iso_utc(started_s)}; last 24 h: {raised} alerts raised, "
            f"{noted} stories noted; {running} alerts running"
        )
    for source in sources:
        say(_source_line(source))
    if mail:
        say("  mail: " + ", ".join(f"{number} {state}" for state, number in sorted(mail.items())))


def _source_line(source: SourceState) -> str:
    parts = [f"  source {source.source} ({source.kind}): {source.items:,} items"]
    if source.last_item_s is not None:
        parts.append(f"the last {iso_utc(source.last_item_s)}")
    if source.stopped:
        parts.append(f"STOPPED: {source.stopped}")
    elif source.failures:
        parts.append(f"{source.failures} failures in a row: {source.last_error}")
    elif source.last_error:
        parts.append(f"left out: {source.last_error}")
    return "; ".join(parts)


def digest(
    desk: Annotated[
        str | None, typer.Argument(help="The desk; may be left out if only one.")
    ] = None,
    last: Annotated[
        bool, typer.Option("--last", help="Print the latest one that was made.")
    ] = False,
    settings: SettingsOption = DEFAULT_SETTINGS,
) -> None:
    """Print what a desk's digest would say now; nothing is sent or stored.

    Example: vanner digest metro
    """
    told = load_settings(settings)
    plans = {plan.desk: plan for plan in plans_from(told)}
    name = desk if desk is not None else next(iter(plans)) if len(plans) == 1 else None
    if name is None or name not in plans:
        raise SettingsError(f"Name one of the desks of {settings}: {', '.join(plans)}.")
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


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("status")(status)
    app.command("digest")(digest)
