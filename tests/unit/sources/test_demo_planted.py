"""The planted stories: told in the archive, by several sources, in words of their own."""

import re
from itertools import combinations

import pytest

from vanner.clock import DAY_S, HOUR_S
from vanner.sources.demo import (
    demo_archive,
    demo_desks,
    demo_live,
    planted_live,
    planted_stories,
)
from vanner.sources.demo.script import script

START_S = 1_950_220_800.0
DAYS = 15.0
RANDOM_STATE = 8
SECONDS = 60.0
LIVE_START_S = START_S + DAYS * DAY_S
SOURCES = {desk.name: set(desk.sources) for desk in demo_desks()}
STORIES = planted_stories(START_S, DAYS, RANDOM_STATE)
LIVE_STORIES = planted_live(LIVE_START_S, SECONDS, RANDOM_STATE)


def words_of(item):
    return set(re.findall(r"[a-z]+", f"{item.title} {item.content_text}".lower()))


@pytest.fixture(scope="module")
def archive():
    return list(demo_archive(START_S, DAYS, RANDOM_STATE))


@pytest.fixture(scope="module")
def everything(archive):
    return archive + list(demo_live(LIVE_START_S, SECONDS, RANDOM_STATE))


def told(items, story):
    return [item for item in items if item.guid in story.guids]


def test_there_are_stories_for_both_desks():
    assert sum(story.desk == "newsroom" for story in STORIES) >= 5
    assert sum(story.desk == "operations" for story in STORIES) >= 3
    assert sorted(story.desk for story in LIVE_STORIES) == ["newsroom", "operations"]


def test_the_same_arguments_plant_the_same_stories():
    assert planted_stories(START_S, DAYS, RANDOM_STATE) == STORIES
    assert planted_live(LIVE_START_S, SECONDS, RANDOM_STATE) == LIVE_STORIES


def test_names_and_guids_are_unique():
    stories = STORIES + LIVE_STORIES
    guids = [guid for story in stories for guid in story.guids]
    assert len({story.name for story in stories}) == len(stories)
    assert len(set(guids)) == len(guids)


@pytest.mark.parametrize("random_state", range(20))
@pytest.mark.parametrize("offset_s", [0.0, 5.3 * DAY_S])
def test_stories_lie_between_the_fifth_day_and_the_end(random_state, offset_s):
    start_s = START_S + offset_s
    for story in planted_stories(start_s, DAYS, random_state):
        assert story.start_s >= start_s + 5 * DAY_S
        assert story.end_s < start_s + DAYS * DAY_S
        assert 2 * HOUR_S <= story.end_s - story.start_s <= 10 * HOUR_S


def test_stories_of_a_desk_do_not_overlap():
    for one, other in combinations(STORIES, 2):
        if one.desk == other.desk:
            assert one.end_s < other.start_s


@pytest.mark.parametrize("days", [2.0, 6.0, 40.0])
def test_stories_fit_archives_of_other_lengths(days):
    guids = {item.guid for item in demo_archive(START_S, days, RANDOM_STATE)}
    for story in planted_stories(START_S, days, RANDOM_STATE):
        assert set(story.guids) <= guids
        assert START_S + days / 4 * DAY_S <= story.start_s
        assert story.end_s < START_S + days * DAY_S


@pytest.mark.parametrize("story", STORIES + LIVE_STORIES, ids=lambda story: story.name)
def test_every_item_of_a_story_is_there_with_the_sources_of_its_desk(everything, story):
    items = told(everything, story)
    assert [item.guid for item in items] == list(story.guids)
    assert 5 <= len(items) <= 12
    assert {item.source for item in items} == set(story.sources)
    assert len(story.sources) >= 2
    assert set(story.sources) <= SOURCES[story.desk]
    assert items[0].published_s == story.start_s
    assert items[-1].published_s == story.end_s


@pytest.mark.parametrize("story", STORIES + LIVE_STORIES, ids=lambda story: story.name)
def test_distinctive_words_are_absent_before_the_story(everything, story):
    before = [
        item
        for item in everything
        if item.source in SOURCES[story.desk] and item.published_s < story.start_s
    ]
    assert len(before) > 300
    assert not [item for item in before if words_of(item) & set(story.words)]


@pytest.mark.parametrize("story", STORIES + LIVE_STORIES, ids=lambda story: story.name)
def test_distinctive_words_keep_company_within_the_story(everything, story):
    items = told(everything, story)
    assert 3 <= len(story.words) <= 6
    for item in items:
        assert len(words_of(item) & set(story.words)) >= 2, item.title
    often = [word for word in story.words if sum(word in words_of(i) for i in items) >= 5]
    assert len(often) >= 2


@pytest.mark.parametrize("story", STORIES + LIVE_STORIES, ids=lambda story: story.name)
def test_each_item_of_a_story_has_a_wording_of_its_own(everything, story):
    for one, other in combinations(told(everything, story), 2):
        shared = words_of(one) & words_of(other)
        assert len(shared) < 0.6 * min(len(words_of(one)), len(words_of(other)))


def test_no_two_stories_share_a_distinctive_word():
    for one, other in combinations(STORIES + LIVE_STORIES, 2):
        assert not set(one.words) & set(other.words)


@pytest.mark.parametrize("seconds", [10.0, 60.0, 600.0])
def test_live_stories_are_told_in_the_first_half(seconds):
    for story in planted_live(LIVE_START_S, seconds, RANDOM_STATE):
        assert 6 <= len(story.guids) <= 10
        assert story.start_s > LIVE_START_S
        assert story.end_s <= LIVE_START_S + seconds / 2


def test_a_live_time_of_nothing_is_refused():
    with pytest.raises(ValueError, match="more than none"):
        planted_live(LIVE_START_S, 0.0, RANDOM_STATE)


def test_a_story_without_a_source_line_is_refused():
    with pytest.raises(ValueError, match=r"source \| title"):
        script("Nothing", "newsroom", "nothing", 1.0, "A title without a bar\nand its text")
