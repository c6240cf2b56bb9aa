"""A fault of the settings: where it is, what stands there and what would be right.

The validating library's own sentences never reach the user: each of its error types has a
rule of ours here, and one that is not known gets a general one.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, Final

from pydantic_core import ErrorDetails

from vanner.settings.models import (
    DeskSettings,
    FeedSettings,
    FolderSettings,
    MailSettings,
    Secret,
    ServiceSettings,
    Settings,
    SourceBase,
)
from vanner.settings.written import HIDDEN, is_secret, plain, written, written_key

Keys = tuple[str | int, ...]

KINDS: Final[Mapping[str, type[SourceBase]]] = {"feed": FeedSettings, "folder": FolderSettings}
ENTRIES: Final = ("source", "desk")
NOT_ITSELF_RULE: Final = 'must be { env = "NAME" } or { file = "PATH" }, never the secret itself'
GENERAL_RULE: Final = "must be another value; the file that vanner init writes explains each key"

_ABSENT: Final = object()
_TABLES: Final[Mapping[str, frozenset[str]]] = {
    "service": frozenset(ServiceSettings.model_fields),
    "source": frozenset(FeedSettings.model_fields) | frozenset(FolderSettings.model_fields),
    "desk": frozenset(DeskSettings.model_fields),
    "mail": frozenset(MailSettings.model_fields),
}
_MISSING: Final[Mapping[str, str]] = {
    "name": 'must be a name, such as name = "harbour"',
    "kind": 'must be "feed" or "folder"',
    "url": 'must be an address such as "https://news.example/feed.xml"',
    "path": 'must be a folder, such as "inbox"',
    "sources": "must be a list of source names, with at least one",
    "host": 'must be a host name such as "mail.example.org"',
    "sender": 'must be a mail address such as "desk@example.org"',
}
_TABLE: Final = "must be a table of keys and values"
_RULES: Final[Mapping[str, str]] = {
    "string_type": "must be text in quotes",
    "string_too_short": "must not be empty",
    "path_type": "must be a path in quotes",
    "bool_type": "must be true or false, without quotes",
    "int_type": "must be a whole number, without quotes",
    "int_from_float": "must be a whole number",
    "float_type": "must be a number, without quotes",
    "finite_number": "must be a finite number",
    "greater_than": "must be above {gt:.12g}",
    "greater_than_equal": "must be at least {ge:.12g}",
    "less_than": "must be below {lt:.12g}",
    "less_than_equal": "must be at most {le:.12g}",
    "too_short": "must have at least {min_length} entry",
    "tuple_type": "must be a list in square brackets",
    "model_type": _TABLE,
    "model_attributes_type": _TABLE,
    "dict_type": _TABLE,
    "union_tag_not_found": 'must be "feed" or "folder"',
    "union_tag_invalid": 'must be "feed" or "folder"',
}


@dataclass(frozen=True, slots=True)
class Fault:
    """One fault of the file.

    Attributes:
        keys: Keys and list positions (from 0) that lead to the place.
        rule: What would be right.
    """

    keys: Keys
    rule: str

    def line(self, raw: Mapping[str, Any], file_name: str) -> str:
        """The fault as one line: `FILE: KEY = VALUE: what would be right`."""
        value = _value_at(raw, self.keys)
        if value is _ABSENT:
            shown = " is missing"
        elif any(isinstance(key, str) and is_secret(key) for key in self.keys):
            shown = f" = {HIDDEN}"
        else:
            shown = f" = {written(value)}"
        return f"{plain(file_name)}: {_place(raw, self.keys)}{shown}: {self.rule}"


def translated(error: ErrorDetails, raw: Mapping[str, Any]) -> Fault:
    """The fault that one error of the validating library stands for."""
    kind, context, keys = error["type"], error.get("ctx", {}), _without_tag(error["loc"])
    if kind.startswith("union_tag"):
        keys = (*keys, "kind")
    last = str(keys[-1]) if keys else ""
    if kind == "missing":
        rule = _MISSING.get(last, GENERAL_RULE)
    elif kind == "extra_forbidden":
        rule = unknown_key_rule(keys, raw)
    elif kind == "model_type" and last == "password":
        rule = NOT_ITSELF_RULE
    elif kind == "value_error":
        rule = f"must be {context['error']}"
    elif kind == "literal_error":
        rule = f"must be {context['expected']}".replace("'", '"')
    else:
        rule = _RULES.get(kind, GENERAL_RULE).format_map(context)
    return Fault(keys, rule)


def unknown_key_rule(keys: Keys, raw: Mapping[str, Any]) -> str:
    """What to do about a key that means nothing where it stands."""
    key, known = str(keys[-1]), sorted(_known_keys(keys, raw))
    in_secret = "password" in keys[:-1]
    homes = [table for table, fields in _TABLES.items() if key in fields and not in_secret]
    if homes and keys[0] not in homes:
        home = f"[[{homes[0]}]]" if homes[0] in ENTRIES else f"[{homes[0]}]"
        return f"unknown key here; it belongs below {home}"
    near = None if homes else nearest(key, known)
    if near is not None:
        return f"unknown key; did you mean {near}?"
    return f"unknown key here; there may be {', '.join(known)}"


def nearest(word: str, known: list[str]) -> str | None:
    """The known word that looks most like this one, or None where none does."""
    lowered = {one.lower()[:64]: one for one in known}
    found = get_close_matches(word.lower()[:64], lowered, n=1, cutoff=0.65)
    return lowered[found[0]] if found else None


def named(raw: Mapping[str, Any], section: str) -> Iterator[tuple[int, str]]:
    """Position and name of each entry of `[[section]]` that has a name of text."""
    for number, entry in enumerate(entries(raw, section)):
        name = entry.get("name") if isinstance(entry, dict) else None
        if isinstance(name, str) and name.strip():
            yield number, name.strip()


def entries(raw: Mapping[str, Any], section: str) -> list[Any]:
    """The entries of `[[section]]` as written; none where it is no list."""
    found = raw.get(section)
    return found if isinstance(found, list) else []


def _known_keys(keys: Keys, raw: Mapping[str, Any]) -> frozenset[str]:
    if len(keys) == 1:
        return frozenset(Settings.model_fields)
    if len(keys) > 2 and keys[-2] == "password":
        return frozenset(Secret.model_fields)
    if keys[0] == "source":
        model = KINDS.get(str(_value_at(raw, (*keys[:2], "kind"))))
        return frozenset(model.model_fields) if model is not None else _TABLES["source"]
    return _TABLES[str(keys[0])]


def _without_tag(loc: Keys) -> Keys:
    """Between a source's number and its key the library puts the kind by which it was read."""
    return (*loc[:2], *loc[3:]) if loc[:1] == ("source",) and len(loc) > 2 else loc


def _value_at(raw: object, keys: Keys) -> object:
    for key in keys:
        if isinstance(key, int):
            raw = raw[key] if isinstance(raw, list) and key < len(raw) else _ABSENT
        else:
            raw = raw.get(key, _ABSENT) if isinstance(raw, Mapping) else _ABSENT
    return raw


def _place(raw: Mapping[str, Any], keys: Keys) -> str:
    """Keys in a row; an entry goes by its name, unless that is at fault or not its alone."""
    names = dict(named(raw, str(keys[0]))) if keys[2:] != ("name",) else {}
    shared = Counter(names.values())
    parts: list[str] = []
    for position, key in enumerate(keys):
        if isinstance(key, str):
            parts.append(written_key(key))
        else:
            name = names.get(key) if position == 1 else None
            parts[-1] += f" {written(name)}" if name and shared[name] == 1 else f" {key + 1}"
    return ", ".join(parts)
