"""Handing a mail to the server, in one transaction for all its recipients (RFC 5321)."""

from __future__ import annotations

import re
import smtplib
import ssl
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress

from vanner.alerts.lines import cut, one_line
from vanner.delivery.mime import envelope, mail_of, needs_utf8
from vanner.errors import DeliveryError
from vanner.records import Message
from vanner.settings import MailSettings

_REPLY_CELLS = 200


def send(
    message: Message,
    mail: MailSettings,
    password: str | None,
    *,
    before_data: Callable[[], None] | None = None,
) -> tuple[str, ...]:
    """Hand a message over to the mail server; the recipients that it refused.

    Args:
        message: What to send; all its recipients stand in its To field.
        mail: The server and how to speak to it. Its timeout holds for each step.
        password: For `mail.username`; unused without one.
        before_data: Called once the server has accepted sender and recipients, right before
            the text is offered. What it raises ends the attempt, and nothing is sent.

    Raises:
        DeliveryError: Nothing was sent. It is final where the server refused every recipient
            or the text for good, and where an address is none. It is `unconfirmed`, and final
            too, where the whole text went out and no answer came: the server may have it.
    """
    text = mail_of(message, mail.sender).as_bytes()
    with _faults_worded(mail):
        server = _connected(mail)
    try:
        with _faults_worded(mail):
            if mail.encryption == "starttls":
                server.starttls(context=ssl.create_default_context())
            _log_in(server, mail, password)
            refused = _name_parties(server, message, mail)
        if before_data is not None:
            before_data()
        with _faults_worded(mail):
            _hand_over(server, text, mail)
    finally:
        with suppress(smtplib.SMTPException, OSError):
            server.quit()
        server.close()
    return refused


@contextmanager
def _faults_worded(mail: MailSettings) -> Iterator[None]:
    try:
        yield
    except smtplib.SMTPResponseException as error:
        raise _refusal("turned us away", mail, error.smtp_code, error.smtp_error) from error
    except (smtplib.SMTPException, OSError) as error:
        reason = error.strerror or str(error)
        raise DeliveryError(
            f"The mail server {_place(mail)} could not be used "
            f"({one_line(reason).rstrip('.') or type(error).__name__}); "
            "check [mail] in the settings, and the server."
        ) from error


def _connected(mail: MailSettings) -> smtplib.SMTP:
    if mail.encryption == "tls":
        context = ssl.create_default_context()
        return smtplib.SMTP_SSL(mail.host, mail.port, timeout=mail.timeout, context=context)
    return smtplib.SMTP(mail.host, mail.port, timeout=mail.timeout)


def _log_in(server: smtplib.SMTP, mail: MailSettings, password: str | None) -> None:
    if mail.username is None:
        server.ehlo_or_helo_if_needed()
        return
    if password is None:
        raise DeliveryError(
            f"There is no password for {mail.username} at {_place(mail)}; "
            "set [mail] password in the settings."
        )
    # No cause is chained and no answer quoted below: either could hold the password.
    try:
        server.login(mail.username, password)
    except smtplib.SMTPAuthenticationError as error:
        raise DeliveryError(
            f"The mail server {_place(mail)} refused the login of {mail.username} "
            f"({error.smtp_code}); correct username and password in [mail]."
        ) from None
    except UnicodeError:
        raise DeliveryError(
            f"The login of {mail.username} at {_place(mail)} needs a username and password "
            "in ASCII; choose others."
        ) from None


def _name_parties(server: smtplib.SMTP, message: Message, mail: MailSettings) -> tuple[str, ...]:
    """Name sender and recipients; the recipients that were refused, where some were not."""
    beyond_ascii = needs_utf8(message, mail.sender)
    if beyond_ascii and not (server.does_esmtp and server.has_extn("smtputf8")):
        raise DeliveryError(
            f"The mail server {_place(mail)} takes no addresses beyond ASCII (RFC 6531); "
            "use plain ones.",
            final=True,
        )
    code, reply = server.mail(mail.sender, ("SMTPUTF8", "BODY=8BITMIME") if beyond_ascii else ())
    if code != 250:
        raise _refusal(f"refused the sender {mail.sender}", mail, code, reply)
    recipients = envelope(message)
    refused: dict[str, tuple[int, bytes]] = {}
    for recipient in recipients:
        code, reply = server.rcpt(recipient)
        if code not in (250, 251):
            refused[recipient] = (code, reply)
        if code == 421:
            break
    if len(refused) == len(recipients) or code == 421:
        code, reply = min(refused.values())
        # One passing refusal among them is enough to try again.
        raise _refusal("refused every recipient", mail, code, reply, final=code >= 500)
    return tuple(refused)


def _hand_over(server: smtplib.SMTP, text: bytes, mail: MailSettings) -> None:
    code, reply = server.docmd("DATA")
    if code != 354:
        raise _refusal("refused the mail", mail, code, reply, final=code >= 500)
    # A line that begins with a dot gets another one (RFC 5321, section 4.5.2).
    server.send(re.sub(rb"(?m)^\.", b"..", text.rstrip(b"\r\n")) + b"\r\n.\r\n")
    try:
        code, reply = server.getreply()
    except (smtplib.SMTPServerDisconnected, OSError) as error:
        raise DeliveryError(
            f"The mail server {_place(mail)} was given the whole mail and did not answer; "
            "look whether it arrived, for it is not sent again.",
            final=True,
            unconfirmed=True,
        ) from error
    if not 200 <= code < 300:
        raise _refusal("refused the mail", mail, code, reply, final=code >= 500)


def _place(mail: MailSettings) -> str:
    return f"{mail.host}:{mail.port}"


def _refusal(
    what: str, mail: MailSettings, code: int, reply: bytes | str, *, final: bool = False
) -> DeliveryError:
    said = reply.decode("utf-8", "replace") if isinstance(reply, bytes) else reply
    answer = cut(f"{code} {said}".strip(), _REPLY_CELLS).rstrip(".")
    return DeliveryError(
        f"The mail server {_place(mail)} {what} ({answer}); ask who runs it.", final=final
    )
