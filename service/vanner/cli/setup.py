"""init, check: making a settings file and trying it."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, say
from vanner.clock import iso_utc, now_s
from vanner.errors import SourceError, VannerError
from vanner.records import Poll
from vanner.settings import FolderSettings, SourceSettings, load_settings, write_template
from vanner.sources import build_source


def init(
    settings: Annotated[Path, typer.Argument(help="The settings file to make.")] = DEFAULT_SETTINGS,
) -> None:
    """Write a commented settings file to start from.

    Example: vanner init
    """
    write_template(settings)
    say(f"{settings} written. Edit it, then run: vanner check")


def check(settings: SettingsOption = DEFAULT_SETTINGS) -> None:
    """Report every fault of the settings at once, then try each source once.

    Leaves with 2 where the settings are wrong and with 1 where a source failed.

    Example: vanner check
    """
    told = load_settings(settings)
    say(f"{settings}: no fault. {len(told.desk)} desks, {len(told.source)} sources.")
    failed = 0
    for source in told.source:
        try:
            seen = look_at(source)
        except VannerError as error:
            failed += 1
            seen = f"FAILED: {error}"
        say(f"  {source.name} ({source.kind}): {seen}")
    if failed:
        raise SourceError(f"{failed} of {len(told.source)} sources failed; see the lines above.")


def look_at(settings: SourceSettings) -> str:
    """Try a source once without taking anything in; what was seen, in a few words.

    Raises:
        SourceError: It failed.
    """
    if isinstance(settings, FolderSettings):
        return _look_at_folder(settings)
    source = build_source(settings)
    try:
        return _seen(source.poll({}, now_s()))
    finally:
        source.close()


def _look_at_folder(settings: FolderSettings) -> str:
    """Only counted: a poll would already move unreadable files away."""
    path = settings.path
    if not path.exists():
        return f"no folder {path} yet; the daemon will make it"
    if not path.is_dir():
        raise SourceError(f"{path} is no folder; name a directory.")
    waiting = sum(entry.is_file() and not entry.name.startswith(".") for entry in path.iterdir())
    return f"{waiting} files waiting in {path}"


def _seen(poll: Poll) -> str:
    if poll.stopped is not None:
        raise SourceError(poll.stopped)
    dates = [item.published_s for item in poll.items if item.published_s is not None]
    newest = f", the newest of {iso_utc(max(dates))}" if dates else ""
    left_out = f"; {len(poll.faults)} left out: {poll.faults[0]}" if poll.faults else ""
    return f"{len(poll.items)} entries{newest}{left_out}"


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("init")(init)
    app.command("check")(check)
