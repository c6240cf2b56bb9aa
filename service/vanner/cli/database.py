"""db: commands on the database itself."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, say
from vanner.cli.interrupting import interrupted_at_once
from vanner.cli.rows import WRITERS, Form
from vanner.errors import DatabaseError
from vanner.settings import load_settings
from vanner.store.database import Database
from vanner.store.query import back_up, run_query

app = typer.Typer(
    help="Query, back up and upgrade the database.\n\n"
    'Example: vanner db query --format csv "SELECT * FROM alerts"',
    invoke_without_command=True,
    rich_markup_mode=None,
)

DatabaseOption = Annotated[
    Path | None,
    typer.Option(
        "--database", "-d", metavar="FILE", help="The database; else the one of the settings."
    ),
]


@app.callback()
def _without_command(context: typer.Context) -> None:
    if context.invoked_subcommand is None:
        say(context.get_help())


def path_of(database: Path | None, settings: Path) -> Path:
    """The database that a command means."""
    return database if database is not None else load_settings(settings).database_path


@app.command()
def upgrade(settings: SettingsOption = DEFAULT_SETTINGS, database: DatabaseOption = None) -> None:
    """Bring an older database up to this version's schema.

    Example: vanner db upgrade
    """
    path = path_of(database, settings)
    Database.open(path, create=False, migrate=True).close()
    say(f"The database {path} is up to date.")


@app.command()
def query(
    sql: Annotated[str, typer.Argument(metavar="SQL", help="One SELECT statement.")],
    settings: SettingsOption = DEFAULT_SETTINGS,
    database: DatabaseOption = None,
    form: Annotated[Form, typer.Option("--format", "-f", help="How to write rows.")] = Form.table,
) -> None:
    """Run one SQL statement that only reads.

    Example: vanner db query "SELECT raised_at, headline FROM alerts"
    """
    opened = Database.open(path_of(database, settings), create=False, migrate=False)
    try:
        with interrupted_at_once(), run_query(opened, sql) as result:
            if not result.columns:
                raise DatabaseError("The query gives no columns; give one SELECT.")
            WRITERS[form](result)
    finally:
        opened.close()


@app.command()
def backup(
    file: Annotated[
        Path, typer.Argument(metavar="FILE", help="The file to make; it must not exist.")
    ],
    settings: SettingsOption = DEFAULT_SETTINGS,
    database: DatabaseOption = None,
) -> None:
    """Copy the database to a file while it is in use.

    Example: vanner db backup monday.db
    """
    opened = Database.open(path_of(database, settings), create=False, migrate=False)
    try:
        size = back_up(opened, file)
    finally:
        opened.close()
    say(f"{size:,} bytes written to {file}")
