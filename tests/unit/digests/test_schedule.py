"""Cron slots on the wall clock. Changes of the clock are those of the IANA time zone database."""

from datetime import UTC, datetime, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from vanner.digests.schedule import Slot, slots

VIENNA = ZoneInfo("Europe/Vienna")
NEW_YORK = ZoneInfo("America/New_York")
LORD_HOWE = ZoneInfo("Australia/Lord_Howe")
KATHMANDU = ZoneInfo("Asia/Kathmandu")
APIA = ZoneInfo("Pacific/Apia")


def utc(text):
    return datetime.fromisoformat(text).replace(tzinfo=UTC).timestamp()


def between(cron, zone, after, until):
    """Slots as (local, UTC) pairs; the bounds are UTC."""
    return [
        (slot.local, datetime.fromtimestamp(slot.scheduled_s, UTC).strftime("%Y-%m-%dT%H:%M"))
        for slot in slots(cron, zone, utc(after), utc(until))
    ]


def test_a_daily_slot_follows_the_wall_clock_through_both_changes_of_the_year():
    assert between("0 7 * * *", VIENNA, "2026-03-28T00:00", "2026-03-30T00:00") == [
        ("2026-03-28T07:00", "2026-03-28T06:00"),
        ("2026-03-29T07:00", "2026-03-29T05:00"),
    ]
    assert between("0 7 * * *", VIENNA, "2026-10-24T00:00", "2026-10-26T00:00") == [
        ("2026-10-24T07:00", "2026-10-24T05:00"),
        ("2026-10-25T07:00", "2026-10-25T06:00"),
    ]


@pytest.mark.parametrize(
    ("zone", "cron", "after", "until", "expected"),
    [
        # Vienna: 02:00 becomes 03:00 at 01:00 UTC on 29 March 2026.
        (VIENNA, "30 2 * * *", "2026-03-29T00:00", "2026-03-29T12:00", "2026-03-29T01:30"),
        # New York: 02:00 becomes 03:00 at 07:00 UTC on 8 March 2026.
        (NEW_YORK, "15 2 * * *", "2026-03-08T00:00", "2026-03-08T23:00", "2026-03-08T07:15"),
        # Lord Howe: 02:00 becomes 02:30 at 15:30 UTC on 3 October 2026.
        (LORD_HOWE, "10 2 * * *", "2026-10-03T00:00", "2026-10-04T00:00", "2026-10-03T15:40"),
    ],
)
def test_a_wall_time_that_is_left_out_in_spring_is_due_by_the_offset_before_the_change(
    zone, cron, after, until, expected
):
    found = between(cron, zone, after, until)
    minute, hour = cron.split()[:2]
    assert [instant for _, instant in found] == [expected]
    assert found[0][0].endswith(f"T{int(hour):02}:{int(minute):02}")


@pytest.mark.parametrize(
    ("zone", "cron", "after", "until", "expected"),
    [
        # Vienna: 03:00 becomes 02:00 at 01:00 UTC on 25 October 2026.
        (VIENNA, "30 2 * * *", "2026-10-24T12:00", "2026-10-25T12:00", "2026-10-25T00:30"),
        # New York: 02:00 becomes 01:00 at 06:00 UTC on 1 November 2026.
        (NEW_YORK, "30 1 * * *", "2026-10-31T12:00", "2026-11-01T12:00", "2026-11-01T05:30"),
        # Lord Howe: 02:00 becomes 01:30 at 15:00 UTC on 4 April 2026.
        (LORD_HOWE, "45 1 * * *", "2026-04-04T00:00", "2026-04-05T00:00", "2026-04-04T14:45"),
    ],
)
def test_a_wall_time_that_occurs_twice_in_autumn_is_due_once_at_its_first_occurrence(
    zone, cron, after, until, expected
):
    assert [instant for _, instant in between(cron, zone, after, until)] == [expected]


def test_hourly_slots_leave_one_gap_of_two_hours_when_the_clock_goes_back():
    found = between("0 * * * *", VIENNA, "2026-10-24T22:30", "2026-10-25T03:00")
    assert found == [
        ("2026-10-25T01:00", "2026-10-24T23:00"),
        ("2026-10-25T02:00", "2026-10-25T00:00"),
        ("2026-10-25T03:00", "2026-10-25T02:00"),
        ("2026-10-25T04:00", "2026-10-25T03:00"),
    ]


def test_hourly_slots_come_every_hour_when_the_clock_goes_forward():
    found = between("0 * * * *", VIENNA, "2026-03-28T23:30", "2026-03-29T02:00")
    assert found == [
        ("2026-03-29T01:00", "2026-03-29T00:00"),
        ("2026-03-29T03:00", "2026-03-29T01:00"),
        ("2026-03-29T04:00", "2026-03-29T02:00"),
    ]


def test_a_slot_a_minute_comes_each_minute_in_spring_and_pauses_for_the_repeated_hour():
    spring = slots("* * * * *", VIENNA, utc("2026-03-29T00:00"), utc("2026-03-29T03:00"))
    assert {b.scheduled_s - a.scheduled_s for a, b in pairwise(spring)} == {60.0}
    assert len(spring) == 180
    autumn = slots("* * * * *", VIENNA, utc("2026-10-24T23:00"), utc("2026-10-25T03:00"))
    steps = [b.scheduled_s - a.scheduled_s for a, b in pairwise(autumn)]
    assert sorted(set(steps)) == [60.0, 3660.0]
    assert steps.count(3660.0) == 1
    assert len(autumn) == 180


def test_half_an_hour_that_repeats_on_lord_howe_pauses_for_half_an_hour():
    found = slots("* * * * *", LORD_HOWE, utc("2026-04-04T14:00"), utc("2026-04-04T16:00"))
    steps = [b.scheduled_s - a.scheduled_s for a, b in pairwise(found)]
    assert sorted(set(steps)) == [60.0, 1860.0]


def test_a_day_that_a_zone_left_out_gives_no_second_slot_on_the_day_after():
    # Samoa went from 29 to 31 December 2011 at midnight: from UTC-10 to UTC+14.
    assert between("0 7 * * *", APIA, "2011-12-29T00:00", "2011-12-31T12:00") == [
        ("2011-12-29T07:00", "2011-12-29T17:00"),
        ("2011-12-31T07:00", "2011-12-30T17:00"),
    ]


def test_zones_without_changes_map_one_to_one():
    assert between("0 7 * * *", ZoneInfo("UTC"), "2026-03-28T06:59", "2026-03-28T07:00") == [
        ("2026-03-28T07:00", "2026-03-28T07:00")
    ]
    assert between("0 7 * * *", KATHMANDU, "2026-03-28T00:00", "2026-03-28T12:00") == [
        ("2026-03-28T07:00", "2026-03-28T01:15")
    ]


def test_the_window_is_open_at_its_start_and_closed_at_its_end():
    seven, eight = utc("2026-05-04T07:00"), utc("2026-05-04T08:00")
    utc_zone = ZoneInfo("UTC")
    assert slots("0 7,8 * * *", utc_zone, seven, eight) == [Slot("2026-05-04T08:00", eight)]
    assert slots("0 7 * * *", utc_zone, seven - 0.001, seven) == [Slot("2026-05-04T07:00", seven)]
    assert slots("0 7 * * *", utc_zone, seven, seven) == []
    assert slots("0 7 * * *", utc_zone, eight, seven) == []


def test_a_day_matches_by_day_of_month_or_by_day_of_week_where_both_are_restricted():
    # POSIX.1-2017, crontab: a day matches where either of the two lists matches.
    # June 2026 begins on a Monday.
    found = between("0 6 13 6 1", ZoneInfo("UTC"), "2026-06-01T00:00", "2026-07-01T00:00")
    assert [local for local, _ in found] == [
        f"2026-06-{day:02}T06:00" for day in (1, 8, 13, 15, 22, 29)
    ]


def test_a_date_that_never_comes_gives_no_slots():
    assert slots("0 7 31 2 *", VIENNA, utc("2026-01-01T00:00"), utc("2027-01-01T00:00")) == []


def test_a_leap_day_is_found_years_ahead():
    found = between("0 0 29 2 *", ZoneInfo("UTC"), "2025-01-01T00:00", "2033-01-01T00:00")
    assert [local for local, _ in found] == ["2028-02-29T00:00", "2032-02-29T00:00"]


def test_a_left_out_wall_time_is_found_by_a_window_that_begins_after_the_change():
    found = between("30 2 * * *", VIENNA, "2026-03-29T01:15", "2026-03-29T01:45")
    assert found == [("2026-03-29T02:30", "2026-03-29T01:30")]


def test_a_repeated_wall_time_is_found_by_a_window_that_ends_in_the_repeated_hour():
    found = between("30 2 * * *", VIENNA, "2026-10-25T00:20", "2026-10-25T01:10")
    assert found == [("2026-10-25T02:30", "2026-10-25T00:30")]


def test_two_wall_times_that_fall_together_in_spring_are_one_slot_under_the_later():
    found = between("0 2,3 * * *", VIENNA, "2026-03-29T00:00", "2026-03-29T12:00")
    assert found == [("2026-03-29T03:00", "2026-03-29T01:00")]


def test_a_cron_text_that_cannot_be_read_is_an_error():
    with pytest.raises(ValueError, match="acceptable"):
        slots("61 7 * * *", VIENNA, 0.0, 86400.0)


CRONS = st.sampled_from(
    ["0 * * * *", "*/30 * * * *", "30 2 * * *", "0 0,2,3 * * *", "15 1-3 * * 0", "45 1,2 * * *"]
)
ZONES = st.sampled_from([VIENNA, NEW_YORK, LORD_HOWE, KATHMANDU, APIA, ZoneInfo("UTC")])
# Midnights UTC before changes in Vienna, New York, Lord Howe and Apia.
STARTS = st.sampled_from(
    [
        "2026-03-28",
        "2026-10-24",
        "2026-03-07",
        "2026-10-31",
        "2026-10-03",
        "2026-04-04",
        "2011-12-29",
        "2026-07-01",
    ]
)


@settings(deadline=None, max_examples=60)
@given(
    cron=CRONS,
    zone=ZONES,
    start=STARTS,
    cuts=st.lists(st.floats(0.0, 3 * 86400.0), max_size=5),
)
@example(cron="0 * * * *", zone=VIENNA, start="2026-03-28", cuts=[90000.0, 90001.0])
@example(cron="0 7 * * *", zone=APIA, start="2011-12-29", cuts=[147600.0])
def test_consecutive_windows_together_give_the_slots_of_the_whole_without_duplicates(
    cron, zone, start, cuts
):
    begin_s = utc(start + "T00:00")
    bounds = [begin_s, *sorted(begin_s + cut for cut in cuts), begin_s + 3 * 86400.0]
    whole = slots(cron, zone, bounds[0], bounds[-1])
    joined = [slot for a, b in pairwise(bounds) for slot in slots(cron, zone, a, b)]
    assert joined == whole
    assert len({slot.local for slot in whole}) == len(whole)
    assert len({slot.scheduled_s for slot in whole}) == len(whole)


@settings(deadline=None, max_examples=40)
@given(zone=ZONES, start=STARTS, minute=st.integers(0, 59), hour=st.integers(0, 23))
def test_a_daily_schedule_has_one_slot_for_each_calendar_day(zone, start, minute, hour):
    begin = datetime.fromisoformat(start).replace(tzinfo=UTC)
    found = slots(
        f"{minute} {hour} * * *",
        zone,
        begin.timestamp(),
        (begin + timedelta(days=3)).timestamp(),
    )
    days = [slot.local[:10] for slot in found]
    assert len(days) == len(set(days))
    # In three days every clock shows each wall time at least twice, whatever its changes,
    # and a day that Samoa left out counts for none.
    assert 2 <= len(days) <= 4
    for slot in found:
        wall = datetime.fromtimestamp(slot.scheduled_s, zone).replace(tzinfo=None)
        late = wall - datetime.fromisoformat(slot.local)
        assert timedelta(0) <= late <= timedelta(hours=1)
