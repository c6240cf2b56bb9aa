"""demo: two invented weeks at full speed, then a live minute."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import aligned, counted, progress, say, shell_word
from vanner.cli.interrupting import stop_signals
from vanner.cli.log import set_up_log
from vanner.clock import iso_utc, now_s
from vanner.daemon.archiving import open_fresh
from vanner.daemon.demonstration import (
    Outcome,
    archive_start_s,
    outcomes,
    replay_archive,
    run_live,
    take_in_archive,
)
from vanner.daemon.engine import Progress
from vanner.errors import VannerError
from vanner.store.database import Database
from vanner.store.overview import counts, item_count

_QUERIES = (
    "SELECT raised_at, desk, headline, items, sources FROM alerts ORDER BY raised_at",
    "SELECT term, bits, seen FROM alert_terms WHERE alert_id = (SELECT max(alert_id) FROM alerts)",
    "SELECT hour, items FROM term_hours WHERE term = 'harbour' ORDER BY hour DESC LIMIT 24",
)


class DemoFailedError(VannerError):
    """A planted story was not raised."""


def demo(
    database: Annotated[
        Path, typer.Option("--database", "-d", metavar="FILE", help="The database to make.")
    ] = Path("vanner-demo.db"),
    seconds: Annotated[
        float,
        typer.Option(metavar="NUMBER", help="Length of the live part in seconds.", min=10, max=600),
    ] = 60,
    random_state: Annotated[
        int, typer.Option(metavar="NUMBER", help="Another number makes other texts.")
    ] = 1,
) -> None:
    """Show an invented port town: two weeks, then a live minute.

    The town has a newsroom and an operations room. Stories are planted in the text of both,
    and the end tells which of them were raised. An earlier demo's database is replaced.

    Example: vanner demo --seconds 30
    """
    set_up_log("text", quiet=True)
    target = open_fresh(database)
    try:
        archive_s = archive_start_s(now_s())
        say("Two weeks of an invented port town: its newsroom and its operations room.")
        with progress("Taking in", None) as bar:
            take_in_archive(target, archive_s, random_state, bar)
        with progress("Reading", item_count(target)) as bar:
            replay_archive(target, lambda done: bar(done.items))
        told = counts(target)
        say(
            f"{counted(told.items, 'item')} read: {counted(told.alerts, 'alert')}, "
            f"{counted(told.noted, 'story', 'stories')} only noted."
        )
        say(f"\nNow live for {seconds:g} seconds; alerts as they are raised:")
        with stop_signals() as stop:
            live_s = run_live(target, seconds, random_state, now_s, stop, _show)
            interrupted = stop.is_set()
        found = outcomes(target, archive_s, live_s, seconds, random_state, now_s())
        missed = _conclude(target, found, cut_off=interrupted)
        _offer(target)
    finally:
        target.close()
    if interrupted:
        raise KeyboardInterrupt
    if missed:
        stories = counted(missed, "planted story", "planted stories")
        raise DemoFailedError(f"Not raised: {stories}; see the lines marked MISSED.")


def _show(progress_made: Progress) -> None:
    for alert in progress_made.raised:
        terms = ", ".join(term.term for term in alert.terms[:4])
        say(f"  {iso_utc(progress_made.end_s)}  [{alert.desk}] {alert.headline}  ({terms})")


def _conclude(database: Database, found: list[Outcome], *, cut_off: bool) -> int:
    """Tell what became of the planted stories; how many were not raised."""
    say("\nThe planted stories:")
    # Those of a live part that was cut off may not even have happened.
    for line in aligned([_row(one, "-" if cut_off else "MISSED") for one in found]):
        say(f"  {line}")
    missed = sum(one.alert is None for one in found)
    say(
        f"{len(found) - missed} of {len(found)} planted stories raised, "
        f"{counted(counts(database).alerts, 'alert')} in all."
    )
    return missed


def _row(one: Outcome, not_raised: str) -> tuple[str, ...]:
    if one.alert is None or one.alert.raised_s is None:
        return not_raised, "", one.story.desk, one.story.name, ""
    # Minutes are enough here, and leave the line narrow.
    raised_at = f"{iso_utc(one.alert.raised_s)[:16]}Z"
    items = counted(one.alert.item_count, "item")
    return "raised", raised_at, one.story.desk, one.story.name, items


def _offer(database: Database) -> None:
    say("\nEach is a lead, not a fact. Everything is in the database; try:")
    for sql in _QUERIES:
        say(f'  vanner db query --database {shell_word(database.path)} "{sql}"')


def add_to(app: typer.Typer) -> None:
    """Add this command."""
    app.command("demo")(demo)
