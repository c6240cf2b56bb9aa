"""The demo's archive: the same every time, in order, and with the volume of two working desks."""

import re
from collections import Counter, defaultdict

import pytest

from vanner.clock import DAY_S, HOUR_S, iso_utc
from vanner.sources.demo import demo_archive, demo_desks

START_S = 1_950_048_000.0  # a Saturday, 00:00 UTC: the fewest words in the first days
DAYS = 15.0
RANDOM_STATE = 3
DESK_OF = {source: desk.name for desk in demo_desks() for source in desk.sources}


def words_of(text):
    return re.findall(r"[a-z]+", text.lower())


@pytest.fixture(scope="module")
def archive():
    return list(demo_archive(START_S, DAYS, RANDOM_STATE))


def of_desk(items, desk):
    return [item for item in items if DESK_OF[item.source] == desk]


def per_day(items):
    return Counter(int((item.published_s - START_S) // DAY_S) for item in items)


def test_the_same_arguments_give_the_same_items(archive):
    assert list(demo_archive(START_S, DAYS, RANDOM_STATE)) == archive


def test_another_random_state_gives_other_items(archive):
    others = list(demo_archive(START_S, DAYS, RANDOM_STATE + 1))
    assert not {item.guid for item in others} & {item.guid for item in archive}
    assert [item.content_text for item in others] != [item.content_text for item in archive]


def test_items_come_in_order_of_publication_within_the_archive(archive):
    moments = [item.published_s for item in archive]
    assert moments == sorted(moments)
    assert moments[0] >= START_S
    assert moments[-1] < START_S + DAYS * DAY_S


def test_an_archive_that_starts_within_a_second_holds_no_earlier_item():
    moments = [item.published_s for item in demo_archive(START_S + 0.7, 2.3, RANDOM_STATE)]
    assert min(moments) >= START_S + 0.7
    assert max(moments) < START_S + 0.7 + 2.3 * DAY_S


def test_no_guid_occurs_twice(archive):
    assert len({(item.source, item.guid) for item in archive}) == len(archive)
    assert len({item.guid for item in archive}) == len(archive)


def test_every_field_that_a_source_gives_is_there(archive):
    for item in archive:
        assert item.source in DESK_OF
        assert item.title
        assert item.language == "en"
        assert item.date_raw == iso_utc(item.published_s)
        assert re.fullmatch(r"https://[a-z-]+\.example/\d{4}/\d\d/\d\d/[0-9a-f]+", item.url)


def test_every_source_of_a_desk_writes(archive):
    assert {item.source for item in archive} == set(DESK_OF)


def test_texts_have_15_to_80_words_and_no_slot_left_open(archive):
    for item in archive:
        assert 15 <= len(item.content_text.split()) <= 80, item.content_text
        assert not re.search(r"[{}\[\]|]|  |::|,,", item.title + " " + item.content_text), item
        assert item.content_text == item.content_text.strip()


@pytest.mark.parametrize(
    ("desk", "weekday_items", "weekend_items"),
    [("newsroom", (115, 150), (75, 110)), ("operations", (90, 112), (70, 92))],
)
def test_days_have_the_volume_of_their_desk(archive, desk, weekday_items, weekend_items):
    for day, count in per_day(of_desk(archive, desk)).items():
        # The archive starts on a Saturday, so days 0, 1, 7, 8 and 14 are at the weekend.
        least, most = weekend_items if day % 7 in {0, 1} else weekday_items
        assert least <= count <= most, day


def test_the_whole_archive_has_about_three_thousand_items(archive):
    assert 2900 <= len(archive) <= 3500


@pytest.mark.parametrize("desk", ["newsroom", "operations"])
def test_a_desk_has_its_warm_up_words_before_the_first_story(archive, desk):
    early = [i for i in of_desk(archive, desk) if i.published_s < START_S + 4.5 * DAY_S]
    assert sum(len(words_of(item.content_text)) for item in early) > 20_000


def test_newsroom_nights_are_quieter_than_newsroom_days(archive):
    hours = Counter(int(item.published_s // HOUR_S) % 24 for item in of_desk(archive, "newsroom"))
    night = sum(hours[hour] for hour in range(5)) / 5
    day = sum(hours[hour] for hour in range(8, 18)) / 10
    assert night < day / 4


def test_the_press_offices_are_silent_at_night(archive):
    hours = {
        int(item.published_s // HOUR_S) % 24
        for item in archive
        if item.source in {"harbour-press", "town-council"}
    }
    assert hours
    assert hours <= set(range(6, 20))


def test_a_log_entry_gives_the_time_of_its_publication(archive):
    offsets = []
    for item in archive:
        clock = re.match(r"(\d\d)(\d\d) ", item.content_text)
        if item.source == "watch-log" and clock:
            moment_s = int(clock[1]) * HOUR_S + int(clock[2]) * 60
            offsets.append((item.published_s - moment_s) % DAY_S)
    assert len(offsets) > 100
    assert max(offsets) < 6 * 60


def test_papers_print_some_wire_items_word_for_word(archive):
    carriers = defaultdict(list)
    for item in archive:
        carriers[item.title, item.content_text].append(item.source)
    copied = [sources for sources in carriers.values() if len(sources) > 1]
    assert len(copied) > 10
    assert all(sources[0] == "ebbing-wire" for sources in copied)


def test_no_routine_word_is_bound_to_a_few_days(archive):
    """A word that is used often is used all along: what surges must have been planted."""
    for desk in ("newsroom", "operations"):
        days_of = defaultdict(set)
        uses = Counter()
        for item in of_desk(archive, desk):
            for word in set(words_of(item.content_text)):
                uses[word] += 1
                days_of[word].add(int((item.published_s - START_S) // DAY_S))
        # A word in 40 items is on 14 of 15 days by mere chance; planted ones are in ten at most.
        assert all(len(days_of[word]) >= 10 for word, count in uses.items() if count >= 40)
        assert sum(count >= 40 for count in uses.values()) > 300


def test_an_archive_too_short_to_learn_from_is_refused():
    with pytest.raises(ValueError, match="at least 2 days"):
        next(demo_archive(START_S, 1.5, RANDOM_STATE))


def test_desks_have_sources_of_their_own():
    newsroom, operations = demo_desks()
    assert (newsroom.name, operations.name) == ("newsroom", "operations")
    assert len(newsroom.sources) == 5
    assert len(operations.sources) == 3
    assert not set(newsroom.sources) & set(operations.sources)
    assert newsroom.alerts_per_day > 0
    assert operations.alerts_per_day > 0
