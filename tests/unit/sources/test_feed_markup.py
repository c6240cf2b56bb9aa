import xml.etree.ElementTree as ET

import pytest

from vanner.sources.feed.markup import (
    MAX_ATTRIBUTES,
    MAX_PREFIXES,
    MAX_REFERENCES,
    MAX_TAGS,
    MarkupError,
    harmless,
)


def title_of(document):
    return ET.fromstring(harmless(document)[0]).findtext("title")  # noqa: S314 - made harmless


def test_a_plain_document_keeps_its_text():
    assert title_of("<rss><title>Fähre &amp; Hafen</title></rss>".encode()) == "Fähre & Hafen"


def test_comments_instructions_and_declarations_before_the_root_are_dropped():
    head = b'\n<?xml version="1.0" encoding="latin-1"?><!-- <rss> --><?style <a>?><!DOCTYPE rss>\n'
    assert title_of(head + b"<rss><title>a</title></rss>") == "a"
    assert harmless(head + b"<rss/>")[1] == ()


def test_text_before_the_root_is_dropped_and_told():
    document, notes = harmless(b"Warning: disk full\n<rss><title>a</title></rss>")
    assert b"Warning" not in document
    assert notes == ("there is text before its first element",)


def test_a_plain_entity_still_works():
    head = b'<!DOCTYPE rss [<!ENTITY town "Ostrau">]>'
    assert title_of(head + b"<rss><title>&town;</title></rss>") == "Ostrau"
    assert harmless(head + b"<rss/>")[1] == ()


@pytest.mark.parametrize(
    "subset",
    [
        b'<!ENTITY a "x"><!ENTITY b "&a;&a;&a;">',
        b'<!ENTITY b SYSTEM "file:///etc/hostname">',
        b'<!ENTITY b PUBLIC "p" "http://127.0.0.1:9/entity">',
        b'<!ENTITY % b "x">',
        b"<!ENTITY b '&#38;a;'>",
    ],
)
def test_an_entity_that_refers_to_something_is_left_out_and_told(subset):
    document, notes = harmless(b"<!DOCTYPE rss [" + subset + b"]><rss>&b;</rss>")
    assert b" b " not in document
    assert b"file:" not in document
    assert b"http:" not in document
    assert notes == ("entities that it defines were left out",)


def test_entities_that_expand_to_megabytes_are_left_out():
    head = b'<!DOCTYPE rss [<!ENTITY a "' + b"x" * 1000 + b'">]>'
    document, notes = harmless(head + b"<rss>" + b"&a;" * 2000 + b"</rss>")
    assert b"<!ENTITY" not in document
    assert notes == ("entities that it defines were left out",)


@pytest.mark.parametrize("reference", [b"&#x110000;", b"&#xD800;", b"&#0;", b"&#" + b"9" * 5000])
def test_a_reference_to_no_character_becomes_the_replacement_character(reference):
    assert title_of(b"<rss><title>a" + reference + b" b</title></rss>") == "a\ufffd b"


def test_character_references_mean_what_they_meant():
    document = (
        b"<rss><title>&#60;b&#62; &#x26; &#228;&#xe4;&#0000228; &#128674;&#10;&#38;</title></rss>"
    )
    assert title_of(document) == "<b> & äää 🚢 &"


def test_control_characters_are_dropped():
    assert title_of(b"<rss><title>a\x00\x08b\x1f\tc</title></rss>") == "ab\tc"


def test_a_long_run_of_blanks_becomes_one():
    document = b"<rss><title>a" + b" \n\xc2\xa0" * 100_000 + b"b</title></rss>"
    assert title_of(document) == "a b"


def test_text_that_only_looks_like_an_unused_element_stays():
    assert title_of(b"<rss><title>author category</title></rss>") == "author category"
    assert b"<authority>" in harmless(b"<rss><authority>a</authority></rss>")[0]


@pytest.mark.parametrize("document", [b"", b"plain text", b"<<<>>>", b"<!-- only a comment"])
def test_what_holds_no_element_is_refused(document):
    with pytest.raises(MarkupError, match="not XML"):
        harmless(document)


@pytest.mark.parametrize(
    "content",
    [
        b"<a>" * (MAX_TAGS + 1),
        b"<" * (MAX_TAGS + 1),
        b"<a " + b" ".join(b'a%d=""' % n for n in range(MAX_ATTRIBUTES + 1)) + b"/>",
        b"".join(b'<a xmlns:p%d="u"/>' % n for n in range(MAX_PREFIXES + 1)),
        b"&" * (MAX_REFERENCES + 1),
        b'<a b="' + b"x" * 70_000,
    ],
    ids=["open tags", "brackets", "attributes", "prefixes", "ampersands", "endless tag"],
)
def test_what_is_out_of_proportion_is_refused(content):
    with pytest.raises(MarkupError):
        harmless(b"<rss>" + content + b"</rss>")


def test_tags_within_cdata_are_text_and_do_not_count():
    harmless(b"<rss><![CDATA[" + b"<b>" * (MAX_TAGS + 1) + b"]]></rss>")
