"""The kinds of value that settings hold. A rule that is broken reads on after "must be"."""

from __future__ import annotations

import re
from difflib import get_close_matches
from ipaddress import ip_address
from pathlib import Path
from typing import Annotated
from unicodedata import category
from urllib.parse import urlsplit
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError, available_timezones

from croniter import croniter
from pydantic import AfterValidator, BeforeValidator, Field, Strict, ValidationInfo

SQLITE = "sqlite:///"
_CRON_FIELD = re.compile(
    r"(?:[0-9]{1,2}|[*/,#-]|L(?=[0-7]|$)|JAN|FEB|MAR|APR|MAY|JUN|JUL|AUG|SEP|OCT|NOV|DEC"
    r"|MON|TUE|WED|THU|FRI|SAT|SUN)+",
    re.IGNORECASE | re.ASCII,
)
_CRON = 'five cron fields (minute hour day month weekday), such as "0 7 * * *"'
_LANGUAGE = re.compile(r"[A-Za-z]{2,3}(?:-[A-Za-z0-9]{1,8})*")
_VARIABLE = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")


def _known_zone(name: str) -> str:
    try:
        ZoneInfo(name)
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        near = get_close_matches(name[:64], available_timezones(), n=1, cutoff=0.7)
        example = near[0] if near else "Europe/Vienna"
        raise ValueError(f'a time zone of the IANA database, such as "{example}"') from error
    return name


def _five_field_cron(text: str) -> str:
    fields = text.split()
    if len(fields) != 5 or not all(_CRON_FIELD.fullmatch(field) for field in fields):
        # More fields, aliases and fields drawn at random mean no minute of the day.
        raise ValueError(_CRON)
    if not croniter.is_valid(text):
        raise ValueError(_CRON)
    try:
        croniter(text, 0.0).get_next()
    except ValueError as error:
        raise ValueError("a day that comes: no calendar has this one") from error
    return " ".join(fields)


def _address(text: str) -> str:
    local, _, domain = text.rpartition("@")
    if not (local and domain) or any(
        c.isspace() or not c.isprintable() or c in "<>,;" for c in text
    ):
        raise ValueError('a mail address such as "desk@example.org"')
    return text


def _name(text: str) -> str:
    # Many scripts write vowels as marks, which count as neither letter nor digit.
    fits = all(c.isalnum() or c in "_ .:/@-" or category(c)[0] == "M" for c in text)
    if not fits or not 1 <= len(text) <= 64 or not (text[0].isalnum() or text[0] == "_"):
        raise ValueError(
            "a name of 1 to 64 letters, digits, blanks and . : / @ _ - that begins "
            "with a letter or digit"
        )
    return text


def _web_address(text: str) -> str:
    try:
        parts = urlsplit(text)
        fits = parts.scheme in {"http", "https"} and bool(parts.hostname) and parts.port != 0
    except ValueError:
        fits = False
    if not fits or any(c.isspace() or not c.isprintable() for c in text):
        raise ValueError('an address such as "https://news.example/feed.xml"')
    return text


def _host(text: str) -> str:
    try:
        ip_address(text)
    except ValueError as error:
        if not text or re.search(r"[\s/@:]", text) or not text.isprintable():
            raise ValueError(
                'a host name such as "mail.example.org", without scheme and port'
            ) from error
    return text


def _language(text: str) -> str:
    if _LANGUAGE.fullmatch(text) is None:
        raise ValueError('a language tag of BCP 47, such as "en" or "de-AT"')
    return text


def _variable(text: str) -> str:
    if _VARIABLE.fullmatch(text) is None:
        raise ValueError("the name of an environment variable: letters, digits and _")
    return text


def _path_text(value: object) -> object:
    if isinstance(value, str):
        if not value.strip() or not value.isprintable():
            raise ValueError("a path in quotes")
        if value.startswith("~"):
            # Whose home that is depends on who starts the daemon.
            raise ValueError("a path written in full, without ~")
    return value


def _in_folder(path: Path, info: ValidationInfo) -> Path:
    folder = (info.context or {}).get("folder")
    return path if folder is None else Path(folder) / path


def _database(url: str, info: ValidationInfo) -> str:
    scheme, separator, _ = url.partition("://")
    if separator and scheme.partition("+")[0].lower() in {"postgresql", "postgres"}:
        raise ValueError(f"{SQLITE}PATH: PostgreSQL comes later and is not supported yet")
    path = url.removeprefix(SQLITE)
    if url == "sqlite://" or (path != url and (not path.strip() or ":memory:" in path)):
        raise ValueError(f"{SQLITE}PATH: nothing would be kept of a database in memory")
    if path == url or "?" in path or path.startswith(("~", "file:")) or not path.isprintable():
        raise ValueError(f'{SQLITE}PATH, such as "{SQLITE}vanner.db", without options or ~')
    return f"{SQLITE}{_in_folder(Path(path), info)}"


ZoneName = Annotated[str, AfterValidator(_known_zone)]
Cron = Annotated[str, AfterValidator(_five_field_cron)]
Address = Annotated[str, AfterValidator(_address)]
Name = Annotated[str, AfterValidator(_name)]
WebAddress = Annotated[str, AfterValidator(_web_address)]
HostName = Annotated[str, AfterValidator(_host)]
LanguageTag = Annotated[str, AfterValidator(_language)]
VariableName = Annotated[str, AfterValidator(_variable)]
UserName = Annotated[str, Field(min_length=1)]
# A path is resolved against the folder that the validation's context names, if any.
FolderPath = Annotated[Path, BeforeValidator(_path_text), AfterValidator(_in_folder)]
DatabaseUrl = Annotated[str, AfterValidator(_database)]
# TOML has types of its own: "5" is no number and 1 is no truth value.
Number = Annotated[float, Strict(), Field(allow_inf_nan=False)]
WholeNumber = Annotated[int, Strict()]
YesNo = Annotated[bool, Strict()]
