"""db: commands on the database itself."""

from __future__ import annotations

import csv
import json
import sys
from enum import StrEnum
from itertools import islice
from pathlib import Path
from typing import Annotated

import typer
from rich.console import Console
from rich.table import Table
from rich.text import Text

from vanner.cli.console import DEFAULT_SETTINGS, SettingsOption, say
from vanner.settings import load_settings
from vanner.store.database import Database
from vanner.store.query import Result, back_up, run_query

app = typer.Typer(
    help="Query, back up and upgrade the database.",
    no_args_is_help=True,
    rich_markup_mode=None,
)

DatabaseOption = Annotated[
    Path | None,
    typer.Option("--database", "-d", help="The database; else the one of the settings."),
]
_ROWS_AT_ONCE = 1000
_PIPED_WIDTH = 200


class Form(StrEnum):
    """How rows are written."""

    table = "table"
    csv = "csv"
    json = "json"


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
    sql: Annotated[str, typer.Argument(help="One SELECT statement.")],
    settings: SettingsOption = DEFAULT_SETTINGS,
    database: DatabaseOption = None,
    form: Annotated[Form, typer.Option("--format", "-f", help="How to write rows.")] = Form.table,
) -> None:
    """Run one SQL statement that only reads.

    Example: vanner db query "SELECT raised_at, headline FROM alerts ORDER BY raised_at"
    """
    opened = Database.open(path_of(database, settings), create=False, migrate=False)
    try:
        with run_query(opened, sql) as result:
            _WRITERS[form](result)
    finally:
        opened.close()


def _write_table(result: Result) -> None:
    # Elsewhere than on a terminal a table keeps its width, so that lines can be cut and sorted.
    console = Console(width=None if sys.stdout.isatty() else _PIPED_WIDTH)
    table = Table(*result.columns, box=None, header_style="bold", pad_edge=False)
    for row in result.rows:
        table.add_row(*(_cell(value) for value in row))
    console.print(table)


def _cell(value: object) -> Text:
    if value is None:
        return Text("")
    return Text(f"{value:.4g}" if isinstance(value, float) else str(value))


def _write_csv(result: Result) -> None:
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(result.columns)
    writer.writerows(result.rows)


def _write_json(result: Result) -> None:
    """A JSON array, one object a line, written as rows come."""
    sys.stdout.write("[")
    separator = "\n"
    while part := list(islice(result.rows, _ROWS_AT_ONCE)):
        for row in part:
            record = dict(zip(result.columns, row, strict=True))
            sys.stdout.write(separator + json.dumps(record, ensure_ascii=False, default=str))
            separator = ",\n"
    sys.stdout.write("\n]\n")


_WRITERS = {Form.table: _write_table, Form.csv: _write_csv, Form.json: _write_json}


@app.command()
def backup(
    file: Annotated[Path, typer.Argument(help="The file to make; it must not exist.")],
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
