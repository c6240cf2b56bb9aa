"""A digest's texts."""

import sqlite3
from dataclasses import replace
from datetime import UTC, datetime
from html.parser import HTMLParser
from zoneinfo import ZoneInfo

import pytest

from vanner.alerts.lines import cells
from vanner.digests import compose_digest
from vanner.records import DigestContent, ItemLine, SourceVolume, StoryLine, StoryTerm

VIENNA = ZoneInfo("Europe/Vienna")


def utc(text):
    return datetime.fromisoformat(text).replace(tzinfo=UTC).timestamp()


DUE_S = utc("2026-03-04T06:00")


def item(number=1, title="Osprey aground", url="https://wire.example/1", source="Coast Wire"):
    return ItemLine(number, f"g{number}", source, title, url, DUE_S - 3600)


def story(number, headline, state="raised", **changes):
    raised_s = None if state == "noted" else DUE_S - 2880
    made = StoryLine(
        story_id=number,
        desk="metro",
        state=state,
        noted_s=DUE_S - 3000,
        raised_s=raised_s,
        cleared_s=DUE_S - 600 if state == "cleared" else None,
        last_activity_s=DUE_S - 700,
        headline=headline,
        bits=31.4,
        item_count=5,
        source_count=2,
        terms=(StoryTerm("osprey", 24.1, 12, 0.4, DUE_S),),
        items=(item(),),
    )
    return replace(made, **changes)


def content(**changes):
    made = DigestContent(
        desk="metro",
        schedule="0 7 * * *",
        local_slot="2026-03-04T07:00",
        timezone="Europe/Vienna",
        scheduled_s=DUE_S,
        covers_from_s=DUE_S - 12 * 3600,
        covers_until_s=DUE_S,
        raised=(story(1, "Osprey aground"),),
        noted=(story(2, "Gulls counted", "noted"),),
        cleared=(story(3, "Power back", "cleared"),),
        volumes=(
            SourceVolume("Coast Wire", 41, 38.2, DUE_S - 60, False),
            SourceVolume("Town Hall", 0, 12.4, utc("2026-03-03T13:10"), True),
            SourceVolume("Radio Sund", 1, None, DUE_S - 60, False),
        ),
    )
    return replace(made, **changes)


EMPTY = {"raised": (), "noted": (), "cleared": (), "volumes": ()}


class Page(HTMLParser):
    """Text, links and element names of an HTML page; it must be well nested."""

    def __init__(self, html):
        super().__init__()
        self.elements, self.links, self.text, self.open = [], [], "", []
        self.feed(html)
        self.close()
        assert self.open == []

    def handle_starttag(self, tag, attrs):
        self.elements.append(tag)
        self.links += [value for name, value in attrs if name == "href"]
        assert not any(name.startswith("on") or name in ("src", "class") for name, _ in attrs)
        if tag in ("meta", "br"):
            self.text += " "
        else:
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag
        if tag == "td":
            self.text += " "

    def handle_data(self, data):
        self.text += data


def both(made):
    """Plain text and the text of the HTML, with white space collapsed and rules left out."""
    words = [word for word in made.body_text.split() if not word.startswith("-----")]
    return " ".join(words), " ".join(Page(made.body_html).text.split())


def says(made, *parts):
    return all(part in text for text in both(made) for part in parts)


def test_the_subject_names_desk_slot_and_numbers():
    subject = compose_digest(content(), VIENNA).subject
    assert subject == "[metro] Digest Wed 4 Mar 07:00: 1 alert, 1 noted, 1 source silent"


def test_both_forms_hold_every_section():
    made = compose_digest(content(), VIENNA)
    sections = ("New alerts", "Noted, below the threshold", "Cleared", "Quiet sources", "Volumes")
    assert says(made, *sections)


def test_both_forms_say_what_time_they_cover():
    assert says(
        compose_digest(content(), VIENNA), "Tue 3 Mar 2026 19:00 CET", "Wed 4 Mar 2026 07:00 CET"
    )


def test_an_alert_comes_with_time_support_evidence_and_items():
    made = compose_digest(content(), VIENNA)
    assert says(
        made,
        "1. Osprey aground",
        "Alert 1, 06:12 CET, 5 items from 2 sources, 31 bits",
        "12 seen, 0.4 expected",
        "Coast Wire",
        "06:00 CET",
        "and 4 more",
        "SELECT * FROM alert_items WHERE alert_id = 1;",
    )
    assert Page(made.body_html).links == ["https://wire.example/1"]
    assert "\n   https://wire.example/1\n" in made.body_text


def test_an_alert_that_has_cleared_since_says_so():
    made = compose_digest(content(raised=(story(1, "Power out", "cleared"),)), VIENNA)
    assert says(made, "31 bits; cleared 06:50 CET")


def test_a_cleared_alert_says_when_it_was_raised_and_cleared():
    assert says(
        compose_digest(content(), VIENNA),
        "Power back cleared 06:50 CET, raised 06:12 CET, 5 items from 2 sources",
    )


def test_a_quiet_source_comes_with_its_usual_amount_and_its_latest_item():
    made = compose_digest(content(), VIENNA)
    assert says(made, "Town Hall: nothing, where 12 would be usual; latest item Tue 3 Mar 14:10")
    never = SourceVolume("Town Hall", 0, 12.4, None, True)
    assert says(compose_digest(content(volumes=(never,)), VIENNA), "latest item never")


def test_volumes_stand_beside_the_usual_amount_where_it_is_known():
    made = compose_digest(content(), VIENNA)
    assert says(made, "Coast Wire 41 38", "Radio Sund 1 not known yet")


def test_twenty_noted_stories_are_shown_and_a_query_finds_the_others():
    noted = tuple(story(n, f"Matter {n:02}", "noted") for n in range(10, 33))
    made = compose_digest(content(noted=noted), VIENNA)
    assert says(made, "Matter 10", "Matter 29", "and 3 more in the database:")
    for text in both(made):
        assert "Matter 30" not in text


def test_the_query_for_noted_stories_runs_and_gives_just_those_of_the_digest():
    noted = tuple(story(n, "x", "noted") for n in range(21))
    made = compose_digest(content(desk="O'Malley's", noted=noted), VIENNA)
    query = made.body_text[made.body_text.index("SELECT noted_at") :]
    query = query[: query.index(";") + 1]
    base = sqlite3.connect(":memory:")
    try:
        # The columns of the public view.
        base.execute(
            "CREATE TABLE noted(story_id, desk, noted_at, last_activity_at, headline, bits,"
            " items, sources)"
        )
        rows = [
            ("O'Malley's", "2026-03-03T18:00:00Z", "before", 9),
            ("O'Malley's", "2026-03-03T18:01:00Z", "weak", 5),
            ("O'Malley's", "2026-03-04T06:00:00Z", "strong", 8),
            ("O'Malley's", "2026-03-04T06:01:00Z", "after", 9),
            ("metro", "2026-03-03T20:00:00Z", "elsewhere", 9),
        ]
        base.executemany(
            "INSERT INTO noted(desk, noted_at, headline, bits) VALUES (?, ?, ?, ?)", rows
        )
        found = [row[1] for row in base.execute(query)]
    finally:
        base.close()
    assert found == ["strong", "weak"]


def test_a_digest_with_nothing_in_it_says_that_the_desk_was_quiet():
    made = compose_digest(content(**EMPTY), VIENNA)
    assert made.subject == "[metro] Digest Wed 4 Mar 07:00: quiet"
    assert says(made, "The desk was quiet: no alerts and nothing noted; no items came from no")
    for text in both(made):
        assert not any(name in text for name in ("New alerts", "Noted,", "Cleared", "Volumes"))


def test_a_section_without_entries_says_none_where_a_reader_would_look_for_it():
    made = compose_digest(content(raised=(), cleared=()), VIENNA)
    assert made.subject.endswith("no alerts, 1 noted, 1 source silent")
    assert says(made, "New alerts None.")
    for text in both(made):
        assert "Cleared" not in text
    assert says(
        compose_digest(content(noted=()), VIENNA),
        "Noted, below the threshold None.",
        "nothing noted",
    )


def test_many_sources_are_counted_and_not_all_listed():
    volumes = tuple(SourceVolume(f"s{n:03}", 1, 1.0, DUE_S, False) for n in range(45))
    made = compose_digest(content(volumes=volumes), VIENNA)
    assert says(made, "s039", "and 5 more sources", "45 items came from 45 sources")
    for text in both(made):
        assert "s040" not in text


def test_both_forms_end_with_the_word_of_care():
    for text in both(compose_digest(content(**EMPTY), VIENNA)):
        assert text.endswith("Vanner is no safety alarm and stands in for none.")
        assert "a lead, not a fact" in text


def test_times_over_a_change_of_the_clock_keep_their_own_zone():
    due_s = utc("2026-03-29T05:00")
    made = compose_digest(
        content(scheduled_s=due_s, covers_from_s=due_s - 12 * 3600, covers_until_s=due_s), VIENNA
    )
    assert says(made, "Sat 28 Mar 2026 18:00 CET", "Sun 29 Mar 2026 07:00 CEST")


HOSTILE = 'x</title></style><script>y()</script><img src=x onerror=y> {{ care }} "q"'


def hostile_content():
    bad = item(title=HOSTILE, url="javascript:alert(1)", source=HOSTILE)
    term = StoryTerm(HOSTILE, 9.0, 3, 0.1, DUE_S)
    return content(
        desk=HOSTILE,
        raised=(story(1, HOSTILE, items=(bad,), terms=(term,)),),
        noted=tuple(story(n, HOSTILE, "noted") for n in range(21)),
        cleared=(story(3, HOSTILE, "cleared"),),
        volumes=(SourceVolume(HOSTILE, 0, 9.0, None, True),),
    )


def test_hostile_text_in_any_field_stays_text_in_html():
    page = Page(compose_digest(hostile_content(), VIENNA).body_html)
    plain = {"html", "head", "meta", "title", "body", "div", "h1", "h2", "h3", "p", "ul", "li"}
    assert set(page.elements) <= plain | {"table", "tr", "th", "td", "b", "br", "span", "code"}
    assert page.links == []
    assert page.text.count("{{ care }}") >= 10


def test_plain_text_is_not_escaped():
    made = compose_digest(content(raised=(story(1, "Mills & <Sons> shut"),)), VIENNA)
    assert "1. Mills & <Sons> shut\n" in made.body_text


@pytest.mark.parametrize("title", ["word " * 120, "港の工場" * 60, "x" * 500, "a\nb\r\n" * 80])
def test_no_line_is_wider_than_76_cells_but_an_address(title):
    address = "https://wire.example/" + "y" * 120
    long = item(title=title, url=address, source=title)
    made = compose_digest(
        content(
            desk="d" * 64,
            raised=(story(1, title, "cleared", items=(long,) * 3),),
            noted=tuple(story(n, title, "noted") for n in range(25)),
            cleared=(story(3, title, "cleared"),),
            volumes=(SourceVolume(title, 0, 9.0, None, True),),
        ),
        VIENNA,
    )
    wide = [line for line in made.body_text.split("\n") if cells(line) > 76]
    assert wide == ["   " + address] * 3
    assert cells(made.subject) <= 150


def test_blank_lines_never_pile_up_and_no_line_ends_in_a_space():
    for one in (content(), content(**EMPTY), content(raised=()), hostile_content()):
        text = compose_digest(one, VIENNA).body_text
        assert "\n\n\n\n" not in text
        assert not any(line.endswith(" ") for line in text.split("\n"))
        assert text.endswith(".\n")


def test_the_same_content_gives_the_same_texts():
    assert compose_digest(content(), VIENNA) == compose_digest(content(), VIENNA)
