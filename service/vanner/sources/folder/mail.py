"""A mail (RFC 5322, MIME) as an item: its subject, its date and the text of its body."""

from __future__ import annotations

import itertools
import re
from collections.abc import Iterator
from datetime import UTC
from email import message_from_bytes
from email.message import Message
from email.policy import Compat32, Policy, compat32
from email.utils import parsedate_to_datetime

from vanner.records import RawItem
from vanner.sources.folder.words import decode_words

_HEADER_CHARACTERS = 8000
# A mail of 50 MB in base64 has some 700,000.
_MOST_LINES = 2_000_000
_MOST_PARTS = _MOST_HEADERS = 1000
_IDENTIFIER = re.compile(r"<\s*([^<>\s]{1,1000})\s*>")
_TEXTS = ("text/plain", "text/html")


class _ExcessError(Exception):
    """The mail has more parts or headers than any that people send."""


class _Part(Message):
    """A part whose number of headers is bounded."""

    def set_raw(self, name: str, value: str) -> None:
        if len(self) >= _MOST_HEADERS:
            raise _ExcessError
        super().set_raw(name, value)


class _BoundedHeaders(Compat32):
    """Reads the structure of any mail, where the library's newer policy raises on some.

    Headers are cut: the library's work grows with the square of a parameter list's length.
    """

    def header_source_parse(self, sourcelines: list[str]) -> tuple[str, str]:
        name, value = super().header_source_parse(sourcelines)
        return name, value[:_HEADER_CHARACTERS]


def mail_item(data: bytes, guid: str) -> RawItem | str:
    """The item of a mail's bytes, or a clause that says why there is none.

    The first text/plain part that is no attachment is the text, else the first text/html
    part. A broken header or encoding gives what can be read of it.

    Args:
        data: The mail as it was sent.
        guid: The identifier of a mail that has no Message-ID.
    """
    if data.count(b"\n") > _MOST_LINES:
        return f"it has more than {_MOST_LINES} lines"
    try:
        mail = _parsed(data)
        bodies = dict(reversed([*_bodies(mail)]))
    except RecursionError:
        return "its parts are nested too deeply"
    except _ExcessError:
        return f"it has more than {_MOST_PARTS} parts, or as many headers in one"
    title = decode_words(_header(mail, "Subject"))
    date_raw = _header(mail, "Date").strip()
    identifier = _IDENTIFIER.search(_header(mail, "Message-ID"))
    kind = next((kind for kind in _TEXTS if kind in bodies), None)
    if kind is None and not title:
        return "it has neither a subject nor a text"
    body, charset = bodies[kind] if kind else (b"", None)
    return RawItem(
        guid=identifier[1] if identifier else guid,
        title=title,
        content_text=None if kind == "text/html" else body,
        content_html=body if kind == "text/html" else None,
        date_raw=date_raw or None,
        published_s=_seconds(date_raw),
        charset=charset,
    )


def _parsed(data: bytes) -> Message:
    parts = itertools.count()

    def part(policy: Policy = compat32) -> _Part:
        # The library makes one more than it uses.
        if next(parts) > _MOST_PARTS:
            raise _ExcessError
        return _Part(policy=policy)

    return message_from_bytes(data, part, policy=_BoundedHeaders())


def _header(mail: Message, name: str) -> str:
    """The first header of that name, unfolded; "" where there is none.

    Bytes beyond ASCII stand in it as lone surrogates.
    """
    for key, value in mail.raw_items():
        if key.lower() == name.lower():
            return re.sub(r"[\r\n]+", "", str(value))
    return ""


def _bodies(mail: Message) -> Iterator[tuple[str, tuple[bytes, str | None]]]:
    """Kind, bytes and charset of each text that is no attachment, in the mail's order."""
    waiting = [mail]
    while waiting:
        part = waiting.pop()
        kind, payload = part.get_content_type(), part.get_payload()
        if part.get_content_disposition() == "attachment" or kind.startswith("message/"):
            continue
        if isinstance(payload, list):
            waiting.extend(reversed([one for one in payload if isinstance(one, Message)]))
        elif kind in _TEXTS:
            data = _payload(part)
            if data.strip():
                yield kind, (data, _charset(part))


def _payload(part: Message) -> bytes:
    try:
        data = part.get_payload(decode=True)
    except ValueError:
        # The transfer encoding is broken beyond the library's help: the text as it stands.
        data = str(part.get_payload()).encode("utf-8", "surrogateescape")
    return data if isinstance(data, bytes) else b""


def _charset(part: Message) -> str | None:
    try:
        return part.get_content_charset()
    except (ValueError, LookupError):
        return None


def _seconds(date: str) -> float | None:
    """A header's date in Unix seconds; one without a zone is taken as UTC."""
    try:
        moment = parsedate_to_datetime(date)
        return (moment if moment.tzinfo else moment.replace(tzinfo=UTC)).timestamp()
    except (TypeError, ValueError, IndexError, OverflowError):
        return None
