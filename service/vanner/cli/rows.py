"""How a query's rows are written: as a table, as CSV or as JSON."""

from __future__ import annotations

import csv
import json
import math
import sys
from collections.abc import Callable, Mapping, Sequence
from enum import StrEnum
from itertools import islice

from rich.console import Console
from rich.table import Table
from rich.text import Text

from vanner.cli.console import aligned, printable
from vanner.store.query import Result

_ROWS_AT_ONCE = 1000


class Form(StrEnum):
    """How rows are written."""

    table = "table"
    csv = "csv"
    json = "json"


def write_table(result: Result) -> None:
    """Columns for people: numbers to the right, four figures of a fraction, NULL as nothing.

    On a terminal long cells are folded to its width; elsewhere a row is one line however
    long, so that lines can be cut and sorted.
    """
    rows = list(result.rows)
    right = frozenset(
        place
        for place in range(len(result.columns))
        if {type(row[place]) for row in rows} - {type(None)} in ({int}, {float}, {int, float})
    )
    names = [printable(name) for name in result.columns]
    cells = [[_cell(value) for value in row] for row in rows]
    if not sys.stdout.isatty():
        for line in aligned([names, *cells], right):
            sys.stdout.write(line + "\n")
        return
    table = Table(box=None, header_style="bold", pad_edge=False)
    for place, name in enumerate(names):
        table.add_column(Text(name), justify="right" if place in right else "left", overflow="fold")
    for row in cells:
        table.add_row(*map(Text, row))
    Console().print(table)


def _cell(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bytes):
        return value.hex()
    if isinstance(value, float):
        # Four figures tell enough of a share; a time in seconds keeps all that are whole.
        return f"{value:.1f}" if 1000 <= abs(value) < 1e15 else f"{value:.4g}"
    return printable(str(value))


def write_csv(result: Result) -> None:
    """RFC 4180 but for its line ends, which are bare line feeds; NULL is an empty field."""
    writer = csv.writer(sys.stdout, lineterminator="\n")
    writer.writerow(result.columns)
    writer.writerows([_plain(value) for value in row] for row in result.rows)


def write_json(result: Result) -> None:
    """A JSON array, one object a line, written as rows come."""
    names = _distinct(result.columns)
    sys.stdout.write("[")
    separator = "\n"
    while part := list(islice(result.rows, _ROWS_AT_ONCE)):
        for row in part:
            record = dict(zip(names, map(_plain, row), strict=True))
            sys.stdout.write(separator + json.dumps(record, ensure_ascii=False, allow_nan=False))
            separator = ",\n"
    sys.stdout.write("\n]\n")


def _distinct(names: Sequence[str]) -> list[str]:
    """Names as keys of one object: a second "title" becomes "title:1", as SQLite itself does."""
    keys: list[str] = []
    for name in names:
        key, number = name, 0
        while key in keys:
            number += 1
            key = f"{name}:{number}"
        keys.append(key)
    return keys


def _plain(value: object) -> object:
    """Bytes as hexadecimal text; an infinite number, which JSON lacks, as text too."""
    if isinstance(value, bytes):
        return value.hex()
    if isinstance(value, float) and not math.isfinite(value):
        return str(value)
    return value


WRITERS: Mapping[Form, Callable[[Result], None]] = {
    Form.table: write_table,
    Form.csv: write_csv,
    Form.json: write_json,
}
