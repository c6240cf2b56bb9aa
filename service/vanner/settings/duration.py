"""Durations as people write them: a number and a unit, such as "60s", "15m", "6h" or "28d"."""

from __future__ import annotations

import re
from fractions import Fraction
from typing import Annotated

from pydantic import AfterValidator, BeforeValidator

_UNIT_S = {"s": 1.0, "m": 60.0, "h": 3600.0, "d": 86400.0, "w": 604800.0}
_DURATION = re.compile(r"\s*([0-9]+(?:\.[0-9]+)?)\s*([smhdw])\s*")
_EXAMPLES = 'a duration such as "60s", "15m", "6h" or "28d"'
# Longer ones are slips of the pen, and dates that far off leave the calendar.
_LONGEST_S = 3660 * 86400.0


def parse_duration(value: object) -> float:
    """A duration in seconds from text such as "90s" or from a plain number of seconds.

    Raises:
        ValueError: It is neither, it is not above zero, or it is above 3660 days.
    """
    # `not ... > 0` also turns away a number that is none, for which every comparison fails.
    seconds = _seconds(value)
    if not seconds > 0:
        raise ValueError('a duration above zero, such as "60s"')
    if seconds > _LONGEST_S:
        raise ValueError('a duration of at most ten years ("3660d")')
    return seconds


def _seconds(value: object) -> float:
    if isinstance(value, int | float) and not isinstance(value, bool):
        try:
            return float(value)
        except OverflowError:
            return _LONGEST_S * 2 if value > 0 else -1.0
    match = _DURATION.fullmatch(value) if isinstance(value, str) else None
    if match is None:
        # Pydantic turns a ValueError into a fault; a TypeError would escape it.
        raise ValueError(_EXAMPLES)
    return float(match[1]) * _UNIT_S[match[2]]


def _divides_an_hour(seconds: float) -> float:
    # Exact arithmetic: an hour must begin where a pulse begins, in floating point too.
    if not 1 <= seconds <= 3600 or Fraction(3600) % Fraction(seconds):
        raise ValueError('from "1s" to "1h" and divide an hour evenly, such as "30s", "60s", "5m"')
    return seconds


DurationS = Annotated[float, BeforeValidator(parse_duration)]
PulseS = Annotated[DurationS, AfterValidator(_divides_an_hour)]
