"""replay, import, rebuild: commands over archives and over what was received."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, progress, say, set_up_log, warn
from vanner.clock import iso_utc, now_s
from vanner.daemon.archiving import accept_archive, archive_items, open_fresh, replay, teach
from vanner.daemon.engine import Progress
from vanner.daemon.lock import is_served
from vanner.daemon.plan import DeskPlan, plans_from, replay_plan
from vanner.daemon.rebuilding import rebuild, recorded_plans
from vanner.errors import SettingsError
from vanner.settings import load_settings
from vanner.store.database import Database
from vanner.store.overview import counts, item_count

_FAULTS_SHOWN = 20
_FIRST_QUERY = '"SELECT raised_at, headline, items FROM alerts ORDER BY raised_at"'


class Faults:
    """Shows the first faults as they come and counts the rest."""

    def __init__(self) -> None:
        self.count = 0

    def __call__(self, sentence: str) -> None:
        """One more fault."""
        self.count += 1
        if self.count <= _FAULTS_SHOWN:
            warn(sentence)

    def close(self) -> None:
        """Tell how many were not shown."""
        if self.count > _FAULTS_SHOWN:
            warn(f"... and {self.count - _FAULTS_SHOWN:,} more lines left out.")


def _zone(name: str) -> str:
    try:
        return ZoneInfo(name).key
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        raise SettingsError(
            f'"{name}" is no time zone; give one of the IANA database, such as Europe/Vienna.'
        ) from error


def replay_command(
    archives: Annotated[list[Path], typer.Argument(help="Archives: JSON Lines, plain or gzip.")],
    database: Annotated[Path, typer.Option("--database", "-d", help="The database to make.")],
    alerts_per_day: Annotated[
        float, typer.Option("--alerts-per-day", "-n", help="The desk's budget.", min=0.001)
    ] = 5.0,
    timezone: Annotated[str, typer.Option(help="Time zone of hours and weekdays.")] = "UTC",
) -> None:
    """Run an archive through the engine in its own time, into a database of its own.

    One desk named "replay" reads every source. An earlier replay's database is replaced.

    Example: vanner replay last-month.jsonl.gz --database try.db --alerts-per-day 5
    """
    set_up_log("text", quiet=True)
    plan = replay_plan(alerts_per_day, _zone(timezone), 60.0)
    target = open_fresh(database)
    try:
        faults = Faults()
        with progress("Taking in", None) as bar:
            source = archives[0].name.split(".")[0]
            accept_archive(target, archive_items(archives, faults), source, faults, bar)
        faults.close()
        with progress("Reading", item_count(target)) as bar:
            end_s = replay(target, (plan,), lambda done: bar(done.items))
        _summary(target, end_s)
    finally:
        target.close()


def _summary(database: Database, end_s: float) -> None:
    told = counts(database)
    say(
        f"{told.items:,} items until {iso_utc(end_s)}: {told.alerts:,} alerts, "
        f"{told.noted:,} stories noted below the threshold."
    )
    say(f"Everything is in {database.path}")
    say(f"Try: vanner db query --database {database.path} {_FIRST_QUERY}")


def import_command(
    archives: Annotated[list[Path], typer.Argument(help="Archives: JSON Lines, plain or gzip.")],
    source: Annotated[str, typer.Option(help="The source of the settings that they belong to.")],
    settings: SettingsOption = DEFAULT_SETTINGS,
) -> None:
    """Teach the desks that read a source from its past, without raising anything.

    A running daemon takes the items in at its next pulse; otherwise the next one to start.

    Example: vanner import harbour-2025.jsonl.gz --source harbour
    """
    told = load_settings(settings)
    if source not in {one.name for one in told.source}:
        names = ", ".join(one.name for one in told.source)
        raise SettingsError(f'There is no source "{source}" in {settings}; there are: {names}.')
    database = Database.open(told.database_path)
    try:
        faults = Faults()
        with progress("Importing", None) as bar:
            accepted = teach(database, archive_items(archives, faults), source, now_s, faults, bar)
        faults.close()
        when = "at the next pulse" if is_served(database.path) else "when the daemon starts"
        say(
            f"{accepted.new:,} items to learn from, {accepted.revised:,} revisions, "
            f"{accepted.known:,} known already; they are read {when}."
        )
    finally:
        database.close()


def rebuild_command(
    into: Annotated[Path, typer.Option(help="The new database; it must not exist.")],
    settings: SettingsOption = DEFAULT_SETTINGS,
    database: Annotated[
        Path | None,
        typer.Option("--database", "-d", help="The database to derive from; else the settings'."),
    ] = None,
) -> None:
    """Derive every result again from the stored items, into a new database.

    Uses today's settings; without a settings file, a database that is named uses those that
    its desks followed last. The old database is only read.

    Example: vanner rebuild --into again.db
    """
    set_up_log("text", quiet=True)
    plans, pulse_s, path = _rebuild_inputs(settings, database)
    old = Database.open(path, create=False, migrate=False)
    try:
        plans = plans or recorded_plans(old)
        if not plans:
            raise SettingsError(f"The database {path} records no desk; name a settings file.")
        with progress("Rebuilding", item_count(old)) as bar:

            def show(done: Progress) -> None:
                bar(done.items)

            items = rebuild(old, into, plans, pulse_s or plans[0].parameters.pulse_s, show)
    finally:
        old.close()
    say(f"{items:,} items derived again into {into}")


def _rebuild_inputs(
    settings: Path, database: Path | None
) -> tuple[tuple[DeskPlan, ...], float | None, Path]:
    if database is not None and not settings.exists():
        return (), None, database
    told = load_settings(settings)
    return plans_from(told), told.service.pulse, database or told.database_path


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("replay")(replay_command)
    app.command("import")(import_command)
    app.command("rebuild")(rebuild_command)
