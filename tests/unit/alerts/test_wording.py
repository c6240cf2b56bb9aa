"""Times, numbers, links and slugs."""

from datetime import UTC, datetime
from zoneinfo import ZoneInfo

import pytest

from vanner.alerts.wording import amount, counted, full_time, near_time, slug, sql_text, web_link

VIENNA = ZoneInfo("Europe/Vienna")


def utc(text):
    return datetime.fromisoformat(text).replace(tzinfo=UTC).timestamp()


def test_a_full_time_names_day_year_and_zone():
    assert full_time(utc("2026-03-04T06:00"), VIENNA) == "Wed 4 Mar 2026 07:00 CET"
    assert full_time(utc("2026-07-01T05:00"), VIENNA) == "Wed 1 Jul 2026 07:00 CEST"
    assert full_time(utc("2026-07-01T05:00"), ZoneInfo("Asia/Kathmandu")).endswith("10:45 +0545")


@pytest.mark.parametrize(
    ("time", "expected"),
    [
        ("2026-03-04T04:00", "05:00 CET"),
        ("2026-03-03T22:59", "Tue 3 Mar 23:59 CET"),
        ("2025-12-31T12:00", "Wed 31 Dec 2025 13:00 CET"),
    ],
)
def test_a_time_beside_another_says_no_more_than_is_needed(time, expected):
    assert near_time(utc(time), VIENNA, utc("2026-03-04T06:00")) == expected


def test_the_hour_that_occurs_twice_is_told_apart_by_its_zone():
    beside = utc("2026-10-25T06:00")
    assert near_time(utc("2026-10-25T00:30"), VIENNA, beside) == "02:30 CEST"
    assert near_time(utc("2026-10-25T01:30"), VIENNA, beside) == "02:30 CET"


@pytest.mark.parametrize(
    ("mean", "expected"),
    [
        (0.0, "0"),
        (0.0004, "under 0.01"),
        (0.012, "0.01"),
        (0.094, "0.09"),
        (0.096, "0.1"),
        (0.4, "0.4"),
        (3.14, "3.1"),
        (12.4, "12"),
        (1234.5, "1234"),
    ],
)
def test_a_mean_is_written_as_exactly_as_a_reader_needs_it(mean, expected):
    assert amount(mean) == expected


def test_numbers_agree_with_their_nouns():
    assert [counted(n, "item") for n in (0, 1, 2)] == ["no items", "1 item", "2 items"]


@pytest.mark.parametrize(
    "url",
    [
        None,
        "javascript:alert(1)",
        "data:text/html,x",
        "ftp://files.example/x",
        "https://a.example/x y",
        "https://a.example/\nhttps://b.example/",
        'https://a.example/"onclick="x',
        "https://a.example/\u202egpj",
        "//a.example/x",
    ],
)
def test_only_plain_web_addresses_become_links(url):
    assert web_link(url) is None


def test_web_addresses_stay_as_they_are():
    for url in ("https://a.example/x?y=1&z=2#part", "HTTP://a.example", "https://ä.example/ö"):
        assert web_link(url) == url


def test_a_plain_name_is_its_own_slug():
    assert slug("metro-2") == "metro-2"


def test_different_names_have_different_slugs_that_are_safe_in_file_names():
    names = ["metro", "Metro", "metro ", "me/tro", "me tro", "../metro", "Küste", "Kuste", "港", ""]
    slugs = [slug(name) for name in names]
    assert len(set(slugs)) == len(names)
    assert all(set(s) <= set("abcdefghijklmnopqrstuvwxyz0123456789-") and s for s in slugs)
    assert slug("City Desk").startswith("city-desk-")


def test_an_sql_text_cannot_end_early():
    assert sql_text("O'Malley\n") == "'O''Malley'"
