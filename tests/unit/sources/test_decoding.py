"""Bytes as text: the order in which charsets are tried."""

import codecs

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.sources.decoding import decode

GERMAN = "Die Brücke über den Fluß bleibt gesperrt, sagte die Bürgermeisterin von Grünau."
RUSSIAN = "Мост через реку закрыт до мая, сообщил мэр города Верхние Ивы."


@pytest.mark.parametrize(
    ("mark", "encoding"),
    [
        (codecs.BOM_UTF8, "utf-8"),
        (codecs.BOM_UTF16_LE, "utf-16-le"),
        (codecs.BOM_UTF16_BE, "utf-16-be"),
        (codecs.BOM_UTF32_LE, "utf-32-le"),
        (codecs.BOM_UTF32_BE, "utf-32-be"),
    ],
)
def test_a_byte_order_mark_decides_against_the_declared_charset(mark, encoding):
    assert decode(mark + GERMAN.encode(encoding), "windows-1251") == GERMAN


def test_a_byte_order_mark_decides_even_where_bytes_are_damaged():
    assert decode(codecs.BOM_UTF16_LE + "ab".encode("utf-16-le") + b"x") == "ab\ufffd"


def test_the_declared_charset_is_used_where_it_fits():
    assert decode(RUSSIAN.encode("koi8-r"), " KOI8-R ") == RUSSIAN


def test_latin_1_is_read_as_windows_1252():
    assert decode("“quoted” – €5".encode("cp1252"), "iso-8859-1") == "“quoted” – €5"


@pytest.mark.parametrize(
    "declared",
    ["us-ascii", "shift_jis", "no-such-charset", "", "x" * 500, "utf\0", "\udc80", "zlib", "idna"],
)
def test_a_wrong_declared_charset_falls_through_to_utf_8(declared):
    assert decode("Zürich — Ostrau".encode(), declared) == "Zürich — Ostrau"


@pytest.mark.parametrize("declared", ["punycode", "unicode_escape", "raw-unicode-escape", "utf-7"])
def test_encodings_that_no_document_uses_are_ignored(declared):
    assert decode(rb"a\u0041+AGE-b", declared) == r"a\u0041+AGE-b"


def test_an_html_document_s_own_charset_is_used():
    page = '<html><head><meta charset="windows-1251"><title>Мост</title>'
    assert decode(page.encode("cp1251"), html=True) == page
    assert decode(page.encode("cp1251"), html=False) != page


def test_a_meta_element_of_the_older_form_is_used():
    page = '<meta http-equiv="Content-Type" content="text/html; charset=koi8-r">Мост'
    assert decode(page.encode("koi8-r"), html=True) == page


def test_a_meta_charset_that_contradicts_its_own_reading_is_ignored():
    page = '<meta charset="utf-16">Brücke'
    assert decode(page.encode(), html=True) == page


def test_an_undeclared_charset_is_guessed():
    assert decode((RUSSIAN * 3).encode("cp1251")) == RUSSIAN * 3


def test_bytes_far_beyond_the_window_are_decoded_by_the_guess():
    text = "a" * 300_000 + RUSSIAN * 2000
    assert decode(text.encode("cp1251")) == text


def test_a_single_accent_is_no_evidence_for_a_guess():
    assert decode("Café fermé".encode("cp1252")) == "Café fermé"


def test_utf_8_that_was_cut_within_a_character_stays_utf_8():
    assert decode((RUSSIAN * 5).encode()[:-2]) == (RUSSIAN * 5)[:-2] + "\ufffd"


def test_no_bytes_are_no_text():
    assert decode(b"") == ""


@settings(deadline=None)
@given(st.binary(max_size=300), st.none() | st.text(max_size=20), st.booleans())
def test_any_bytes_under_any_name_give_text_without_surrogates(data, declared, html):
    decode(data, declared, html=html).encode("utf-8")
