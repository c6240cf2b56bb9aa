"""An item's smaller fields: identifier, address, language and date."""

from __future__ import annotations

import hashlib
import re
from datetime import UTC, datetime

from vanner.intake.clean import clean_line

GUID_CHARACTERS = 500
URL_CHARACTERS = 2000
DATE_CHARACTERS = 200
SOURCE_CHARACTERS = 64
_WEB_ADDRESS = re.compile(r"https?://[^\s/?#]\S*", re.IGNORECASE)
# The shape of RFC 5646 with a language of two or three letters, as all that are in use.
_LANGUAGE = re.compile(r"[A-Za-z]{2,3}(?:-[A-Za-z0-9]{1,8}){0,6}")
_EARLIEST_S = datetime(1990, 1, 1, tzinfo=UTC).timestamp()
_AHEAD_S = 600.0


def digest_of(*parts: str) -> str:
    """The SHA-256 of the parts' UTF-8 with a zero byte between them, in hexadecimal."""
    return hashlib.sha256("\0".join(parts).encode("utf-8")).hexdigest()


def guid_of(found: str | None, title: str, text: str, url: str | None) -> str:
    """The source's identifier, or its digest where it is long; else one of the content."""
    guid = clean_line(found or "", 100 * GUID_CHARACTERS)
    if not guid:
        return "sha256:" + digest_of(title, text, url or "")
    return guid if len(guid) <= GUID_CHARACTERS else "sha256:" + digest_of(guid)


def url_of(found: str | None) -> str | None:
    """An http or https address of at most 2,000 characters, else None."""
    url = clean_line(found or "", URL_CHARACTERS + 1).replace(" ", "%20")
    return url if len(url) <= URL_CHARACTERS and _WEB_ADDRESS.fullmatch(url) else None


def language_of(found: str | None) -> str | None:
    """A tag of the shape of BCP 47 in its usual case (`pt-BR`, `zh-Hant`), else None."""
    # What is cut here is longer than the longest match.
    tag = clean_line(found or "", 64).replace("_", "-")
    if not _LANGUAGE.fullmatch(tag):
        return None
    language, *rest = tag.lower().split("-")
    return "-".join([language, *map(_usual_case, rest)])


def _usual_case(subtag: str) -> str:
    if len(subtag) == 2:
        return subtag.upper()
    return subtag.title() if len(subtag) == 4 and subtag.isalpha() else subtag


def date_of(published_s: float | None, now_s: float) -> tuple[float, bool]:
    """The date and whether it is the source's own.

    A date before 1990 or more than ten minutes ahead of our clock is not believed: the item
    then has the time at which it was first seen.
    """
    if published_s is not None and _EARLIEST_S <= published_s <= now_s + _AHEAD_S:
        return float(published_s), True
    return now_s, False
