"""A message as an internet mail: RFC 5322 headers, one text and one HTML alternative."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import UTC, datetime
from email.errors import MessageError
from email.headerregistry import Address
from email.message import EmailMessage
from email.policy import SMTP
from email.utils import format_datetime

from vanner.alerts.lines import one_line
from vanner.errors import DeliveryError
from vanner.records import Message

_HEADER_NAME = re.compile(r"[A-Za-z0-9-]+")


def mail_of(message: Message, sender: str) -> EmailMessage:
    """The mail of a message; the same message always gives the same headers.

    The Message-ID is made of the message's key and its time. The key alone would come again
    from a database that was begun anew, and receivers drop what they believe to hold already.

    Args:
        message: Line breaks in its subject and headers become spaces.
        sender: The address that it comes from.

    Raises:
        DeliveryError: An address is none, or there is no recipient; final.
    """
    if not message.recipients:
        raise DeliveryError(
            f"The mail {message.key} has no recipient; name some at the desk {message.desk}.",
            final=True,
        )
    # Seven bits only: not every server on the way takes more.
    mail = EmailMessage(policy=SMTP.clone(cte_type="7bit", utf8=needs_utf8(message, sender)))
    mail["From"] = _address(sender)
    mail["To"] = [_address(recipient) for recipient in message.recipients]
    mail["Subject"] = _header_text(message.subject)
    mail["Date"] = format_datetime(datetime.fromtimestamp(int(message.created_s), UTC))
    mail["Message-ID"] = message_id(message, sender)
    # RFC 3834, section 5: no vacation notice or other automatic answer is wanted.
    mail["Auto-Submitted"] = "auto-generated"
    for name, value in message.headers.items():
        if _HEADER_NAME.fullmatch(name) and name not in mail:
            mail[name] = _header_text(value)
    mail.set_content(_encodable(message.body_text))
    mail.add_alternative(_encodable(message.body_html), subtype="html")
    return mail


def needs_utf8(message: Message, sender: str) -> bool:
    """Whether an address goes beyond ASCII, so that the server must know RFC 6531."""
    return not all(address.isascii() for address in (sender, *message.recipients))


def message_id(message: Message, sender: str) -> str:
    """The Message-ID: the key and the time of composing, at the sender's domain."""
    left = re.sub(r"[^A-Za-z0-9_-]+", "-", message.key).strip("-") or "message"
    domain = re.sub(r"[^A-Za-z0-9.-]+", "-", sender.rpartition("@")[2]).strip("-.")
    return f"<{left}.{int(message.created_s)}@{domain or 'localhost'}>"


def _header_text(text: str) -> str:
    """Untrusted text as a header's value: one line, and no encoded words (RFC 2047) of its own.

    A title that holds one would be decoded by receivers, and some releases of Python write a
    line break that hides in it into the header block.
    """
    return one_line(text).replace("=?", "= ?")


def _address(text: str) -> Address:
    local, _, domain = text.rpartition("@")
    # The library checks an address's form only where all of it is ASCII; letters beyond it
    # (RFC 6531) may stand wherever an ASCII letter may.
    plain = re.sub(r"[^\x00-\x7f]", "x", text)
    try:
        checked = Address(addr_spec=plain)
    except (MessageError, ValueError, IndexError):
        checked = None
    if checked is None or not (local and domain) or text != one_line(text):
        raise DeliveryError(
            f'"{one_line(text)}" is no mail address; correct it in the settings.', final=True
        )
    return checked if plain == text else Address(username=local, domain=domain)


def _encodable(text: str) -> str:
    return text.encode("utf-8", "replace").decode("utf-8")


def envelope(message: Message) -> Sequence[str]:
    """The recipients, each once, in their order."""
    return tuple(dict.fromkeys(message.recipients))
