"""Durations as people write them: a number and a unit, such as "60s", "15m", "6h" or "28d"."""

from __future__ import annotations

import re
from typing import Annotated

from pydantic import BeforeValidator

_UNIT_S = {"s": 1.0, "m": 60.0, "h": 3600.0, "d": 86400.0, "w": 604800.0}
_DURATION = re.compile(r"\s*(\d+(?:\.\d+)?)\s*([smhdw])\s*")


def parse_duration(value: object) -> float:
    """A duration in seconds from text such as "90s" or from a plain number of seconds.

    Raises:
        ValueError: It is neither, or it is not above zero.
    """
    if isinstance(value, bool):
        # Pydantic turns a ValueError into a fault; a TypeError would escape it.
        raise ValueError('a duration such as "60s", "15m", "6h" or "28d"')  # noqa: TRY004 - see above
    if isinstance(value, int | float):
        seconds = float(value)
    else:
        match = _DURATION.fullmatch(value) if isinstance(value, str) else None
        if match is None:
            raise ValueError('a duration such as "60s", "15m", "6h" or "28d"')
        seconds = float(match[1]) * _UNIT_S[match[2]]
    if seconds <= 0:
        raise ValueError("a duration above zero")
    return seconds


DurationS = Annotated[float, BeforeValidator(parse_duration)]
