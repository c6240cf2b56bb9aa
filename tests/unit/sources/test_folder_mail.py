"""Mail files as items, whole and broken."""

import base64
from email.message import EmailMessage
from email.policy import SMTP

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.clock import parse_iso
from vanner.records import RawItem
from vanner.sources.folder.mail import mail_item
from vanner.sources.folder.words import decode_words


def mail(subject="Gate shut", text="The gate is shut.", html=None):
    message = EmailMessage()
    message["Subject"] = subject
    message["Message-ID"] = "<7.gate@desk.example>"
    message["Date"] = "Fri, 03 May 2024 10:00:00 +0200"
    if text is not None:
        message.set_content(text)
        if html is not None:
            message.add_alternative(html, subtype="html")
    elif html is not None:
        message.set_content(html, subtype="html")
    return message


def item_of(message) -> RawItem:
    data = message if isinstance(message, bytes) else message.as_bytes(policy=SMTP)
    item = mail_item(data, "sha256:digest")
    assert isinstance(item, RawItem)
    return item


def test_a_plain_mail_gives_subject_date_identifier_and_text():
    item = item_of(mail())
    assert item.title == "Gate shut"
    assert item.guid == "7.gate@desk.example"
    assert item.content_text.decode().strip() == "The gate is shut."
    assert item.published_s == parse_iso("2024-05-03T08:00:00Z")
    assert item.date_raw == "Fri, 03 May 2024 10:00:00 +0200"


def test_the_plain_part_is_preferred_and_html_is_taken_without_one():
    both = item_of(mail(html="<p>Gate</p>"))
    assert (both.content_text.strip(), both.content_html) == (b"The gate is shut.", None)
    only = item_of(mail(text=None, html="<p>Gate</p>"))
    assert (only.content_text, only.content_html.strip()) == (None, b"<p>Gate</p>")


def test_html_is_taken_where_the_plain_part_is_blank():
    item = item_of(mail(text=" \n", html="<p>Gate</p>"))
    assert (item.content_text, item.content_html.strip()) == (None, b"<p>Gate</p>")


def test_attachments_and_attached_mails_are_ignored():
    message = mail(text=None)
    message.make_mixed()
    message.add_attachment("attached text", filename="a.txt")
    message.add_attachment(mail(text="inner text"))
    inner = EmailMessage()
    inner.set_content("Body after attachments.")
    message.attach(inner)
    assert item_of(message).content_text.strip() == b"Body after attachments."


def test_a_subject_is_decoded_across_its_words():
    data = (
        b"Subject: =?utf-8?B?" + base64.b64encode("Brü".encode()[:3]) + b"?=\r\n"
        b" =?utf-8?B?"
        + base64.b64encode("Brü".encode()[3:])
        + b"?= =?iso-8859-1?q?cke_zu?= now\r\n"
        b"\r\nText"
    )
    assert item_of(data).title == "Brücke zu now"


@pytest.mark.parametrize(
    ("header", "title"),
    [
        ("=?utf-8*en?Q?a=20b?=", "a b"),
        ("a =?x-none?Q?b=C3=BC?= c", "a bü c"),
        ("=?utf-8?B?/?=", "=?utf-8?B?/?="),
        ("=?utf-8?Q?open", "=?utf-8?Q?open"),
        (r"C:\u12 \N{x}", r"C:\u12 \N{x}"),
        ("", ""),
    ],
)
def test_broken_words_of_a_header_stay_as_they_stand(header, title):
    assert decode_words(header) == title


def test_a_subject_of_bare_bytes_is_decoded():
    assert item_of("Subject: Brücke zu\n\nText".encode()).title == "Brücke zu"
    assert item_of("Subject: Brücke zu\n\nText".encode("cp1252")).title == "Brücke zu"


def test_a_part_s_declared_charset_is_handed_on():
    data = b"Subject: a\nContent-Type: text/plain; charset=koi8-r\n\n" + "Мост".encode("koi8-r")
    item = item_of(data)
    assert (item.content_text, item.charset) == ("Мост".encode("koi8-r"), "koi8-r")


@pytest.mark.parametrize("encoding", [b"base64", b"quoted-printable"])
def test_transfer_encodings_are_undone(encoding):
    body = {b"base64": b"VGhlIGdhdGU=", b"quoted-printable": b"The=20gate"}[encoding]
    data = b"Subject: a\nContent-Transfer-Encoding: " + encoding + b"\n\n" + body
    assert item_of(data).content_text == b"The gate"


@pytest.mark.parametrize("encoding", [b"base64", b"quoted-printable", b"uuencode", b"x-none"])
@pytest.mark.parametrize("body", [b"\xff\xfe!", b"=ZZ=", b"begin 666 x\n\x00!!", b"QUJ"])
def test_a_broken_transfer_encoding_does_not_raise(encoding, body):
    data = b"Subject: a\nContent-Transfer-Encoding: " + encoding + b"\n\n" + body
    assert item_of(data).title == "a"


@pytest.mark.parametrize(
    ("date", "time"),
    [
        ("3 May 2024 10:00 GMT", "2024-05-03T10:00:00Z"),
        ("Fri, 3 May 2024 10:00:00 -0000", "2024-05-03T10:00:00Z"),
        ("yesterday", None),
        ("99 Foo 2024 99:99:99 +9999", None),
        ("", None),
    ],
)
def test_a_date_that_cannot_be_read_is_none(date, time):
    item = item_of(f"Subject: a\nDate: {date}\n\nText".encode())
    assert item.published_s == (None if time is None else parse_iso(time))
    assert item.date_raw == (date or None)


@pytest.mark.parametrize("header", ["", "Message-ID:\n", "Message-ID: <>\n", "Message-ID: < >\n"])
def test_a_mail_without_an_identifier_has_its_digest(header):
    assert item_of(f"{header}Subject: a\n\nText".encode()).guid == "sha256:digest"


def test_parts_nested_beyond_reason_are_told():
    head = "".join(
        f'Content-Type: multipart/mixed; boundary="b{n}"\n\n--b{n}\n' for n in range(3000)
    )
    assert mail_item(b"Subject: a\n" + head.encode(), "g") == "its parts are nested too deeply"


@pytest.mark.parametrize(
    ("data", "kept"),
    [
        (b"Content-Type: multipart/mixed; boundary=b\n\n" + b"--b\n\nx\n" * 999, True),
        (b"Content-Type: multipart/mixed; boundary=b\n\n" + b"--b\n\nx\n" * 1000, False),
        (b"X: a\n" * 999, True),
        (b"X: a\n" * 1000, False),
    ],
)
def test_a_mail_of_excessive_parts_or_headers_is_told(data, kept):
    found = mail_item(b"Subject: a\n" + data, "g")
    if kept:
        assert found.title == "a"
    else:
        assert found == "it has more than 1000 parts, or as many headers in one"


def test_a_mail_of_excessive_lines_is_told():
    data = b"Subject: a\n\n" + b"\n" * 2_000_000
    assert mail_item(data, "g") == "it has more than 2000000 lines"


def test_a_hostile_parameter_list_takes_no_squared_time():
    # Uncut, the library would compare some 10^12 characters here.
    data = b'Content-Type: text/plain; x="' + b";" * 2_000_000 + b"\nSubject: a\n\nText"
    assert item_of(data).content_text == b"Text"


@settings(deadline=None)
@given(st.binary(max_size=400), st.sampled_from([b"", b"Subject: ", b"Content-Type: "]))
def test_any_bytes_give_an_item_or_a_reason(data, start):
    assert isinstance(mail_item(start + data, "g"), RawItem | str)
