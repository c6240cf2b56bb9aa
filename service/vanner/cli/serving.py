"""run: the daemon."""

from __future__ import annotations

import os
import random
import sys

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption
from vanner.cli.interrupting import leave_at_latest, stop_signals
from vanner.cli.log import set_up_log
from vanner.clock import now_s
from vanner.daemon.engine import Engine
from vanner.daemon.lock import sole_daemon
from vanner.daemon.plan import plans_from
from vanner.daemon.posting import Postman
from vanner.daemon.service import Service
from vanner.settings import Settings, load_settings
from vanner.sources import build_source
from vanner.store.database import Database

# A pulse that takes longer, such as one with a long archive to learn from, is broken off: it
# is rolled back and read anew at the next start.
_LEAVE_AFTER_S = 9.0


def build_service(settings: Settings, database: Database) -> Service:
    """The service that settings describe.

    Raises:
        SettingsError: A secret cannot be read.
    """
    plans = plans_from(settings)
    mail = settings.mail
    password = mail.password.read() if mail is not None and mail.password is not None else None
    sources = [(build_source(one), one.kind, one.every) for one in settings.source]
    return Service(
        database,
        Engine(database, plans, settings.service.pulse),
        Postman(database, plans, mail, password, now_s),
        sources,
        random.Random(),  # noqa: S311 - jitter of polling times, not secrecy
        now_s,
    )


def run(
    settings: SettingsOption = DEFAULT_SETTINGS,
    migrate: bool = typer.Option(True, help="Bring an older database up to date on start."),
) -> None:
    """Serve until stopped: poll, read, raise alerts, send digests.

    It stays in the foreground and writes its log to standard error. SIGTERM and Ctrl-C end it
    within seconds; what was accepted until then is kept.

    Example: vanner run --settings vanner.toml
    """
    told = load_settings(settings)
    set_up_log(told.service.log)
    path = told.database_path
    with stop_signals() as stop, sole_daemon(path):
        leave_at_latest(stop, _LEAVE_AFTER_S, _leave)
        database = Database.open(path, migrate=migrate)
        service = build_service(told, database)
        service.start()
        stop.wait()
        service.stop()
        database.close()
    # A poll may hang in the network for up to a minute, and the interpreter would wait for
    # its thread. Everything is committed by now, and what a poll was about to bring is there
    # at the next start.
    _leave()


def _leave() -> None:
    sys.stdout.flush()
    sys.stderr.flush()
    os._exit(0)


def add_to(app: typer.Typer) -> None:
    """Add this command."""
    app.command("run")(run)
