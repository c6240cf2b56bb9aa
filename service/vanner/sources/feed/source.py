"""The feed source: polls one address and keeps in its cursor what makes the next poll cheap."""

from __future__ import annotations

from typing import NoReturn
from urllib.parse import urlsplit, urlunsplit

import httpx
import structlog

from vanner.errors import SettingsError, SourceError
from vanner.records import Cursor, Json, Poll
from vanner.settings import FeedSettings
from vanner.sources.feed.dates import retry_at_s
from vanner.sources.feed.fetch import (
    Credentials,
    Fetched,
    FetchError,
    FetchLimits,
    Validators,
    fetch,
)
from vanner.sources.feed.parse import ParsedFeed, UnreadableFeedError, parse_feed

_LOG = structlog.get_logger()
# Longer validators are nothing that a server needs back, and the cursor is a row.
_MAX_VALIDATOR_LENGTH = 1000
_LATER = "it is tried again later"
_ADVICE = {
    401: "check its username and password in the settings",
    403: "check its username and password in the settings",
    404: "check its address in the settings",
    429: "poll it less often",
}


class FeedSource:
    """An RSS, Atom or JSON Feed at an http or https address.

    The cursor holds `url` (as in the settings, so that a changed address begins anew),
    `polled`, `moved_to` (where permanent redirects led) and the validators `etag` and
    `modified` with the address `validated` that they belong to.

    Args:
        settings: The source's part of the settings.
        client: Used where given, and left open by `close`; sharing one saves each source
            its own TLS set-up.
        limits: How much one poll may take.
    """

    def __init__(
        self,
        settings: FeedSettings,
        *,
        client: httpx.Client | None = None,
        limits: FetchLimits | None = None,
    ) -> None:
        self._settings = settings
        self._limits = limits or FetchLimits()
        self._owns_client = client is None
        self._client = client if client is not None else httpx.Client()

    @property
    def name(self) -> str:
        """The source's name in the settings."""
        return self._settings.name

    def poll(self, cursor: Cursor, now_s: float) -> Poll:
        """Ask once and return the entries that the feed lists, oldest first.

        What a feed lists when it is first polled only teaches: it is old news by then. A feed
        that is gone for good gives no items and `stopped`.

        Raises:
            SourceError: No feed could be had; `retry_at_s` is set where the server asked.
        """
        known = cursor if cursor.get("url") == self._settings.url else {}
        try:
            fetched = fetch(
                self._client,
                _string(known, "moved_to") or self._settings.url,
                validators=_validators(known),
                credentials=self._credentials(),
                limits=self._limits,
            )
        except FetchError as error:
            self._fail(str(error), error.advice, cause=error)
        later_s = retry_at_s(fetched.headers.get("retry-after"), now_s)
        following = self._cursor(known, fetched)
        if fetched.status == 304 and known.get("polled"):
            return Poll((), following, retry_at_s=later_s)
        if fetched.status == 410:
            return self._gone(cursor)
        if fetched.status not in (200, 203):
            advice = _ADVICE.get(fetched.status, _LATER)
            self._fail(f"it answers with HTTP status {fetched.status}", advice, later_s)
        feed = self._parsed(fetched, later_s)
        return Poll(
            feed.items,
            following,
            teaches=not known.get("polled"),
            faults=tuple(f"{self._place()}: {fault}." for fault in feed.faults),
            retry_at_s=later_s,
        )

    def close(self) -> None:
        """Let go of the connections, unless the client was handed in."""
        if self._owns_client:
            self._client.close()

    def _credentials(self) -> Credentials | None:
        username, secret = self._settings.username, self._settings.password
        if username is None:
            return None
        try:
            # Read at each poll, so that a password can be changed while the daemon runs.
            password = secret.read() if secret is not None else ""
        except SettingsError as error:
            raise SourceError(f"{self._place()}: {error}") from error
        return Credentials(self._settings.url, username, password)

    def _parsed(self, fetched: Fetched, later_s: float | None) -> ParsedFeed:
        advice = "check that its address in the settings is a feed's"
        try:
            feed = parse_feed(
                fetched.body,
                content_type=fetched.headers.get("content-type"),
                base_url=fetched.url,
                language=self._settings.language,
            )
        except UnreadableFeedError as error:
            self._fail(str(error), advice, later_s, cause=error)
        if feed.faults and not feed.items:
            # As a success it would use up the first poll, and what the mended feed lists
            # later would pass for news.
            self._fail(f"it holds no entry that can be read, and {feed.faults[0]}", later_s=later_s)
        return feed

    def _cursor(self, known: Cursor, fetched: Fetched) -> dict[str, Json]:
        following: dict[str, Json] = {"url": self._settings.url, "polled": True}
        moved_to = fetched.moved_to or _string(known, "moved_to")
        if moved_to is not None:
            following["moved_to"] = moved_to
        given = {
            "etag": _validator(fetched.headers.get("etag")),
            "modified": _validator(fetched.headers.get("last-modified")),
        }
        if fetched.status == 304:
            # Headers that are left out of such an answer still hold.
            given = {key: value or _string(known, key) for key, value in given.items()}
        if any(given.values()):
            following["validated"] = fetched.url
            following.update({key: value for key, value in given.items() if value})
        return following

    def _gone(self, cursor: Cursor) -> Poll:
        _LOG.warning("feed_gone", source=self.name, url=shown(self._settings.url))
        sentence = (
            f"{self._place()} is gone for good (HTTP status 410) and is no longer polled; "
            "give it a new address in the settings or take it out."
        )
        return Poll((), dict(cursor), stopped=sentence)

    def _place(self) -> str:
        return f'The feed "{self.name}" ({shown(self._settings.url)})'

    def _fail(
        self,
        clause: str,
        advice: str = _LATER,
        later_s: float | None = None,
        cause: Exception | None = None,
    ) -> NoReturn:
        raise SourceError(f"{self._place()}: {clause}; {advice}.", later_s) from cause


def shown(url: str) -> str:
    """An address for people, without the passwords and keys that it may hold."""
    parts = urlsplit(url)
    host = parts.netloc.rpartition("@")[2]
    return urlunsplit((parts.scheme, host, parts.path, "", ""))


def _validators(known: Cursor) -> Validators | None:
    url = _string(known, "validated")
    if url is None:
        return None
    return Validators(url, _string(known, "etag"), _string(known, "modified"))


def _validator(header: str | None) -> str | None:
    if header is None or len(header) > _MAX_VALIDATOR_LENGTH:
        return None
    return header if header.isascii() and header.isprintable() else None


def _string(cursor: Cursor, key: str) -> str | None:
    value = cursor.get(key)
    return value if isinstance(value, str) else None
