"""What a digest finds in the database: half-open times, usual volumes, slots."""

from dataclasses import replace

import pytest

from vanner.errors import DatabaseError
from vanner.records import SourceVolume
from vanner.store.digest_content import (
    DigestRow,
    cleared_between,
    has_slot,
    keep_digest,
    latest_digest,
    latest_slot_s,
    mark_filed,
    noted_between,
    raised_between,
    unfiled,
    volumes_between,
)
from vanner.store.pulses import keep_stories

FROM_S = 1_756_713_600.0
DAY_S = 86_400.0
UNTIL_S = FROM_S + DAY_S
# A moment before, on and after both ends of the digest's time; `on` counts at its end only.
MOMENTS = (FROM_S - 60, FROM_S, FROM_S + 60, UNTIL_S, UNTIL_S + 60)
ROW = DigestRow(
    "harbour", "0 8 * * *", "2025-09-02T10:00", UNTIL_S, FROM_S, UNTIL_S, "Two", "text", "<p>"
)


@pytest.fixture
def tell(database):
    def run(*stories):
        with database.write() as connection:
            for one in stories:
                keep_stories(connection, one.desk, [one], one.items[0].added_s, {})

    return run


@pytest.fixture
def found(database):
    """Story numbers, by the order of the digest; every story's id is its number here."""

    def run(between, desk="harbour"):
        with database.read() as connection:
            return [line.story_id for line in between(connection, desk, FROM_S, UNTIL_S)]

    return run


@pytest.fixture
def volume(database):
    def run(from_s=FROM_S, until_s=UNTIL_S):
        with database.read() as connection:
            (one,) = volumes_between(connection, ["quay-wire"], from_s, until_s)
        return one

    return run


def test_alerts_belong_to_the_digest_after_their_raising(tell, found, receive, make_story):
    at = {receive("a"): FROM_S}
    tell(*(make_story(number, at, raised_s=time) for number, time in enumerate(MOMENTS, 1)))
    assert found(raised_between) == [3, 4]
    assert found(noted_between) == found(cleared_between) == []


def test_noted_stories_belong_to_the_digest_after_their_noting(tell, found, receive, make_story):
    at = {receive("a"): FROM_S}
    tell(*(make_story(number, at, noted_s=time) for number, time in enumerate(MOMENTS, 1)))
    assert found(noted_between) == [3, 4]
    assert found(raised_between) == found(cleared_between) == []


def test_alerts_that_cleared_belong_to_the_digest_after_it(tell, found, receive, make_story):
    at = {receive("a"): FROM_S}
    made = [
        make_story(number, at, raised_s=FROM_S - 600, cleared_s=time)
        for number, time in enumerate(MOMENTS, 1)
    ]
    tell(*made, make_story(6, at, noted_s=FROM_S - 600, cleared_s=FROM_S + 60))
    assert found(cleared_between) == [3, 4]
    assert found(raised_between) == found(noted_between) == []


def test_an_alert_that_cleared_within_the_same_digest_is_in_both_lists(
    tell, found, receive, make_story
):
    tell(make_story(1, {receive("a"): FROM_S}, raised_s=FROM_S + 60, cleared_s=UNTIL_S))
    assert (found(raised_between), found(cleared_between)) == ([1], [1])


def test_a_story_noted_and_then_raised_is_told_once(tell, found, receive, make_story):
    tell(make_story(1, {receive("a"): FROM_S}, noted_s=FROM_S + 60, raised_s=FROM_S + 120))
    assert (found(raised_between), found(noted_between)) == ([1], [])


def test_alerts_come_oldest_first_and_noted_stories_strongest_first(
    tell, found, receive, make_story
):
    at = {receive("a"): FROM_S}
    tell(
        make_story(1, at, raised_s=FROM_S + 120),
        make_story(2, at, raised_s=FROM_S + 60),
        make_story(3, at, noted_s=FROM_S + 60, bits=9.0),
        make_story(4, at, noted_s=FROM_S + 60, bits=11.0),
        make_story(5, at, noted_s=FROM_S + 60, bits=9.0),
    )
    assert found(raised_between) == [2, 1]
    assert found(noted_between) == [4, 3, 5]


def test_a_digest_tells_its_own_desks_stories_only(tell, found, receive, make_story):
    at = {receive("a"): FROM_S}
    tell(make_story(1, at, raised_s=UNTIL_S), make_story(1, at, raised_s=UNTIL_S, desk="town"))
    assert found(raised_between) == [1]
    assert found(raised_between, desk="town") == [2]


def test_a_source_never_heard_of_has_no_usual_volume(volume):
    assert volume() == SourceVolume("quay-wire", 0, None, None, False)


def test_a_volume_counts_items_from_the_start_up_to_but_not_at_the_end(volume, receive):
    for guid, time_s in [("a", FROM_S), ("b", UNTIL_S - 1), ("c", UNTIL_S)]:
        receive(guid, time_s)
    receive("elsewhere", FROM_S, source="mill-desk")
    assert volume() == SourceVolume("quay-wire", 2, None, UNTIL_S - 1, False)


def test_a_revision_is_no_further_item(volume, receive):
    receive("a", FROM_S, text="first")
    receive("a", FROM_S + 60, text="second")
    assert volume().items == 1


def test_the_usual_volume_is_the_mean_of_the_days_before(volume, receive):
    for number in range(12):
        receive(f"item {number}", FROM_S - 4 * DAY_S + number * 3600)
    assert volume().usual == pytest.approx(3.0)
    assert volume(FROM_S, FROM_S + DAY_S / 2).usual == pytest.approx(1.5)


def test_the_usual_volume_looks_back_fourteen_days_and_no_further(volume, receive):
    receive("old", FROM_S - 14 * DAY_S - 1)
    assert volume().usual == 0.0
    receive("first", FROM_S - 14 * DAY_S)
    assert volume().usual == pytest.approx(1 / 14)


def test_a_digest_longer_than_fourteen_days_scales_their_mean(volume, receive):
    receive("old", FROM_S - 15 * DAY_S)
    receive("one", FROM_S - DAY_S)
    assert volume(FROM_S, FROM_S + 28 * DAY_S).usual == pytest.approx(2.0)


@pytest.mark.parametrize(("age_s", "known"), [(DAY_S - 1, False), (DAY_S, True)])
def test_a_source_younger_than_the_digest_is_long_has_no_usual_volume(
    volume, receive, age_s, known
):
    for number in range(6):
        receive(f"item {number}", FROM_S - age_s)
    one = volume()
    assert (one.usual is not None, one.quiet) == (known, known)


def test_what_was_taught_says_nothing_about_how_much_usually_comes(volume, receive):
    for number in range(20):
        receive(f"item {number}", FROM_S - 2 * DAY_S, teaches=True)
    one = volume()
    assert (one.usual, one.quiet) == (0.0, False)


@pytest.mark.parametrize(("a_day", "quiet"), [(4, False), (5, True)])
def test_a_source_is_quiet_when_it_brought_nothing_though_five_were_to_be_expected(
    volume, receive, a_day, quiet
):
    for number in range(a_day):
        receive(f"item {number}", FROM_S - DAY_S)
    assert volume().quiet is quiet


def test_a_source_that_brought_one_item_is_not_quiet(volume, receive):
    for number in range(50):
        receive(f"item {number}", FROM_S - DAY_S)
    receive("now", FROM_S)
    assert (volume().items, volume().quiet) == (1, False)


def test_the_volumes_come_in_the_order_of_the_sources_asked_for(database, receive):
    receive("a", FROM_S, source="mill-desk")
    with database.read() as connection:
        found = volumes_between(connection, ["quay-wire", "mill-desk"], FROM_S, UNTIL_S)
    assert [(one.source, one.items) for one in found] == [("quay-wire", 0), ("mill-desk", 1)]


def test_a_slot_has_one_digest(database, sql):
    def keep(row=ROW, *, filed=False):
        with database.write() as connection:
            return keep_digest(connection, row, filed=filed)

    assert keep() == 1
    with pytest.raises(DatabaseError):
        keep()
    assert keep(replace(ROW, schedule="0 20 * * *")) == 2
    assert keep(replace(ROW, desk="town")) == 3
    assert sql("SELECT digest_id, scheduled_for, covers_from, covers_until FROM digests")[0] == (
        1, "2025-09-02T08:00:00Z", "2025-09-01T08:00:00Z", "2025-09-02T08:00:00Z",
    )  # fmt: skip


def test_slots_are_found_by_desk_schedule_and_local_time(database):
    with database.write() as connection:
        keep_digest(connection, ROW, filed=False)
        assert has_slot(connection, "harbour", "0 8 * * *", "2025-09-02T10:00")
        for other in [
            ("town", "0 8 * * *", "2025-09-02T10:00"),
            ("harbour", "0 9 * * *", "2025-09-02T10:00"),
            ("harbour", "0 8 * * *", "2025-09-03T10:00"),
        ]:
            assert not has_slot(connection, *other)
        assert latest_slot_s(connection, "harbour", UNTIL_S + 1.0) == UNTIL_S
        assert latest_slot_s(connection, "harbour", UNTIL_S) is None
        assert latest_slot_s(connection, "town", UNTIL_S + 1.0) is None


def test_the_latest_digest_is_that_of_the_latest_slot(database):
    with database.write() as connection:
        assert latest_digest(connection, "harbour") is None
        keep_digest(connection, ROW, filed=False)
        earlier = replace(ROW, local_slot="2025-09-01T10:00", scheduled_s=FROM_S)
        keep_digest(connection, earlier, filed=False)
        assert latest_digest(connection, "harbour") == ROW


def test_digests_wait_for_their_files_oldest_first(database):
    with database.write() as connection:
        first = keep_digest(connection, ROW, filed=False)
        keep_digest(connection, replace(ROW, desk="rebuilt"), filed=True)
        second = keep_digest(connection, replace(ROW, desk="town"), filed=False)
        assert unfiled(connection) == [(first, ROW), (second, replace(ROW, desk="town"))]
        mark_filed(connection, first)
        assert [number for number, _ in unfiled(connection)] == [second]
