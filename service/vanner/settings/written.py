"""How keys and values of the file are shown in a fault: on one line, short, without secrets."""

from __future__ import annotations

import re
from datetime import date, time
from difflib import get_close_matches

_LONGEST = 60
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
# Wide on purpose: a harmless value that is held back costs less than a password in a log.
_SECRET = re.compile(
    r"pass|pwd|secret|token|credential|key|auth|cookie|header|bearer", re.IGNORECASE
)
_CREDENTIALS = re.compile(r":.*@", re.DOTALL)
_QUERY = re.compile(r"[?#].*", re.DOTALL)
_ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\r": "\\r", "\t": "\\t"}

HIDDEN = "(not shown)"


def is_secret(key: str) -> bool:
    """Whether a value under this key, perhaps a mistyped "password", must never be shown."""
    return _SECRET.search(key) is not None or bool(
        get_close_matches(key.lower()[:64], ["password", "secret", "token"], n=1, cutoff=0.7)
    )


def written_key(key: str) -> str:
    """A key as TOML writes it: bare where it can be, else in quotes."""
    return key if len(key) <= _LONGEST and _BARE_KEY.fullmatch(key) else _quoted(key)


def written(value: object, depth: int = 2) -> str:
    """A value as TOML writes it; long ones shortened, the insides of tables left out.

    What may be a password or a key within an address is left out too.
    """
    if isinstance(value, str):
        shown = _CREDENTIALS.sub(":...@", value)
        return _quoted(_QUERY.sub("?...", shown) if "/" in shown else shown)
    if isinstance(value, list | tuple):
        inside = [written(one, depth - 1) for one in value[:4]] if depth else []
        return f"[{', '.join(inside + ['...'] * (len(value) > len(inside)))}]"
    if isinstance(value, dict):
        return "{ ... }" if value else "{}"
    return _written_scalar(value)


def _written_scalar(value: object) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, date | time):
        return value.isoformat()
    if isinstance(value, int) and value.bit_length() > 128:
        # Python refuses to write whole numbers of many thousand digits.
        return "(a number of very many digits)"
    return str(value)


def plain(text: str) -> str:
    """Text on one line: what cannot be printed is escaped, so that no terminal obeys it."""
    return "".join(c if c.isprintable() else _escaped(c) for c in text)


def _quoted(text: str) -> str:
    short = text if len(text) <= _LONGEST else text[: _LONGEST - 3] + "..."
    return (
        '"' + "".join(_escaped(c) if c in '"\\' or not c.isprintable() else c for c in short) + '"'
    )


def _escaped(c: str) -> str:
    known = _ESCAPES.get(c)
    return (
        known if known is not None else f"\\u{ord(c):04x}" if ord(c) < 65536 else f"\\U{ord(c):08x}"
    )
