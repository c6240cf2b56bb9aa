"""Time: the only module that reads a clock, and the shapes in which times are written.

Inside the program a time is a float of Unix seconds, always UTC, in names ending in `_s`.
"""

from __future__ import annotations

import math
import time
from datetime import UTC, datetime

MINUTE_S = 60.0
HOUR_S = 3600.0
DAY_S = 86400.0
WEEK_S = 7 * DAY_S


def now_s() -> float:
    """The wall clock, in Unix seconds. Call it in the outermost loop and pass the value on."""
    return time.time()


def iso_utc(time_s: float) -> str:
    """Unix seconds as ISO 8601 UTC text in whole seconds, ending in Z (floored)."""
    return datetime.fromtimestamp(math.floor(time_s), UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def parse_iso(text: str) -> float:
    """RFC 3339 or ISO 8601 text as Unix seconds; a time without an offset is taken as UTC.

    Raises:
        ValueError: The text is no date and time of that form.
    """
    moment = datetime.fromisoformat(text.strip())
    if moment.tzinfo is None:
        moment = moment.replace(tzinfo=UTC)
    return moment.timestamp()


def pulse_of(time_s: float, pulse_s: float) -> int:
    """The number of the pulse that a time falls in: pulse p covers [p, p + 1) * pulse_s."""
    return math.floor(time_s / pulse_s)


def pulse_end_s(pulse: int, pulse_s: float) -> float:
    """The moment at which a pulse closes, in Unix seconds."""
    return (pulse + 1) * pulse_s
