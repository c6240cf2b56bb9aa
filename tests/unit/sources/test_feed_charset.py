import codecs

import pytest

from vanner.sources.feed.charset import to_utf8

GERMAN = "<rss><title>Straße bei Nordhöhe gesperrt – Überflutung</title></rss>"
RUSSIAN = "<rss><title>Паром задержан в порту Остров из-за сильного тумана</title></rss>"
XML = '<?xml version="1.0" encoding="{}"?>'


def test_utf8_stays_as_it_is():
    assert to_utf8(GERMAN.encode(), "application/xml") == (GERMAN.encode(), None)


@pytest.mark.parametrize(
    ("mark", "name"),
    [
        (codecs.BOM_UTF8, "utf-8"),
        (codecs.BOM_UTF16_LE, "utf-16-le"),
        (codecs.BOM_UTF16_BE, "utf-16-be"),
        (codecs.BOM_UTF32_LE, "utf-32-le"),
        (codecs.BOM_UTF32_BE, "utf-32-be"),
    ],
)
def test_a_byte_order_mark_outweighs_every_declaration(mark, name):
    data = mark + GERMAN.encode(name)
    assert to_utf8(data, "text/xml; charset=iso-8859-1") == (GERMAN.encode(), None)


@pytest.mark.parametrize("name", ["utf-16-le", "utf-16-be", "utf-32-le", "utf-32-be"])
def test_wide_encodings_are_known_without_a_mark(name):
    assert to_utf8(GERMAN.encode(name), None) == (GERMAN.encode(), None)


def test_the_headers_charset_goes_before_the_documents():
    data = (XML.format("koi8-r") + GERMAN).encode("cp1252")
    utf8, clause = to_utf8(data, 'text/xml; charset="windows-1252"')
    assert GERMAN in utf8.decode()
    assert clause is None


def test_the_documents_charset_is_used_where_the_header_has_none():
    utf8, clause = to_utf8((XML.format("koi8-r") + RUSSIAN).encode("koi8-r"), "text/xml")
    assert RUSSIAN in utf8.decode()
    assert clause is None


def test_valid_utf8_is_believed_against_a_single_byte_charset():
    assert to_utf8(GERMAN.encode(), "text/xml; charset=iso-8859-1") == (GERMAN.encode(), None)


def test_text_declared_utf8_that_is_not_is_read_all_the_same_and_the_fault_told():
    utf8, clause = to_utf8((XML.format("utf-8") + RUSSIAN).encode("cp1251"), None)
    assert RUSSIAN in utf8.decode()
    assert clause == "it declares the charset utf-8 and was read as cp1251"


def test_one_damaged_place_does_not_spoil_the_rest_of_utf8():
    data = (GERMAN * 20).encode() + b"<title>\xff</title>"
    utf8, clause = to_utf8(data, None)
    assert utf8.decode() == GERMAN * 20 + "<title>\ufffd</title>"
    assert clause is None


@pytest.mark.parametrize("charset", ["punycode", "unicode_escape", "idna", "rot13", "no-such"])
def test_a_codec_that_is_no_charset_is_not_used(charset):
    data = (XML.format(charset) + GERMAN).encode()
    assert GERMAN in to_utf8(data, None)[0].decode()


def test_a_declaration_of_utf16_in_plain_bytes_is_not_believed():
    data = (XML.format("utf-16") + GERMAN).encode()
    assert GERMAN in to_utf8(data, None)[0].decode()


def test_a_header_of_utf16_over_plain_bytes_is_not_believed():
    data = GERMAN.encode()
    data += b" " * (len(data) % 2)
    utf8, clause = to_utf8(data, "text/xml; charset=utf-16-le")
    assert utf8 == data
    assert clause == "it declares the charset utf-16-le and was read as utf-8"


def test_gb2312_is_read_as_the_larger_charset_that_is_meant():
    text = "<rss><title>東港輪渡停航</title></rss>"  # traditional characters: not in GB 2312
    utf8, _ = to_utf8((XML.format("gb2312") + text).encode("gb18030"), None)
    assert text in utf8.decode()


@pytest.mark.parametrize("data", [b"", b"\xff", b"\x80\x81\x8d\x8f\x90\x9d", bytes(range(256))])
def test_any_bytes_become_valid_utf8(data):
    to_utf8(data, None)[0].decode("utf-8")
