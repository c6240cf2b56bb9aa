"""Identifier, address, language and date."""

import hashlib
import math

import pytest

from vanner.clock import parse_iso
from vanner.intake.fields import date_of, digest_of, guid_of, language_of, url_of

NOW_S = parse_iso("2024-05-03T10:00:00Z")


@pytest.mark.parametrize(
    ("found", "kept"),
    [
        ("https://wire.example/7?a=b#c", "https://wire.example/7?a=b#c"),
        ("HTTP://wire.example", "HTTP://wire.example"),
        (" http://wire.example/a b\n", "http://wire.example/a%20b"),
        ("http://wire.example/brücke", "http://wire.example/brücke"),
        ("https://wire.example/\u202egpj.exe", "https://wire.example/gpj.exe"),
        ("ftp://wire.example/7", None),
        ("mailto:desk@wire.example", None),
        ("javascript:alert(1)", None),
        ("//wire.example/7", None),
        ("http://", None),
        ("http:///path", None),
        ("", None),
        (None, None),
        ("https://wire.example/" + "a" * 1979, "https://wire.example/" + "a" * 1979),
        ("https://wire.example/" + "a" * 1980, None),
        ("https://wire.example/" + " " * 1 + "a" * 1977, None),
    ],
)
def test_web_addresses_of_a_bearable_length_are_kept(found, kept):
    assert url_of(found) == kept


@pytest.mark.parametrize(
    ("found", "kept"),
    [
        ("EN", "en"),
        ("pt_br", "pt-BR"),
        ("ZH-hANT-tw", "zh-Hant-TW"),
        ("es-419", "es-419"),
        ("de-CH-1996", "de-CH-1996"),
        ("gsw", "gsw"),
        (" en-GB ", "en-GB"),
        ("english", None),
        ("e", None),
        ("en-", None),
        ("en us", None),
        ("12", None),
        ("", None),
        (None, None),
        ("en" + "-abcdefgh" * 7, None),
    ],
)
def test_what_looks_like_a_language_tag_is_kept_in_its_usual_case(found, kept):
    assert language_of(found) == kept


@pytest.mark.parametrize(
    ("published_s", "credible"),
    [
        (parse_iso("1990-01-01T00:00:00Z"), True),
        (parse_iso("1989-12-31T23:59:59Z"), False),
        (NOW_S, True),
        (NOW_S + 600, True),
        (NOW_S + 601, False),
        (0.0, False),
        (math.nan, False),
        (math.inf, False),
        (-math.inf, False),
        (None, False),
    ],
)
def test_only_a_credible_date_is_believed(published_s, credible):
    assert date_of(published_s, NOW_S) == ((published_s if credible else NOW_S), credible)


def test_a_short_identifier_is_kept_and_a_long_one_is_digested():
    assert guid_of("a b", "T", "x", None) == "a b"
    assert guid_of("a" * 500, "T", "x", None) == "a" * 500
    assert guid_of("a" * 501, "T", "x", None) == (
        "sha256:" + hashlib.sha256(b"a" * 501).hexdigest()
    )


@pytest.mark.parametrize("missing", [None, "", " \n", "\0"])
def test_without_an_identifier_title_text_and_address_make_one(missing):
    made = guid_of(missing, "T", "x", "http://a.example")
    assert made == "sha256:" + hashlib.sha256(b"T\0x\0http://a.example").hexdigest()
    assert len({made, *(guid_of(None, *one) for one in (("T", "x", None), ("Tx", "", None)))}) == 3


def test_a_digest_is_of_the_utf_8_with_zeros_between():
    assert digest_of("ü", "b") == hashlib.sha256("ü\0b".encode()).hexdigest()
