"""Reading the settings file: all its faults are found before one is reported."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from vanner.errors import SettingsError
from vanner.settings.checks import cross_faults
from vanner.settings.faults import ENTRIES, Fault, translated
from vanner.settings.models import Settings
from vanner.settings.written import plain

_SECTIONS = ("service", "source", "desk", "mail")
_POSITION = re.compile(r"\(at line (\d+), column (\d+)\)$")
_TWICE = re.compile(r"overwrite|twice|duplicate|immutable|redefine", re.IGNORECASE)
_OPEN = re.compile(r"unclosed|unterminated|expected (?:'\]|\"')", re.IGNORECASE)


def load_settings(path: Path) -> Settings:
    """Read and check a settings file; its relative paths start at its own folder.

    Raises:
        SettingsError: The file cannot be read, or it has faults: each is one line of
            `faults`, all of them at once, and no secret's value is among them.
    """
    return settings_of(_parsed(_text(path), path), path)


def settings_of(raw: Mapping[str, Any], path: Path) -> Settings:
    """The settings that a parsed file holds.

    Args:
        raw: The file's keys and values.
        path: Where the file is.

    Raises:
        SettingsError: As in `load_settings`.
    """
    listed, faults = _with_right_brackets(raw)
    settings: Settings | None = None
    try:
        settings = Settings.model_validate(listed, context={"folder": path.absolute().parent})
    except ValidationError as error:
        faults += [translated(one, listed) for one in error.errors(include_url=False)]
    faults += cross_faults(listed)
    # Raised out here, so that no exception chained to it holds the values of secrets.
    if faults or settings is None:
        lines = [fault.line(listed, path.name) for fault in sorted(faults, key=_order)]
        raise _faulty(path, tuple(dict.fromkeys(lines)))
    return settings


def _with_right_brackets(raw: Mapping[str, Any]) -> tuple[dict[str, Any], list[Fault]]:
    """The file as it was meant, so that wrong brackets hide no fault between them."""
    listed = {**raw, "service": raw.get("service", {})}
    faults = []
    for section in _SECTIONS:
        found = listed.get(section)
        if section in ENTRIES and isinstance(found, dict):
            listed[section] = [found]
            faults.append(Fault((section,), f"must have double brackets: [[{section}]]"))
        elif section not in ENTRIES and isinstance(found, list) and len(found) == 1:
            listed[section] = found[0]
            faults.append(Fault((section,), f"must have single brackets: [{section}]"))
    return listed, faults


def _order(fault: Fault) -> tuple[int, int]:
    """By table, then by entry; within an entry as they were found."""
    section = str(fault.keys[0]) if fault.keys else ""
    number = fault.keys[1] if len(fault.keys) > 1 else -1
    place = _SECTIONS.index(section) if section in _SECTIONS else -1
    return place, number if isinstance(number, int) else -1


def _faulty(path: Path, lines: tuple[str, ...]) -> SettingsError:
    number, them = ("a fault", "it") if len(lines) == 1 else (f"{len(lines)} faults", "them")
    return SettingsError(f"{plain(str(path))} has {number}; correct {them} and try again.", lines)


def _text(path: Path) -> str:
    place = plain(str(path))
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        named = "" if path == Path("vanner.toml") else f" {place}"
        raise SettingsError(
            f"There is no settings file {place}; make one with: vanner init{named}"
        ) from None
    except IsADirectoryError:
        raise SettingsError(f"{place} is a folder; name the settings file in it.") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else "no such name can be"
        raise SettingsError(
            f"The settings file {place} cannot be read ({reason}); make it readable to Vanner."
        ) from error
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        byte = data[error.start]
    raise _faulty(
        path,
        (f"{plain(path.name)}: line {line}: byte 0x{byte:02X} is not UTF-8; save it as UTF-8",),
    )


def _parsed(text: str, path: Path) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except RecursionError:
        told = "its lists or tables are nested too deeply"
    except ValueError as error:
        # The parser's own error is a ValueError; a number of too many digits is a bare one.
        told = _told(str(error), text)
    raise _faulty(path, (f"{plain(path.name)}: {told}",))


def _told(message: str, text: str) -> str:
    """Where the TOML is broken and why. The line itself is not shown: it may hold a secret."""
    found = _POSITION.search(message)
    if found is not None:
        place = f"line {found[1]}, column {found[2]}"
    elif message.endswith("(at end of document)"):
        # The last line that holds anything: an empty one after it would show nothing.
        lines = text.rstrip("\r\n").split("\n")
        place = f"line {len(lines)}, column {len(lines[-1]) + 1}"
    else:
        return "a number has too many digits"
    if _TWICE.search(message):
        return f"{place}: this key or table stands here for the second time; keep one of them"
    if _OPEN.search(message):
        return f"{place}: something is still open here; close its quotes or brackets"
    return f"{place}: this is not TOML; look for a missing value, equals sign or quote"
