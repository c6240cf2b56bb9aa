import json

import pytest

from vanner.sources.feed.jsonfeed import is_json
from vanner.sources.feed.parse import UnreadableFeedError, parse_feed

VERSION = "https://jsonfeed.org/version/1.1"


def parsed(feed, encoding="utf-8", **named):
    body = feed if isinstance(feed, bytes) else json.dumps(feed).encode(encoding)
    defaults = {"content_type": "application/feed+json", "base_url": "http://wire.example/f/"}
    return parse_feed(body, **defaults | named)


def feed_of(*items, **named):
    return {"version": VERSION, "title": "Hafen", "items": list(items)} | named


def only(item, **named):
    (found,) = parsed(feed_of(item), **named).items
    return found


def test_an_item_gives_all_its_fields():
    item = only(
        {
            "id": "h-1",
            "url": "1.html",
            "external_url": "http://else.example/",
            "title": "Tug <b> ferry",
            "content_html": "<p>Fog</p>",
            "content_text": "Fog",
            "summary": "short",
            "date_published": "2031-03-11T10:00:00+02:00",
            "language": "nl",
        }
    )
    assert item.guid == "h-1"
    assert (item.title, item.title_is_html) == ("Tug <b> ferry", False)
    assert (item.content_html, item.content_text) == ("<p>Fog</p>", None)
    assert item.url == "http://wire.example/f/1.html"
    assert item.language == "nl"
    assert (item.date_raw, item.published_s) == ("2031-03-11T10:00:00+02:00", 1930982400.0)


def test_plain_text_stays_plain_and_a_summary_stands_in_for_it():
    assert only({"id": "1", "content_text": "2 < 3"}).content_text == "2 < 3"
    assert only({"id": "1", "summary": "short"}).content_text == "short"


def test_a_number_is_taken_as_an_id_and_a_link_stands_in_for_one():
    assert only({"id": 17, "title": "a"}).guid == "17"
    assert only({"external_url": "http://else.example/1"}).guid == "http://else.example/1"


def test_the_date_of_change_stands_in_for_that_of_publication():
    item = only({"id": "1", "date_published": "once", "date_modified": "2031-03-11T08:00:00Z"})
    assert (item.date_raw, item.published_s) == ("2031-03-11T08:00:00Z", 1930982400.0)
    assert only({"id": "1", "date_published": "once"}).date_raw == "once"


def test_the_feeds_language_stands_in_for_the_items():
    assert parsed(feed_of({"id": "1"}, language="sv")).items[0].language == "sv"
    assert only({"id": "1"}, language="fi").language == "fi"


def test_items_come_oldest_first():
    new, old = "2031-03-11T09:00:00Z", "2031-03-11T08:00:00Z"
    feed = feed_of({"id": "b", "date_published": new}, {"id": "a", "date_published": old})
    assert [item.guid for item in parsed(feed).items] == ["a", "b"]


@pytest.mark.parametrize("bad", [None, 5, "text", [], {}, {"id": None, "title": ["x"]}])
def test_a_bad_entry_is_left_out_and_its_neighbours_stay(bad):
    feed = parsed(feed_of({"id": "b"}, bad, {"id": "a"}))
    assert [item.guid for item in feed.items] == ["a", "b"]
    assert len(feed.faults) == 1
    assert feed.faults[0].startswith("its entry 2 was left out")


def test_half_a_surrogate_pair_becomes_the_replacement_character():
    assert only({"id": "1", "title": "a\ud83db"}).title == "a\ufffdb"


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-be", "utf-32"])
def test_every_encoding_of_json_is_read(encoding):
    body = json.dumps(feed_of({"id": "1", "title": "Fähre"}), ensure_ascii=False).encode(encoding)
    assert parsed(body, content_type=None).items[0].title == "Fähre"


def test_json_is_known_by_its_first_character_whatever_the_header_says():
    assert parsed(feed_of({"id": "1"}), content_type="text/xml").items[0].guid == "1"
    assert not is_json(b"<rss/>")


def test_an_empty_feed_is_no_fault():
    assert parsed(feed_of()).items == ()


@pytest.mark.parametrize(
    ("body", "reason"),
    [
        (b"{", "is none"),
        (b'{"version": "https://jsonfeed.org/version/1.1", "items": [', "is none"),
        (b'{"a":' * 100_000, "is none"),
        (b'{"n": ' + b"9" * 10_000 + b"}", "is none"),
        (b"{}", "no JSON Feed"),
        (b'{"version": "2", "items": []}', "no JSON Feed"),
        (b'{"version": "https://jsonfeed.org/version/1.1"}', "without a list"),
        (b'{"version": "https://jsonfeed.org/version/1.1", "items": {}}', "without a list"),
    ],
)
def test_json_that_is_no_feed_is_refused_with_the_reason(body, reason):
    with pytest.raises(UnreadableFeedError, match=reason):
        parsed(body)
