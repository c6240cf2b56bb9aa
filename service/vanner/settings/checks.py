"""Checks that see more than one key.

They read the file as written, so that a fault in one place hides none in another.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any
from urllib.parse import urlsplit

from pydantic import ConfigDict, ValidationError

from vanner.settings.faults import (
    ENTRIES,
    KINDS,
    Fault,
    Keys,
    entries,
    named,
    nearest,
    translated,
    unknown_key_rule,
)
from vanner.settings.models import ONE_PLACE, FeedSettings, FolderSettings, SourceBase
from vanner.settings.written import written


class _AnySource(SourceBase):
    """What can be checked of a source whose kind is not known."""

    model_config = ConfigDict(extra="ignore")


def cross_faults(raw: Mapping[str, Any]) -> Iterator[Fault]:
    """The faults that no key has by itself alone."""
    for section in ENTRIES:
        if raw.get(section, []) == []:
            yield Fault((section,), f"there must be at least one [[{section}]]")
        yield from _same_names(raw, section)
    for number, source in enumerate(entries(raw, "source")):
        if isinstance(source, dict):
            yield from _of_source(raw, number, source)
    for number, desk in enumerate(entries(raw, "desk")):
        if isinstance(desk, dict):
            yield from _of_desk(raw, number, desk)
    mail = raw.get("mail")
    if isinstance(mail, dict):
        yield from _user_without_password(mail)
        yield from _not_one_place(("mail", "password"), mail)


def _same_names(raw: Mapping[str, Any], section: str) -> Iterator[Fault]:
    first: dict[str, int] = {}
    for number, name in named(raw, section):
        if first.setdefault(name, number) != number:
            yield Fault(
                (section, number, "name"),
                f"must be another name: {section} {first[name] + 1} has this one",
            )


def _of_source(raw: Mapping[str, Any], number: int, source: Mapping[str, Any]) -> Iterator[Fault]:
    keys = ("source", number)
    kind = source.get("kind")
    if kind == "feed":
        if "password" in source and "username" not in source:
            yield Fault((*keys, "username"), "must be given where there is a password")
        yield from _not_one_place((*keys, "password"), source)
        if _holds_a_user(source.get("url")):
            yield Fault(
                (*keys, "url"),
                'must hold no user and password: use username and password = { env = "NAME" }',
            )
    if not (isinstance(kind, str) and kind in KINDS):
        yield from _of_unknown_kind(raw, number, source)


def _of_unknown_kind(
    raw: Mapping[str, Any], number: int, source: Mapping[str, Any]
) -> Iterator[Fault]:
    """The library reads nothing of a source whose kind it does not know."""
    try:
        _AnySource.model_validate(source)
    except ValidationError as error:
        for detail in error.errors(include_url=False):
            # The kind's place within a location is filled, for it is taken out again.
            yield translated({**detail, "loc": ("source", number, "any", *detail["loc"])}, raw)
    known = FeedSettings.model_fields.keys() | FolderSettings.model_fields.keys()
    for key in source.keys() - known:
        keys = ("source", number, key)
        yield Fault(keys, unknown_key_rule(keys, raw))


def _of_desk(raw: Mapping[str, Any], number: int, desk: Mapping[str, Any]) -> Iterator[Fault]:
    names = [name for _, name in named(raw, "source")]
    reads = desk.get("sources")
    for position, name in enumerate(reads if isinstance(reads, list) else []):
        if isinstance(name, str) and name.strip() not in names:
            near = nearest(name, names)
            advice = (
                f"did you mean {written(near)}?" if near else "add it or name one that is there"
            )
            yield Fault(
                ("desk", number, "sources", position),
                f"must be the name of a [[source]]: {advice}",
            )
    if desk.get("recipients") and "mail" not in raw:
        yield Fault(
            ("desk", number, "recipients"),
            "must be left out, or a [mail] table must say which server sends the mail",
        )


def _user_without_password(mail: Mapping[str, Any]) -> Iterator[Fault]:
    for key, other in (("username", "password"), ("password", "username")):
        if other in mail and key not in mail:
            yield Fault(("mail", key), f"must be given where there is a {other}")


def _not_one_place(keys: Keys, table: Mapping[str, Any]) -> Iterator[Fault]:
    """The model says the same, but only of a secret that has no other fault."""
    secret = table.get("password")
    if isinstance(secret, dict) and ("env" in secret) == ("file" in secret):
        yield Fault(keys, f"must be {ONE_PLACE}")


def _holds_a_user(url: object) -> bool:
    try:
        return isinstance(url, str) and "@" in urlsplit(url).netloc
    except ValueError:
        return False
