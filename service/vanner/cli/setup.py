"""init, check: making a settings file and trying it."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, counted, say, shell_word
from vanner.cli.log import set_up_log
from vanner.clock import iso_utc, now_s
from vanner.errors import SourceError, VannerError
from vanner.records import Poll
from vanner.settings import (
    FolderSettings,
    MailSettings,
    SourceSettings,
    load_settings,
    write_template,
)
from vanner.sources import build_source


def init(
    settings: Annotated[
        Path, typer.Argument(metavar="FILE", help="The settings file to make.")
    ] = DEFAULT_SETTINGS,
) -> None:
    """Write a commented settings file to start from.

    Example: vanner init
    """
    write_template(settings)
    named = "" if settings == DEFAULT_SETTINGS else f" --settings {shell_word(settings)}"
    say(f"{settings} written. Edit it, then run: vanner check{named}")


def check(settings: SettingsOption = DEFAULT_SETTINGS) -> None:
    """Check the settings file and try each source once.

    Every fault of the file is told at once. Nothing is taken in, and no mail is sent. Leaves
    with 2 where the settings are wrong and with 1 where a source failed.

    Example: vanner check
    """
    set_up_log("text", quiet=True)
    told = load_settings(settings)
    desks, sources = counted(len(told.desk), "desk"), counted(len(told.source), "source")
    say(f"{settings}: no fault; {desks}, {sources}.")
    failed = 0
    for source in told.source:
        try:
            seen = look_at(source)
        except VannerError as error:
            failed += 1
            seen = f"FAILED: {error}"
        say(f"  {source.name} ({source.kind}): {seen}")
    if told.mail is not None:
        say(f"  mail: {_mail(told.mail)}")
    if failed:
        raise SourceError(
            f"{failed} of {counted(len(told.source), 'source')} failed; see the lines above."
        )


def _mail(mail: MailSettings) -> str:
    """What is known without sending any.

    Raises:
        SettingsError: The password cannot be read.
    """
    if mail.password is not None:
        mail.password.read()
    return f"by {mail.host}:{mail.port} as {mail.sender}; the server is not tried"


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
    return f"{counted(waiting, 'file')} waiting in {path}"


def _seen(poll: Poll) -> str:
    if poll.stopped is not None:
        raise SourceError(poll.stopped)
    dates = [item.published_s for item in poll.items if item.published_s is not None]
    newest = f", the newest of {iso_utc(max(dates))}" if dates else ""
    left_out = f"; {len(poll.faults)} left out: {poll.faults[0]}" if poll.faults else ""
    return f"{counted(len(poll.items), 'entry', 'entries')}{newest}{left_out}"


def add_to(app: typer.Typer) -> None:
    """Add these commands."""
    app.command("init")(init)
    app.command("check")(check)
