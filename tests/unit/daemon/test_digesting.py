"""Digests: one a slot whatever happens, each from where the one before it ended."""

from datetime import UTC, datetime
from itertools import pairwise

import pytest

from vanner.clock import iso_utc, parse_iso
from vanner.daemon.digesting import DigestBook, preview_digest
from vanner.daemon.engine import Engine
from vanner.store.digest_content import unfiled
from vanner.store.outbox import counts_by_state

BEGIN_S = parse_iso("2024-01-10T05:20:00Z")
HOUR_S = 3600.0
MAIL = ("watch@quay.example", "night@quay.example")


def _go_on(database, plans, until_s, begin_s=BEGIN_S, **told):
    engine = Engine(database, plans, 60.0, **told)
    engine.begin(begin_s)
    engine.advance(until_s)
    return engine


def _told(dump, database):
    """(desk, due, covers from, covers until) of every digest in the order of its making."""
    rows = sorted(dump(database)["digests"])
    return [row[1:5] for row in rows]


def test_digests_follow_each_other_without_gap_or_overlap_from_the_desks_start(
    open_database, dump, plan
):
    database = open_database()
    _go_on(database, [plan(schedules=("0 */2 * * *",))], BEGIN_S + 20 * HOUR_S)
    told = _told(dump, database)
    assert told[0][1:] == ("2024-01-10T06:00:00Z", iso_utc(BEGIN_S), "2024-01-10T06:00:00Z")
    assert len(told) == 10
    assert all(due == until for _, due, _, until in told)
    assert all(before[3] == after[2] for before, after in pairwise(told))


def test_a_desk_that_begins_at_a_slot_has_its_first_digest_at_the_next(open_database, dump, plan):
    database = open_database()
    begin_s = parse_iso("2024-01-10T06:00:00Z")
    engine = Engine(database, [plan(schedules=("0 * * * *",))], 60.0)
    engine.begin(begin_s)
    engine.advance(begin_s + 2 * HOUR_S)
    assert [due for _, due, _, _ in _told(dump, database)] == [
        "2024-01-10T07:00:00Z",
        "2024-01-10T08:00:00Z",
    ]


def test_restarts_before_at_and_after_a_slot_make_its_digest_and_mail_once(
    open_database, dump, plan
):
    plans = [plan(schedules=("0 * * * *",), recipients=MAIL)]
    whole, often = open_database("whole.db"), open_database("often.db")
    _go_on(whole, plans, BEGIN_S + 6 * HOUR_S)
    slot_s = parse_iso("2024-01-10T08:00:00Z")
    for until_s in (slot_s - 60.0, slot_s, slot_s, slot_s + 59.0, slot_s + 60.0, slot_s + 60.0):
        _go_on(often, plans, until_s, pulses_per_checkpoint=1)
    _go_on(often, plans, BEGIN_S + 6 * HOUR_S).save()
    assert dump(often) == dump(whole)
    assert len(dump(often)["mail"]) == len(dump(often)["digests"]) == 6


def test_what_was_missed_while_nothing_ran_is_made_at_the_start_in_its_order(
    open_database, dump, plan
):
    plans = [plan("quay", schedules=("0 * * * *",)), plan("mast", schedules=("0 */2 * * *",))]
    database = open_database()
    _go_on(database, plans, BEGIN_S + 60.0)
    assert _told(dump, database) == []
    _go_on(database, plans, BEGIN_S + 5 * HOUR_S)
    assert [(desk, due[11:16]) for desk, due, _, _ in _told(dump, database)] == [
        ("quay", "06:00"),
        ("mast", "06:00"),
        ("quay", "07:00"),
        ("quay", "08:00"),
        ("mast", "08:00"),
        ("quay", "09:00"),
        ("quay", "10:00"),
        ("mast", "10:00"),
    ]


@pytest.mark.parametrize(
    ("begin", "cron", "due"),
    [
        # Clocks go forward from 02:00 to 03:00 CET at 01:00 UTC; from memory, EU directive
        # 2000/84/EC: the last Sunday of March.
        ("2024-03-30T22:10:00Z", "30 * * * *", ["22:30", "23:30", "00:30", "01:30", "02:30"]),
        ("2024-03-30T22:10:00Z", "30 2 * * *", ["01:30"]),
        ("2024-03-30T22:10:00Z", "0 3 * * *", ["01:00"]),
        # And back from 03:00 CEST to 02:00 at 01:00 UTC on the last Sunday of October: 02:30
        # occurs at 00:30 and at 01:30 UTC.
        ("2024-10-26T22:10:00Z", "30 * * * *", ["22:30", "23:30", "00:30", "02:30"]),
        ("2024-10-26T22:10:00Z", "30 2 * * *", ["00:30"]),
        ("2024-10-26T22:10:00Z", "0 3 * * *", ["02:00"]),
    ],
)
def test_a_change_of_the_clock_makes_no_digest_twice_and_leaves_none_out(
    open_database, dump, plan, begin, cron, due
):
    begin_s = parse_iso(begin)
    plans = [plan(zone="Europe/Berlin", schedules=(cron,), recipients=MAIL)]
    database, whole = open_database("often.db"), open_database("whole.db")
    for part in range(1, 12):  # a restart every 25 minutes
        _go_on(database, plans, begin_s + part * 1500.0, begin_s)
    _go_on(whole, plans, begin_s + 11 * 1500.0, begin_s)
    told = _told(dump, database)
    assert [row[1][11:16] for row in told] == due
    assert all(before[3] == after[2] for before, after in pairwise(told))
    assert dump(database) == dump(whole)
    assert len(dump(database)["mail"]) == len(due)


def test_two_schedules_of_a_desk_that_meet_have_a_digest_and_a_mail_each(open_database, dump, plan):
    database = open_database()
    plans = [plan(schedules=("0 6 * * *", "0 */6 * * 3"), recipients=MAIL)]  # a Wednesday
    _go_on(database, plans, BEGIN_S + HOUR_S)
    assert [row[1] for row in _told(dump, database)] == ["2024-01-10T06:00:00Z"] * 2
    assert len(dump(database)["mail"]) == 2


def test_digests_of_several_schedules_follow_each_other_and_tell_nothing_twice(
    open_database, dump, plan
):
    database = open_database()
    schedules = ("0 7 * * *", "0 15 * * *", "0 23 * * *")
    _go_on(database, [plan(schedules=schedules)], BEGIN_S + 40 * HOUR_S)
    told = _told(dump, database)
    assert len(told) == 5
    assert all(before[3] == after[2] for before, after in pairwise(told))


def test_a_changed_schedule_goes_on_from_the_last_digest(open_database, dump, plan):
    database = open_database()
    _go_on(database, [plan(schedules=("0 6 * * *",))], BEGIN_S + 60 * HOUR_S)
    _go_on(database, [plan(schedules=("0 7 * * *",))], BEGIN_S + 90 * HOUR_S)
    told = _told(dump, database)
    assert {due[11:16] for _, due, _, _ in told} == {"06:00", "07:00"}
    assert all(before[3] == after[2] for before, after in pairwise(told))


def test_a_desk_without_recipients_has_digests_and_no_mail(open_database, dump, plan):
    database = open_database()
    _go_on(database, [plan(schedules=("0 * * * *",))], BEGIN_S + 3 * HOUR_S)
    rows = dump(database)
    assert (len(rows["digests"]), rows["mail"]) == (3, [])


def test_mail_that_is_withheld_is_kept_for_the_record_and_files_count_as_written(
    open_database, plan
):
    database = open_database()
    plans = [plan(schedules=("0 * * * *",), recipients=MAIL)]
    _go_on(database, plans, BEGIN_S + 3 * HOUR_S, withhold_mail=True)
    with database.read() as connection:
        assert counts_by_state(connection) == {"withheld": 3}
        assert unfiled(connection) == []


def test_digests_of_a_service_wait_to_be_filed_and_their_mail_to_be_sent(open_database, plan):
    database = open_database()
    plans = [plan(schedules=("0 * * * *",), recipients=MAIL)]
    _go_on(database, plans, BEGIN_S + 3 * HOUR_S)
    with database.read() as connection:
        assert counts_by_state(connection) == {"queued": 3}
        waiting = unfiled(connection)
    assert [row.local_slot for _, row in waiting] == [
        f"2024-01-10T{hour}:00" for hour in ("06", "07", "08")
    ]


def test_a_preview_covers_the_time_since_the_last_digest_and_writes_nothing(
    open_database, dump, plan
):
    database = open_database()
    one = plan(schedules=("0 * * * *",), recipients=MAIL)
    _go_on(database, [one], BEGIN_S + 30 * 60.0)
    with database.read() as connection:
        first = preview_digest(connection, one, BEGIN_S + 35 * 60.0)
    assert "05:20" in first.body_text
    _go_on(database, [one], BEGIN_S + 3 * HOUR_S)
    before = dump(database)
    with database.read() as connection:
        later = preview_digest(connection, one, BEGIN_S + 3 * HOUR_S)
    assert "08:00" in later.body_text
    assert "05:20" not in later.body_text
    assert dump(database) == before


def _ahead(book, limit_s):
    """Every slot up to a time, struck off as it comes."""
    found = []
    while (due := book.next(limit_s)) is not None:
        found.append((due[0].desk, due[2].scheduled_s))
        book.done(due)
    return found


@pytest.mark.parametrize("pause_s", [1800.0, 5000.0, 86400.0 * 5])
def test_slots_come_in_order_of_time_then_of_the_settings_whatever_the_pauses(plan, pause_s):
    plans = [plan("mast", schedules=("0 */3 * * *",)), plan("quay", schedules=("0 * * * *",))]
    until_s = BEGIN_S + 3 * 86400.0
    book, found, now_s = DigestBook(plans, BEGIN_S), [], BEGIN_S
    while now_s < until_s:
        now_s = min(now_s + pause_s, until_s)
        found += _ahead(book, now_s)
    expected = []
    for hour in range(int(BEGIN_S // HOUR_S) + 1, int(until_s // HOUR_S) + 1):
        if datetime.fromtimestamp(hour * HOUR_S, UTC).hour % 3 == 0:
            expected.append(("mast", hour * HOUR_S))
        expected.append(("quay", hour * HOUR_S))
    assert found == expected


def test_without_schedules_no_slot_ever_comes(plan):
    assert DigestBook([plan()], BEGIN_S).next(BEGIN_S + 9e6) is None


def test_a_slot_that_is_not_struck_off_comes_again(plan):
    book = DigestBook([plan(schedules=("0 * * * *",))], BEGIN_S)
    first = book.next(BEGIN_S + 5 * HOUR_S)
    assert book.next(BEGIN_S + 5 * HOUR_S) == first
    assert book.next(BEGIN_S) is None
