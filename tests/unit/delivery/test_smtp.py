"""Handing mail to a real server on the loopback address."""

import email
import email.policy
import socket
from datetime import UTC, datetime

import pytest

from vanner.delivery import send
from vanner.errors import DatabaseBusyError, DeliveryError
from vanner.records import Message
from vanner.settings import MailSettings

HOST = "127.0.0.1"
USERNAME, PASSWORD = "desk", "s3cret-Pass"  # as in conftest.py
CREATED_S = datetime(2026, 3, 4, 6, 12, 30, tzinfo=UTC).timestamp()


def message(**changes):
    fields = {
        "key": "alert-metro-41",
        "desk": "metro",
        "recipients": ("day@example.org", "night@example.org"),
        "subject": "[metro] Osprey aground",
        "body_text": "Osprey aground\n.\nfrom the dot on\n..two dots\nFrom the end\n",
        "body_html": "<p>Osprey aground</p>\n",
        "created_s": CREATED_S,
    }
    return Message(**(fields | changes))


def settings(port, **changes):
    fields = {
        "host": HOST,
        "port": port,
        "sender": "vanner@desk.example.org",
        "encryption": "none",
        "timeout": 5.0,
    }
    return MailSettings(**(fields | changes))


def received(inbox):
    (envelope,) = inbox.envelopes
    return email.message_from_bytes(envelope.content, policy=email.policy.default)


def content(mail, kind):
    return mail.get_body((kind,)).get_content().replace("\r\n", "\n")


def test_a_mail_arrives_with_text_and_html_as_alternatives(serve, inbox):
    assert send(message(), settings(serve()), None) == ()
    mail = received(inbox)
    assert mail.get_content_type() == "multipart/alternative"
    assert [part.get_content_type() for part in mail.iter_parts()] == ["text/plain", "text/html"]
    assert content(mail, "plain") == message().body_text
    assert content(mail, "html") == message().body_html


def test_all_recipients_share_one_transaction_and_stand_in_the_to_field(serve, inbox):
    send(message(), settings(serve()), None)
    (envelope,) = inbox.envelopes
    assert envelope.mail_from == "vanner@desk.example.org"
    assert envelope.rcpt_tos == ["day@example.org", "night@example.org"]
    assert received(inbox)["To"] == "day@example.org, night@example.org"


def test_a_recipient_named_twice_gets_the_mail_once(serve, inbox):
    send(message(recipients=("a@example.org", "a@example.org")), settings(serve()), None)
    assert inbox.envelopes[0].rcpt_tos == ["a@example.org"]


def test_the_headers_say_when_from_whom_and_that_no_person_wrote_it(serve, inbox):
    send(message(), settings(serve()), None)
    mail = received(inbox)
    assert mail["From"] == "vanner@desk.example.org"
    assert mail["Date"].datetime == datetime(2026, 3, 4, 6, 12, 30, tzinfo=UTC)
    assert mail["Auto-Submitted"] == "auto-generated"  # RFC 3834, section 5


def test_the_message_id_is_the_same_each_time_and_another_for_another_message(serve, inbox):
    port = serve()
    for one in (message(), message(), message(created_s=CREATED_S + 60), message(key="x y>\n")):
        send(one, settings(port), None)
    ids = [email.message_from_bytes(e.content)["Message-ID"] for e in inbox.envelopes]
    assert ids[0] == ids[1] == f"<alert-metro-41.{int(CREATED_S)}@desk.example.org>"
    assert ids[2] != ids[0]
    assert ids[3] == f"<x-y.{int(CREATED_S)}@desk.example.org>"


def test_text_beyond_ascii_arrives_whole_and_travels_in_seven_bits(serve, inbox):
    subject = "[Küste] 港の工場で粉ミルク回収, čtyři sta kusů staženo – více později, ještě dnes"
    body = "Ærøskøbing: 港の工場 " + "ž" * 300 + "\n"
    send(
        message(subject=subject, body_text=body, body_html=f"<p>{body}</p>"),
        settings(serve()),
        None,
    )
    assert inbox.envelopes[0].content.isascii()
    mail = received(inbox)
    assert mail["Subject"] == subject
    assert content(mail, "plain") == body
    assert content(mail, "html") == f"<p>{body}</p>\n"


def test_a_very_long_line_arrives_whole_and_travels_in_short_ones(serve, inbox):
    body = "https://a.example/" + "x" * 3000 + "\n"
    send(message(body_text=body), settings(serve()), None)
    assert content(received(inbox), "plain") == body
    # RFC 5322, section 2.1.1: no line may be longer than 998 characters.
    assert max(map(len, inbox.envelopes[0].content.split(b"\r\n"))) <= 998


@pytest.mark.parametrize(
    "subject",
    [
        "Flood\r\nBcc: spy@example.org\r\n\r\n<script>",
        "Flood\nX-Spy: 1",
        "Flood\rX-Spy: 1",
        "Flood\x85X-Spy: 1\u2028X-Spy: 2\x0bX-Spy: 3",
        # An encoded word (RFC 2047) with a line break in it.
        "=?utf-8?q?Flood=0AX-Spy:_1?=",
        "=?utf-8?b?Rmxvb2QKWC1TcHk6IDE=?= " + "ž" * 90,
        "Flood \ud800 lone surrogate",
    ],
)
def test_a_subject_cannot_bring_headers_of_its_own(serve, inbox, subject):
    send(message(subject=subject), settings(serve()), None)
    mail = received(inbox)
    expected = {"From", "To", "Subject", "Date", "Message-ID", "Auto-Submitted"}
    # aiosmtpd itself adds X-Peer and the like in other handlers only.
    assert set(mail.keys()) == expected | {"MIME-Version", "Content-Type"}
    assert inbox.envelopes[0].rcpt_tos == ["day@example.org", "night@example.org"]
    assert content(mail, "plain") == message().body_text


def test_further_headers_are_added_but_replace_and_break_none(serve, inbox):
    headers = {"X-Desk": "metro\nBcc: a@example.org", "Subject": "other", "Bad\nName": "x"}
    send(message(headers=headers), settings(serve()), None)
    mail = received(inbox)
    assert mail["X-Desk"] == "metro Bcc: a@example.org"
    assert mail.get_all("Subject") == ["[metro] Osprey aground"]
    assert mail["Bcc"] is None


def test_recipients_that_were_refused_are_returned_and_the_others_get_the_mail(serve, inbox):
    inbox.replies["day@example.org"] = "550 unknown"
    assert send(message(), settings(serve()), None) == ("day@example.org",)
    assert inbox.envelopes[0].rcpt_tos == ["night@example.org"]


@pytest.mark.parametrize(
    ("day", "night", "final"),
    [("550 unknown", "551 moved", True), ("550 unknown", "450 later", False)],
)
def test_refusing_every_recipient_is_final_unless_one_refusal_is_passing(
    serve, inbox, day, night, final
):
    inbox.replies = {"day@example.org": day, "night@example.org": night}
    calls = []
    with pytest.raises(DeliveryError) as caught:
        send(message(), settings(serve()), None, before_data=lambda: calls.append(1))
    assert (caught.value.final, caught.value.unconfirmed) == (final, False)
    assert calls == []
    assert inbox.envelopes == []


@pytest.mark.parametrize(("reply", "final"), [("554 no", True), ("451 later", False)])
def test_refusing_the_text_is_final_by_its_code(serve, inbox, reply, final):
    inbox.replies["DATA"] = reply
    with pytest.raises(DeliveryError) as caught:
        send(message(), settings(serve()), None)
    assert (caught.value.final, caught.value.unconfirmed) == (final, False)
    assert reply in str(caught.value)


def test_refusing_the_sender_is_not_final(serve, inbox):
    inbox.replies["MAIL"] = "550 not from you"
    with pytest.raises(DeliveryError, match=r"vanner@desk\.example\.org") as caught:
        send(message(), settings(serve()), None)
    assert not caught.value.final


def test_before_data_is_called_after_the_recipients_and_before_the_text(serve, inbox):
    port = serve()
    send(message(), settings(port), None, before_data=lambda: inbox.log.append("before"))
    assert inbox.log == [
        "MAIL",
        "RCPT day@example.org",
        "RCPT night@example.org",
        "before",
        "DATA",
    ]


@pytest.mark.parametrize("error", [DatabaseBusyError("busy"), OSError("disk")])
def test_what_before_data_raises_comes_through_and_nothing_is_sent(serve, inbox, error):
    def fail():
        raise error

    with pytest.raises(type(error)) as caught:
        send(message(), settings(serve()), None, before_data=fail)
    assert caught.value is error
    assert inbox.envelopes == []


def test_a_login_with_the_right_password_is_let_in(serve_with_login, inbox):
    port = serve_with_login(auth_require_tls=False)
    send(message(), settings(port, username=USERNAME), PASSWORD)
    assert inbox.users == [USERNAME]


def test_a_wrong_password_is_told_without_showing_it(serve_with_login, inbox):
    port = serve_with_login(auth_require_tls=False)
    with pytest.raises(DeliveryError, match="username and password") as caught:
        send(message(), settings(port, username=USERNAME), "wrong-Pass")
    assert not caught.value.final
    assert "wrong-Pass" not in str(caught.value)
    assert caught.value.__cause__ is None
    assert caught.value.__suppress_context__
    assert inbox.envelopes == []


def test_a_password_beyond_ascii_is_told_without_showing_it(serve_with_login):
    port = serve_with_login(auth_require_tls=False)
    with pytest.raises(DeliveryError, match="ASCII") as caught:
        send(message(), settings(port, username=USERNAME), "pässwort")
    assert "pässwort" not in str(caught.value)
    assert caught.value.__suppress_context__


def test_a_missing_password_is_told(serve_with_login):
    port = serve_with_login(auth_require_tls=False)
    with pytest.raises(DeliveryError, match="no password for desk"):
        send(message(), settings(port, username=USERNAME), None)


def test_a_server_without_logins_is_told(serve):
    with pytest.raises(DeliveryError, match="AUTH"):
        send(message(), settings(serve(), username=USERNAME), PASSWORD)


def test_starttls_encrypts_before_the_login(serve_with_login, inbox, certificate, monkeypatch):
    cert, context = certificate
    port = serve_with_login(tls_context=context, require_starttls=True)
    monkeypatch.setenv("SSL_CERT_FILE", str(cert))
    send(message(), settings(port, encryption="starttls", username=USERNAME), PASSWORD)
    assert inbox.secure == [True]
    assert inbox.users == [USERNAME]


def test_tls_from_the_first_byte_is_spoken(serve, inbox, certificate, monkeypatch):
    cert, context = certificate
    monkeypatch.setenv("SSL_CERT_FILE", str(cert))
    send(message(), settings(serve(ssl_context=context), encryption="tls"), None)
    assert len(inbox.envelopes) == 1


def test_a_certificate_that_nobody_vouches_for_is_refused(serve, inbox, certificate):
    _, context = certificate
    port = serve(tls_context=context, require_starttls=True)
    with pytest.raises(DeliveryError, match="certificate") as caught:
        send(message(), settings(port, encryption="starttls"), None)
    assert not caught.value.final
    assert inbox.log == []


def test_a_server_that_cannot_encrypt_gets_nothing_where_encryption_is_asked_for(serve, inbox):
    with pytest.raises(DeliveryError, match="STARTTLS"):
        send(message(), settings(serve(), encryption="starttls"), None)
    assert inbox.log == []


def test_addresses_beyond_ascii_go_to_a_server_that_takes_them(serve, inbox):
    send(message(recipients=("jürgen@example.org",)), settings(serve()), None)
    assert inbox.envelopes[0].rcpt_tos == ["jürgen@example.org"]
    assert received(inbox)["To"] == "jürgen@example.org"


def test_addresses_beyond_ascii_are_final_where_the_server_does_not_take_them(serve, inbox):
    with pytest.raises(DeliveryError, match="ASCII") as caught:
        send(
            message(recipients=("jürgen@example.org",)),
            settings(serve(enable_SMTPUTF8=False)),
            None,
        )
    assert caught.value.final
    assert inbox.log == []


@pytest.mark.parametrize(
    "recipients",
    [
        (),
        ("nobody",),
        ("@",),
        ("ö@",),
        ("a b@example.org",),
        ("a@example.org\nBcc: b@example.org",),
    ],
)
def test_a_message_without_usable_addresses_is_final_before_any_connection(recipients):
    with pytest.raises(DeliveryError) as caught:
        send(message(recipients=recipients), settings(1), None)
    assert caught.value.final
    assert "\n" not in str(caught.value)


def test_a_server_that_is_down_is_told_with_its_address_and_is_not_final():
    with socket.create_server((HOST, 0)) as gone:
        port = gone.getsockname()[1]
    with pytest.raises(DeliveryError, match=f"{HOST}:{port}.*refused") as caught:
        send(message(), settings(port), None)
    assert not caught.value.final


@pytest.mark.parametrize(
    ("greeting", "answers"),
    [
        (None, {}),
        ("220 hello", {"EHLO": None}),
        ("220 hello", {"MAIL": None}),
        ("220 hello", {"RCPT": None}),
        ("220 hello", {"DATA": None}),
        ("220 hello", {"MAIL": "CLOSE"}),
        ("220 hello", {"DATA": "CLOSE"}),
    ],
)
def test_a_server_that_falls_silent_before_it_has_the_text_can_be_tried_again(
    scripted, greeting, answers
):
    port = scripted(greeting, **answers)
    with pytest.raises(DeliveryError) as caught:
        send(message(), settings(port, timeout=0.3), None)
    assert (caught.value.final, caught.value.unconfirmed) == (False, False)


@pytest.mark.parametrize("answer", [None, "CLOSE"])
def test_a_server_that_falls_silent_after_the_text_is_not_tried_again(scripted, answer):
    port = scripted("220 hello", DATA="354 go on", TEXT=answer)
    with pytest.raises(DeliveryError) as caught:
        send(message(), settings(port, timeout=0.3), None)
    assert (caught.value.final, caught.value.unconfirmed) == (True, True)


def test_a_server_that_falls_silent_after_it_took_the_mail_has_taken_it(scripted):
    port = scripted("220 hello", DATA="354 go on", TEXT="250 taken", QUIT=None)
    assert send(message(), settings(port, timeout=0.3), None) == ()


@pytest.mark.parametrize("greeting", ["554 go away", "421 too busy", "SSH-2.0-x"])
def test_a_server_that_turns_everyone_away_is_not_final(scripted, greeting):
    with pytest.raises(DeliveryError) as caught:
        send(message(), settings(scripted(greeting)), None)
    assert not caught.value.final
    assert len(str(caught.value).splitlines()) == 1


def test_a_server_that_says_goodbye_between_recipients_is_not_final(scripted):
    with pytest.raises(DeliveryError, match="421 closing") as caught:
        send(message(), settings(scripted("220 hello", RCPT="421 closing")), None)
    assert not caught.value.final
