"""Times, numbers, names and links as mails and digests word them."""

from __future__ import annotations

import hashlib
import re
import unicodedata
from datetime import datetime
from zoneinfo import ZoneInfo

from vanner.alerts.lines import one_line

CARE = (
    "Every line above is a lead, not a fact: verify it with its sources before you publish "
    "or act on it. Vanner is no safety alarm and stands in for none."
)

_WEB_LINK = re.compile(r"https?://[^\s<>\"\\^`{|}]+", re.IGNORECASE)


def full_time(time_s: float, zone: ZoneInfo) -> str:
    """A time with its day, year and zone, such as "Wed 4 Mar 2026 07:00 CET"."""
    moment = datetime.fromtimestamp(time_s, zone)
    return f"{moment:%a} {moment.day} {moment:%b %Y %H:%M %Z}"


def near_time(time_s: float, zone: ZoneInfo, beside_s: float) -> str:
    """A time as it reads beside another one: the day only where it is a different one.

    Args:
        time_s: The time to write.
        zone: The desk's time zone.
        beside_s: The time that the reader has in mind; same day, and the day is left out.
    """
    moment = datetime.fromtimestamp(time_s, zone)
    beside = datetime.fromtimestamp(beside_s, zone)
    if moment.year != beside.year:
        return full_time(time_s, zone)
    if moment.date() != beside.date():
        return f"{moment:%a} {moment.day} {moment:%b %H:%M %Z}"
    return f"{moment:%H:%M %Z}"


def counted(number: int, noun: str) -> str:
    """A number with its noun, such as "1 item" or "12 items"; zero reads "no items"."""
    if number == 1:
        return f"1 {noun}"
    return f"{number or 'no'} {noun}s"


def amount(mean: float) -> str:
    """A mean number of items, no more exact than a reader needs it."""
    if mean >= 10:
        return f"{mean:.0f}"
    if mean >= 0.095:
        return f"{mean:.1f}"
    if mean == 0:
        return "0"
    return f"{mean:.2f}" if mean >= 0.01 else "under 0.01"


def web_link(url: str | None) -> str | None:
    """The address if it is a plain http or https one that may be shown as a link, else None."""
    if url is None or url != one_line(url) or not _WEB_LINK.fullmatch(url):
        return None
    return url


def slug(name: str) -> str:
    """A name for files and keys, of a-z, 0-9 and hyphens; different names give different ones.

    Where the name had to be changed, six hexadecimal digits of its digest follow.
    """
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    safe = re.sub(r"[^a-z0-9]+", "-", plain).strip("-")
    if safe and safe == name:
        return safe
    mark = hashlib.sha256(name.encode("utf-8", "surrogatepass")).hexdigest()[:6]
    return f"{safe or 'desk'}-{mark}"


def sql_text(text: str) -> str:
    """A text as an SQL string literal."""
    return "'" + one_line(text).replace("'", "''") + "'"
