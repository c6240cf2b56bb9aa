"""demo: two invented weeks at full speed, then a live minute."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import progress, say, set_up_log, warn
from vanner.cli.serving import stop_signals
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
    "SELECT term, bits, seen, expected FROM alert_terms WHERE alert_id = 1 ORDER BY bits DESC",
    "SELECT hour, items FROM term_hours WHERE term = 'harbour' ORDER BY hour DESC LIMIT 24",
)


class DemoFailedError(VannerError):
    """A planted story was not raised."""


def demo(
    database: Annotated[
        Path, typer.Option("--database", "-d", help="The database to make.")
    ] = Path("vanner-demo.db"),
    seconds: Annotated[float, typer.Option(help="Length of the live part.", min=10, max=600)] = 60,
    random_state: Annotated[int, typer.Option(help="Another number makes other texts.")] = 1,
) -> None:
    """Show what Vanner does on an invented port town's newsroom and operations room.

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
        say(f"{told.items:,} items read: {told.alerts} alerts, {told.noted} stories only noted.")
        say(f"\nNow live for {seconds:g} seconds; alerts as they are raised:")
        with stop_signals() as stop:
            live_s = run_live(target, seconds, random_state, now_s, stop, _show)
            interrupted = stop.is_set()
        if interrupted:
            warn("Interrupted: what was read until now is below.")
        _conclude(target, outcomes(target, archive_s, live_s, seconds, random_state))
    finally:
        target.close()


def _show(progress_made: Progress) -> None:
    for alert in progress_made.raised:
        terms = ", ".join(term.term for term in alert.terms[:4])
        say(f"  {iso_utc(progress_made.end_s)}  [{alert.desk}] {alert.headline}  ({terms})")


def _conclude(database: Database, found: list[Outcome]) -> None:
    missed = [one.story for one in found if one.alert is None]
    say("\nThe planted stories:")
    for one in found:
        if one.alert is None or one.alert.raised_s is None:
            say(f"  MISSED  {one.story.name} [{one.story.desk}]")
            continue
        say(
            f"  raised {iso_utc(one.alert.raised_s)}  {one.story.name} [{one.story.desk}], "
            f"{one.alert.item_count} items of {one.alert.source_count} sources"
        )
    total = counts(database).alerts
    say(
        f"{len(found) - len(missed)} of {len(found)} planted stories raised, {total} alerts in all."
    )
    say("\nEach is a lead, not a fact. Everything is in the database; try:")
    for sql in _QUERIES:
        say(f'  vanner db query --database {database.path} "{sql}"')
    if missed:
        raise DemoFailedError(f"{len(missed)} planted stories were not raised; see above.")


def add_to(app: typer.Typer) -> None:
    """Add this command."""
    app.command("demo")(demo)
