"""replay, import: commands over archives."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from pathlib import Path
from typing import Annotated
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import typer

from vanner.cli.console import (
    DEFAULT_SETTINGS,
    SettingsOption,
    counted,
    progress,
    say,
    shell_word,
    warn,
)
from vanner.cli.log import set_up_log
from vanner.clock import iso_utc, now_s, pulse_of
from vanner.daemon.archiving import (
    TAUGHT_A_PULSE,
    accept_archive,
    archive_items,
    open_fresh,
    replay,
    teach,
)
from vanner.daemon.lock import is_served
from vanner.daemon.plan import replay_plan
from vanner.errors import SettingsError
from vanner.records import RawItem
from vanner.settings import load_settings
from vanner.sources.archive import open_archive
from vanner.store.database import Database
from vanner.store.overview import counts, item_count
from vanner.store.pulses import ClockState, clock_state, start_clock

ArchivesArgument = Annotated[
    list[Path], typer.Argument(metavar="ARCHIVE", help="JSON Lines, plain or gzip.")
]

SERVICE = "service"  # the purpose of a daemon's database
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
        """Tell how many there were, and that not all were shown."""
        if self.count > _FAULTS_SHOWN:
            warn(f"... and {self.count - _FAULTS_SHOWN:,} more.")
        if self.count:
            warn(f"{counted(self.count, 'entry', 'entries')} left out.")


def _zone(name: str) -> str:
    try:
        return ZoneInfo(name).key
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        raise SettingsError(
            f'"{name}" is no time zone; give one of the IANA database, such as Europe/Vienna.'
        ) from error


def _look_for(archives: Sequence[Path]) -> None:
    """Raise InputError for an archive that cannot be opened before anything is changed."""
    for path in archives:
        # What comes through a pipe can be opened only once.
        if not path.is_fifo() and not path.is_char_device():
            open_archive(path).close()


def _source_of(archive: Path) -> str:
    """A source's name from an archive's: what stands before the first dot."""
    name = archive.name.split(".")[0] or "archive"
    return name.encode("utf-8", "replace").decode()[:64]


def replay_command(
    archives: ArchivesArgument,
    database: Annotated[
        Path, typer.Option("--database", "-d", metavar="FILE", help="The database to make.")
    ],
    alerts_per_day: Annotated[
        float,
        typer.Option(
            "--alerts-per-day", "-n", metavar="NUMBER", help="The desk's budget.", min=0.001
        ),
    ] = 5.0,
    timezone: Annotated[
        str, typer.Option(metavar="ZONE", help="Time zone of hours and weekdays.")
    ] = "UTC",
) -> None:
    """Run archives through the engine into a database of their own.

    The time is that of the archives. One desk named "replay" reads every source; items that
    name none have the first archive's name for one. An earlier replay's database is replaced.

    Example: vanner replay last-month.jsonl.gz --database try.db
    """
    set_up_log("text", quiet=True)
    plan = replay_plan(alerts_per_day, _zone(timezone), 60.0)
    _look_for(archives)
    target = open_fresh(database)
    try:
        faults = Faults()
        with progress("Taking in", None) as bar:
            items = archive_items(archives, faults)
            accept_archive(target, items, _source_of(archives[0]), now_s(), faults, bar)
        faults.close()
        with progress("Reading", item_count(target)) as bar:
            end_s = replay(target, (plan,), lambda done: bar(done.items))
        _summary(target, end_s)
    finally:
        target.close()


def _summary(database: Database, end_s: float) -> None:
    told = counts(database)
    say(
        f"{counted(told.items, 'item')} until {iso_utc(end_s)}: {counted(told.alerts, 'alert')}, "
        f"{counted(told.noted, 'story', 'stories')} noted below the threshold."
    )
    say(f"Everything is in {database.path}")
    say(f"Try: vanner db query --database {shell_word(database.path)} {_FIRST_QUERY}")


def _without_source(raw_items: Iterator[RawItem]) -> Iterator[RawItem]:
    return (replace(raw, source=None) for raw in raw_items)


def _begin(database: Database, pulse_s: float) -> None:
    """Start the clock of a new database, as its first daemon would: else that daemon's clock
    began after what is imported now, and none of it were read.
    """
    with database.write() as connection:
        if clock_state(connection) is None:
            begin_s = pulse_of(now_s(), pulse_s) * pulse_s
            start_clock(connection, ClockState(pulse_s, begin_s, begin_s, SERVICE))


def import_command(
    archives: ArchivesArgument,
    source: Annotated[
        str,
        typer.Option(metavar="NAME", help="The source of the settings that the items belong to."),
    ],
    settings: SettingsOption = DEFAULT_SETTINGS,
) -> None:
    """Teach the desks of a source from its past; nothing is raised.

    Every item counts as that source's, whatever source the archive names. A running daemon
    takes the items in at its next pulse; otherwise the next one to start.

    Example: vanner import harbour-2025.jsonl.gz --source harbour
    """
    told = load_settings(settings)
    if source not in {one.name for one in told.source}:
        names = ", ".join(one.name for one in told.source)
        raise SettingsError(f'There is no source "{source}" in {settings}; there are: {names}.')
    set_up_log("text", quiet=True)
    _look_for(archives)
    database = Database.open(told.database_path)
    try:
        _begin(database, told.service.pulse)
        faults = Faults()
        with progress("Importing", None) as bar:
            items = _without_source(archive_items(archives, faults))
            accepted = teach(database, items, source, told.service.pulse, now_s, faults, bar)
        faults.close()
        when = "from the next pulse on" if is_served(database.path) else "when the daemon starts"
        say(
            f"{counted(accepted.new, 'item')} to learn from, "
            f"{counted(accepted.revised, 'revision')}, {accepted.known:,} known already; "
            f"they are read {when}, {TAUGHT_A_PULSE:,} a pulse."
        )
    finally:
        database.close()


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("replay")(replay_command)
    app.command("import")(import_command)
