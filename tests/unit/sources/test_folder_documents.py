"""Text and HTML files as items."""

import hashlib

import pytest

from vanner.sources.folder.documents import document_item


def text_item(text):
    data = text if isinstance(text, bytes) else text.encode()
    return document_item(data, ".txt")


def test_the_first_line_of_a_text_is_its_title():
    item = text_item("\n\n  Gate shut \n\nThe gate is shut.\nUntil May.\n")
    assert (item.title, item.content_text) == ("Gate shut", "The gate is shut.\nUntil May.")


def test_a_text_of_one_short_line_is_all_title():
    item = text_item("Only one line.")
    assert (item.title, item.content_text) == ("Only one line.", "")


def test_a_text_with_a_long_first_line_has_no_title():
    text = "x" * 201 + "\nMore text."
    item = text_item(text)
    assert (item.title, item.content_text) == ("", text)


def test_a_first_line_of_200_characters_is_a_title():
    assert text_item("x" * 200 + "\nMore").title == "x" * 200


@pytest.mark.parametrize("end", ["\r\n", "\r", "\n"])
def test_line_ends_of_all_systems_end_the_title(end):
    item = text_item(f"Gate{end}{end}Text")
    assert (item.title, item.content_text) == ("Gate", "Text")


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "utf-32", "cp1252", "utf-8"])
def test_a_text_in_another_charset_is_decoded(encoding):
    item = text_item("Brücke gesperrt\nDie Brücke über die Ache ist gesperrt.".encode(encoding))
    assert item.title == "Brücke gesperrt"
    assert item.content_text == "Die Brücke über die Ache ist gesperrt."


def test_a_text_has_no_date_and_its_digest_for_an_identifier():
    item = text_item("Gate\nText")
    assert item.guid == "sha256:" + hashlib.sha256(b"Gate\nText").hexdigest()
    assert (item.date_raw, item.published_s, item.url) == (None, None, None)


@pytest.mark.parametrize("extension", [".html", ".htm"])
def test_html_is_handed_on_as_bytes_without_a_title(extension):
    item = document_item(b"<title>Gate</title>", extension)
    assert (item.title, item.content_html, item.content_text) == ("", b"<title>Gate</title>", None)
