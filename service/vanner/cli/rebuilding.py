"""rebuild: every result derived again."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, counted, progress, say
from vanner.cli.log import set_up_log
from vanner.daemon.engine import Progress
from vanner.daemon.plan import DeskPlan, plans_from
from vanner.daemon.rebuilding import rebuild, recorded_plans
from vanner.errors import DatabaseError, SettingsError
from vanner.settings import load_settings
from vanner.store.database import Database
from vanner.store.overview import item_count


def rebuild_command(
    into: Annotated[
        Path, typer.Option(metavar="FILE", help="The new database; it must not exist.")
    ],
    settings: SettingsOption = DEFAULT_SETTINGS,
    database: Annotated[
        Path | None,
        typer.Option(
            "--database", "-d", metavar="FILE", help="The old database; else the settings'."
        ),
    ] = None,
) -> None:
    """Derive every result again, into a new database.

    It starts from the stored items and follows today's settings. Without a settings file, a
    database that is named with --database follows those that its desks followed last. The old
    database is only read.

    Example: vanner rebuild --into again.db
    """
    set_up_log("text", quiet=True)
    plans, pulse_s, path = _inputs(settings, database)
    old = Database.open(path, create=False, migrate=False)
    try:
        plans = plans or recorded_plans(old)
        if not plans:
            raise SettingsError(f"The database {path} records no desk; name a settings file.")
        items = _into(old, into, plans, pulse_s or plans[0].parameters.pulse_s)
    finally:
        old.close()
    say(f"{counted(items, 'item')} derived again into {into}")


def _inputs(
    settings: Path, database: Path | None
) -> tuple[tuple[DeskPlan, ...], float | None, Path]:
    if database is not None and not settings.exists():
        return (), None, database
    told = load_settings(settings)
    return plans_from(told), told.service.pulse, database or told.database_path


def _into(old: Database, into: Path, plans: tuple[DeskPlan, ...], pulse_s: float) -> int:
    """Rebuild under another name first: what is broken off must not pass for a whole one."""
    if into.exists():
        raise DatabaseError(f"The file {into} exists; name one that does not.")
    part = into.with_name(f"{into.name}.part")
    _remove(part)
    try:
        with progress("Rebuilding", item_count(old)) as bar:

            def show(done: Progress) -> None:
                bar(done.items)

            items = rebuild(old, part, plans, pulse_s, show)
        part.rename(into)
    finally:
        _remove(part)
    return items


def _remove(database: Path) -> None:
    for ending in ("", "-wal", "-shm"):
        database.with_name(database.name + ending).unlink(missing_ok=True)


def add_to(app: typer.Typer) -> None:
    """Add this command."""
    app.command("rebuild")(rebuild_command)
