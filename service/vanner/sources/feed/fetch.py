"""Asking for a feed over HTTP: conditional, bounded in time and size, redirects in our hands."""

from __future__ import annotations

from dataclasses import dataclass
from urllib.parse import urljoin, urlsplit

import httpx

from vanner import __version__
from vanner.sources.feed.body import BodyError, bounded_body
from vanner.sources.feed.deadline import Deadline

_HEADERS = {
    "User-Agent": f"Vanner/{__version__}",
    "Accept": (
        "application/atom+xml, application/rss+xml, application/feed+json, "
        "application/rdf+xml, application/xml;q=0.9, text/xml;q=0.9, */*;q=0.1"
    ),
    # Only what bounded_body can decompress step by step.
    "Accept-Encoding": "gzip, deflate",
    # The next poll is minutes away, and the deadline must see each connection begin.
    "Connection": "close",
}
_PERMANENT = (301, 308)
_REDIRECTS = (*_PERMANENT, 302, 303, 307)
_BODY_STATUSES = (200, 203)
_CORRECT = "correct its address in the settings"


@dataclass(frozen=True, slots=True)
class FetchLimits:
    """How much of anything one poll of a feed may take.

    Attributes:
        connect_s: Seconds until a connection stands.
        read_s: Seconds without a byte.
        total_s: Seconds for the whole poll, redirects included.
        body_bytes: The largest body in bytes, after decompression.
        redirects: How many redirects in a row are followed.
    """

    connect_s: float = 10.0
    read_s: float = 20.0
    total_s: float = 60.0
    body_bytes: int = 10 * 1024 * 1024
    redirects: int = 5


@dataclass(frozen=True, slots=True)
class Validators:
    """What makes the next request conditional: they hold for the address that gave them."""

    url: str
    etag: str | None = None
    modified: str | None = None


@dataclass(frozen=True, slots=True)
class Fetched:
    """An answer after all redirects.

    Attributes:
        url: The address that gave the answer.
        moved_to: Where the address asked has moved for good, or None.
        body: Decompressed; empty unless `status` is 200 or 203.
    """

    status: int
    headers: httpx.Headers
    body: bytes
    url: str
    moved_to: str | None


@dataclass(frozen=True, slots=True)
class Credentials:
    """A user's name and password, meant for the host of `url` and no other."""

    url: str
    username: str
    password: str


class FetchError(Exception):
    """No answer to work with; the message is a clause that follows the source's name.

    Attributes:
        advice: A clause that says what to do.
    """

    def __init__(self, clause: str, advice: str = "it is tried again later") -> None:
        super().__init__(clause)
        self.advice = advice


def fetch(
    client: httpx.Client,
    url: str,
    *,
    validators: Validators | None,
    credentials: Credentials | None,
    limits: FetchLimits,
) -> Fetched:
    """Ask for `url` and follow its redirects, at most `limits.redirects` of them.

    Raises:
        FetchError: There is no connection, no answer in time, none within the size, or the
            redirects lead nowhere.
    """
    with Deadline(limits.total_s) as deadline:
        try:
            return _follow(client, url, validators, credentials, limits, deadline)
        except (httpx.HTTPError, httpx.InvalidURL, ValueError) as error:
            if deadline.passed:
                raise _too_long(limits) from error
            raise _failure(error, limits) from error


def _follow(
    client: httpx.Client,
    start: str,
    validators: Validators | None,
    credentials: Credentials | None,
    limits: FetchLimits,
    deadline: Deadline,
) -> Fetched:
    url, moved_to, permanent = start, None, True
    seen = {url}
    for _ in range(limits.redirects + 1):
        answer = _ask(client, url, validators, credentials, limits, deadline)
        if isinstance(answer, Fetched):
            return Fetched(answer.status, answer.headers, answer.body, url, moved_to)
        status, url = answer
        if url in seen:
            raise FetchError("its redirects go round in a circle", _CORRECT)
        seen.add(url)
        # What follows a temporary step may be gone tomorrow, whatever it calls itself.
        permanent = permanent and status in _PERMANENT
        moved_to = url if permanent else moved_to
    raise FetchError(f"it redirects more than {limits.redirects} times", _CORRECT)


def _ask(
    client: httpx.Client,
    url: str,
    validators: Validators | None,
    credentials: Credentials | None,
    limits: FetchLimits,
    deadline: Deadline,
) -> Fetched | tuple[int, str]:
    """One request: an answer, or a redirect's status and the address that it names."""
    request = client.build_request(
        "GET",
        url,
        headers=_HEADERS | _conditions(validators, url),
        timeout=httpx.Timeout(limits.read_s, connect=limits.connect_s),
        extensions={"trace": deadline.trace},
    )
    response = client.send(
        request, stream=True, auth=_auth(credentials, url), follow_redirects=False
    )
    try:
        location = response.headers.get("location")
        if response.status_code in _REDIRECTS and location:
            return response.status_code, _target(url, location)
        body = b""
        if response.status_code in _BODY_STATUSES:
            encoding = response.headers.get("content-encoding", "")
            body = bounded_body(response.iter_raw(), encoding, limits.body_bytes)
        if deadline.passed:
            # A body without a length ends wherever its connection does, so this one was cut.
            raise _too_long(limits)
        return Fetched(response.status_code, response.headers, body, url, None)
    except BodyError as error:
        raise FetchError(f"its body cannot be taken: {error}") from error
    finally:
        response.close()


def _auth(credentials: Credentials | None, url: str) -> httpx.Auth | None:
    if credentials is None or not _same_host(credentials.url, url):
        return None
    return httpx.BasicAuth(credentials.username, credentials.password)


def _conditions(validators: Validators | None, url: str) -> dict[str, str]:
    if validators is None or validators.url != url:
        return {}
    headers = {"If-None-Match": validators.etag, "If-Modified-Since": validators.modified}
    return {name: value for name, value in headers.items() if value}


def _target(url: str, location: str) -> str:
    target = urljoin(url, location.strip()).partition("#")[0]
    if urlsplit(target).scheme not in ("http", "https") or not urlsplit(target).hostname:
        raise FetchError("it redirects to an address that is not http or https", _CORRECT)
    return target


def _same_host(start: str, url: str) -> bool:
    """Whether `url` may have the password meant for `start`: never on less secure ground."""
    from_, to = urlsplit(start), urlsplit(url)
    if from_.hostname != to.hostname:
        return False
    upgraded = (from_.scheme, to.scheme) == ("http", "https")
    if upgraded and from_.port in (None, 80) and to.port in (None, 443):
        return True
    return (from_.scheme, from_.port) == (to.scheme, to.port)


def _too_long(limits: FetchLimits) -> FetchError:
    return FetchError(f"it did not send its whole answer within {limits.total_s:g} s")


def _failure(error: Exception, limits: FetchLimits) -> FetchError:
    if isinstance(error, httpx.ConnectTimeout):
        return FetchError(f"no connection stood within {limits.connect_s:g} s")
    if isinstance(error, httpx.TimeoutException):
        return FetchError(f"it sent nothing for {limits.read_s:g} s")
    if isinstance(error, httpx.ConnectError):
        return FetchError(f"no connection can be made ({_short(error)})")
    if isinstance(error, httpx.InvalidURL | httpx.UnsupportedProtocol | ValueError):
        return FetchError("its address or one that it redirects to cannot be used", _CORRECT)
    return FetchError(f"its answer broke off or is no HTTP ({_short(error)})")


def _short(error: Exception) -> str:
    return " ".join(str(error).split())[:120] or type(error).__name__
