"""From what a source gave to an item."""

import hashlib
import unicodedata

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from vanner.clock import parse_iso
from vanner.errors import RejectedItemError
from vanner.intake import take_in
from vanner.records import Item, RawItem

NOW_S = parse_iso("2024-05-03T10:00:00Z")


def taken(**fields) -> Item:
    return take_in(RawItem(**{"guid": "g1", "title": "Gate", **fields}), "drop", NOW_S)


def test_a_full_entry_keeps_its_fields():
    item = taken(
        content_text="The gate is shut.",
        url="https://wire.example/7",
        language="EN-gb",
        date_raw="2024-05-03",
        published_s=NOW_S - 60,
        source="harbour wire",
    )
    assert item == Item(
        source="harbour wire",
        guid="g1",
        title="Gate",
        content_text="The gate is shut.",
        url="https://wire.example/7",
        language="en-GB",
        date_raw="2024-05-03",
        published_s=NOW_S - 60,
        date_credible=True,
        content_digest=hashlib.sha256(b"Gate\0The gate is shut.").hexdigest(),
    )


@pytest.mark.parametrize("named", [None, "", " \0"])
def test_an_entry_that_names_no_source_has_the_polled_one(named):
    assert taken(source=named).source == "drop"


def test_without_a_credible_date_the_first_seen_time_stands_in():
    item = taken(published_s=NOW_S + 3600, date_raw="tomorrow\0")
    assert (item.published_s, item.date_credible, item.date_raw) == (NOW_S, False, "tomorrow")


@pytest.mark.parametrize(
    "empty",
    [
        {},
        {"content_text": " \n"},
        {"content_html": "<p> </p><script>x</script>"},
        {"content_text": b""},
        {"title": "\ufeff\0", "content_text": "\u202e"},
        {"title": "<b></b>", "title_is_html": True},
    ],
)
def test_an_entry_without_title_and_text_is_rejected_in_one_sentence(empty):
    with pytest.raises(RejectedItemError) as caught:
        taken(**{"title": "", **empty})
    assert str(caught.value) == 'An entry "g1" of drop has neither title nor text: left out.'


def test_a_rejected_entry_without_an_identifier_is_told_as_such():
    with pytest.raises(RejectedItemError, match="An entry without an id of drop"):
        taken(title="", guid=None)


def test_a_title_alone_or_a_text_alone_is_enough():
    assert taken(content_text=None).content_text == ""
    assert taken(title="", content_text="Text").title == ""


def test_plain_text_is_preferred_to_html():
    assert taken(content_text="plain", content_html="<p>html").content_text == "plain"
    assert taken(content_text="  ", content_html="<p>html").content_text == "html"


def test_a_page_s_title_is_taken_only_where_the_entry_has_none():
    page = "<title>Page</title><p>Text"
    assert taken(title="", content_html=page).title == "Page"
    assert taken(content_html=page).title == "Gate"


def test_a_title_of_html_becomes_one_line_of_text():
    item = taken(title="Gate &amp; <b>weir</b><br>shut", title_is_html=True)
    assert item.title == "Gate & weir shut"
    assert taken(title="Gate &amp; weir").title == "Gate &amp; weir"


def test_bytes_are_decoded_by_the_declared_charset():
    item = taken(
        title="Мост".encode("koi8-r"), content_text="закрыт".encode("koi8-r"), charset="koi8-r"
    )
    assert (item.title, item.content_text) == ("Мост", "закрыт")


def test_html_bytes_are_decoded_by_their_own_charset():
    page = '<meta charset="windows-1251"><title>Мост</title><p>закрыт'
    item = taken(title="", content_html=page.encode("cp1251"))
    assert (item.title, item.content_text) == ("Мост", "закрыт")


def test_text_is_capped_at_a_million_bytes_and_the_title_at_a_thousand_characters():
    item = taken(title="ü" * 5000, content_text="橋" * 1_000_000)
    assert item.title == "ü" * 1000
    assert item.content_text == "橋" * 333_333


def test_the_digest_is_of_what_is_kept():
    one = taken(content_text="e\u0301\r\nb")
    other = taken(content_text="\ufeffé\nb ")
    assert one.content_digest == other.content_digest
    assert one.content_digest != taken(content_text="é b").content_digest
    assert taken(title="a", content_text="b").content_digest != taken(title="ab").content_digest


def test_without_an_identifier_equal_content_has_an_equal_one():
    assert taken(guid=None).guid == taken(guid=None).guid
    assert taken(guid=None).guid != taken(guid=None, url="https://wire.example/7").guid


ANY_TEXT = st.text(st.characters(codec=None), max_size=200)
ANYTHING = st.none() | ANY_TEXT | st.binary(max_size=100)
RAW_ITEMS = st.builds(
    RawItem,
    guid=st.none() | ANY_TEXT,
    title=ANY_TEXT | st.binary(max_size=100),
    content_text=ANYTHING,
    content_html=ANYTHING | ANY_TEXT.map(lambda text: f"<p>{text}<br>&{text};"),
    url=st.none() | ANY_TEXT | ANY_TEXT.map(lambda text: f"http://{text}"),
    language=st.none() | ANY_TEXT,
    date_raw=st.none() | ANY_TEXT,
    published_s=st.none() | st.floats(),
    charset=st.none() | ANY_TEXT | st.sampled_from(["utf-8", "utf-16", "shift_jis", "utf-7"]),
    title_is_html=st.booleans(),
    source=st.none() | ANY_TEXT,
)


def assert_fit_to_keep(value: str, most_bytes: int) -> None:
    assert unicodedata.is_normalized("NFC", value)
    assert len(value.encode("utf-8")) <= most_bytes
    assert value.encode("utf-8").decode("utf-8") == value
    assert not [c for c in value if c != "\n" and unicodedata.category(c) in {"Cc", "Cs"}]


@settings(max_examples=400, deadline=None)
@given(RAW_ITEMS, st.floats(1e9, 2e9))
def test_any_entry_gives_an_item_fit_to_keep_or_is_rejected(raw, now_s):
    try:
        item = take_in(raw, "drop", now_s)
    except RejectedItemError:
        return
    assert item.title or item.content_text
    assert_fit_to_keep(item.content_text, 1_000_000)
    for line, most in (
        (item.source, 64), (item.guid, 500), (item.title, 1000), (item.url or "", 2000),
        (item.language or "", 60), (item.date_raw or "", 200),
    ):  # fmt: skip
        assert_fit_to_keep(line, 4 * most)
        assert len(line) <= most
        assert "\n" not in line
    assert item.guid
    assert item.source
    assert 631_152_000 <= item.published_s <= now_s + 600
