"""Dates as feeds and servers write them, as Unix seconds."""

from __future__ import annotations

import calendar
import re
from collections.abc import Sequence
from email.utils import parsedate_to_datetime

from vanner import clock

# Beyond the end of the year 9999 a time can no longer be written as a date.
_LATEST_S = 253402300799.0
# The day before year 1 in UTC could still be a time zone's year 1; nothing real is that old.
_EARLIEST_S = -62135596800.0
_SECONDS = re.compile(r"\d{1,10}")


def seconds_of(text: str | None, parsed: Sequence[int] | None = None) -> float | None:
    """A date of a feed in Unix seconds, or None where it cannot be read.

    Args:
        text: The date as it stood, in RFC 5322 or ISO 8601 form; without an offset it is UTC.
        parsed: The same date as another reader's UTC time tuple; goes first where given.
    """
    if parsed is not None:
        try:
            return _within(float(calendar.timegm(tuple(parsed))))
        except (ValueError, TypeError, OverflowError):
            pass
    if not text or not text.strip():
        return None
    for read in (clock.parse_iso, _mail_date_s):
        try:
            return _within(read(text.strip()))
        except (ValueError, TypeError, OverflowError, IndexError):
            continue
    return None


def retry_at_s(header: str | None, now_s: float) -> float | None:
    """When a `Retry-After` header ends (RFC 9110, 10.2.3), in Unix seconds.

    A whole number counts from `now_s`; anything else is an HTTP date. Absent or unreadable
    headers give None, and a moment that has passed gives `now_s`.
    """
    if header is None:
        return None
    text = header.strip()
    if _SECONDS.fullmatch(text):
        return now_s + float(text)
    moment_s = seconds_of(text)
    return None if moment_s is None else max(now_s, moment_s)


def _mail_date_s(text: str) -> float:
    moment = parsedate_to_datetime(text)
    if moment.tzinfo is None:
        # "-0000" means a UTC time from a place that is not told.
        return float(calendar.timegm(moment.timetuple()))
    return moment.timestamp()


def _within(time_s: float) -> float | None:
    return time_s if _EARLIEST_S <= time_s <= _LATEST_S else None
