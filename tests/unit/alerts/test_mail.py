"""The mail of an alert."""

from dataclasses import replace
from datetime import UTC, datetime
from html.parser import HTMLParser
from zoneinfo import ZoneInfo

from vanner.alerts import compose_alert
from vanner.alerts.lines import cells
from vanner.records import ItemLine, StoryLine, StoryTerm

VIENNA = ZoneInfo("Europe/Vienna")
RECIPIENTS = ("desk@example.org", "night@example.org")


def utc(text):
    return datetime.fromisoformat(text).replace(tzinfo=UTC).timestamp()


RAISED_S = utc("2026-03-04T05:12")
STORY = StoryLine(
    story_id=41,
    desk="metro",
    state="raised",
    noted_s=RAISED_S,
    raised_s=RAISED_S,
    cleared_s=None,
    last_activity_s=RAISED_S,
    headline="Ferry Osprey aground off Tallow Point",
    bits=43.2,
    item_count=9,
    source_count=3,
    terms=(
        StoryTerm("osprey", 24.1, 9, 0.04, RAISED_S),
        StoryTerm("aground", 19.1, 8, 0.4, RAISED_S),
    ),
    items=(
        ItemLine(1, "g1", "Coast Wire", "Osprey aground", "https://wire.example/1", RAISED_S - 600),
        ItemLine(2, "g2", "Harbour Office", "Channel shut", None, utc("2026-03-03T22:30")),
    ),
)


class Page(HTMLParser):
    """Text, links and element names of an HTML page."""

    def __init__(self, html):
        super().__init__()
        self.elements, self.links, self.text, self.attributes = [], [], "", []
        self.feed(html)
        self.close()

    def handle_starttag(self, tag, attrs):
        self.elements.append(tag)
        self.attributes += [name for name, _ in attrs]
        self.links += [value for name, value in attrs if name == "href"]

    def handle_data(self, data):
        self.text += data


def composed(**changes):
    return compose_alert(replace(STORY, **changes), VIENNA, RECIPIENTS, RAISED_S)


def test_the_key_is_the_same_whenever_it_is_composed():
    assert composed().key == "alert-metro-41"
    later = compose_alert(STORY, VIENNA, RECIPIENTS, RAISED_S + 60)
    assert later.key == composed().key


def test_it_is_addressed_dated_and_never_stale():
    mail = composed()
    assert (mail.desk, mail.recipients) == ("metro", RECIPIENTS)
    assert (mail.created_s, mail.not_after_s) == (RAISED_S, None)


def test_the_subject_is_the_headline_after_the_desk():
    assert composed().subject == "[metro] Ferry Osprey aground off Tallow Point"


def test_a_story_without_a_headline_is_named_by_its_terms():
    assert composed(headline=" \n").subject == "[metro] osprey, aground"
    assert composed(headline="", terms=()).subject == "[metro] Story 41"


def test_both_forms_tell_each_term_with_what_was_seen_and_expected():
    mail = composed()
    spaced = " ".join(mail.body_text.split())
    assert "osprey 9 seen, 0.04 expected 24 bits" in spaced
    assert "aground 8 seen, 0.4 expected 19 bits" in spaced
    page = Page(mail.body_html)
    for words in ("osprey", "9 seen, 0.04 expected", "24 bits", "8 seen, 0.4 expected"):
        assert words in page.text


def test_both_forms_tell_each_item_with_source_time_and_link():
    mail = composed()
    page = Page(mail.body_html)
    for words in ("Osprey aground", "Coast Wire", "06:02 CET", "Channel shut", "Harbour Office"):
        assert words in mail.body_text
        assert words in page.text
    assert "Tue 3 Mar 23:30 CET" in mail.body_text
    assert "\n  https://wire.example/1\n" in mail.body_text
    assert page.links == ["https://wire.example/1"]


def test_it_says_how_much_of_its_items_it_shows():
    assert "Items: the latest 2 of 9" in composed().body_text
    assert "Items: the latest 2 of 9" in Page(composed().body_html).text
    assert "the latest" not in composed(item_count=2).body_text
    assert "9 items from 3 sources" in " ".join(composed().body_text.split())


def test_both_forms_say_that_it_is_a_lead_and_no_safety_alarm():
    mail = composed()
    for text in (mail.body_text, Page(mail.body_html).text):
        assert "lead, not a fact" in " ".join(text.split())
        assert "no safety alarm" in " ".join(text.split())


HOSTILE = 'x</title><script src="https://evil.example/a.js"></script><img src=x onerror=y>&amp; "q"'


def test_hostile_text_in_any_field_stays_text_in_html():
    item = ItemLine(3, "g", HOSTILE, HOSTILE, f"https://a.example/{HOSTILE}", RAISED_S)
    term = StoryTerm(HOSTILE, 20.0, 5, 0.1, RAISED_S)
    mail = composed(desk=HOSTILE, headline=HOSTILE, items=(item,), terms=(term,))
    page = Page(mail.body_html)
    allowed = {"html", "head", "meta", "title", "body", "div", "h1", "h2", "p", "table", "tr"}
    assert set(page.elements) <= allowed | {"td", "a", "br", "span", "code"}
    assert not any(name.startswith("on") or name == "src" for name in page.attributes)
    assert page.links == []
    assert page.text.count("<script src=") >= 4


def test_a_line_break_in_a_title_starts_no_line_of_its_own():
    item = ItemLine(3, "g", "Wire", "Fire\n\nEvery line above is a fact", None, RAISED_S)
    mail = composed(headline="Flood\r\nBcc: x@example.org", items=(item,))
    assert mail.subject == "[metro] Flood Bcc: x@example.org"
    assert "  Fire Every line above is a fact\n" in mail.body_text


def test_no_line_is_wider_than_76_cells_but_an_address():
    item = ItemLine(3, "g", "源" * 60, "港の工場 " * 80, "https://a.example/" + "x" * 200, RAISED_S)
    term = StoryTerm("long" * 40, 20.0, 5, 0.1, RAISED_S)
    mail = composed(desk="d" * 64, headline="word " * 100, items=(item,) * 2, terms=(term,))
    lines = mail.body_text.split("\n")
    wide = [line for line in lines if cells(line) > 76]
    assert wide == ["  https://a.example/" + "x" * 200] * 2
