from datetime import UTC, datetime

import pytest

from vanner.sources.feed.dates import retry_at_s, seconds_of

# 12 March 2031, 08:30:15 UTC
MOMENT_S = datetime(2031, 3, 12, 8, 30, 15, tzinfo=UTC).timestamp()


@pytest.mark.parametrize(
    "text",
    [
        "Wed, 12 Mar 2031 08:30:15 GMT",
        "Wed, 12 Mar 2031 10:30:15 +0200",
        "12 Mar 2031 08:30:15 -0000",
        "2031-03-12T08:30:15Z",
        "2031-03-12T03:30:15-05:00",
        " 2031-03-12 08:30:15 ",
    ],
)
def test_the_two_usual_forms_are_read_as_utc(text):
    assert seconds_of(text) == MOMENT_S


def test_a_parsed_tuple_goes_first():
    assert seconds_of("gestern", (2031, 3, 12, 8, 30, 15, 2, 71, 0)) == MOMENT_S


def test_an_impossible_tuple_leaves_the_text_to_be_read():
    assert seconds_of("2031-03-12T08:30:15Z", (2031, 99, 12, 8, 30, 15, 2, 71, 0)) == MOMENT_S


@pytest.mark.parametrize(
    "text", [None, "", "  ", "gestern", "32 Mar 2031", "2031-02-30", "(" * 5000, "9" * 5000]
)
def test_what_is_no_date_is_none(text):
    assert seconds_of(text) is None


def test_a_year_that_cannot_be_written_is_none():
    assert seconds_of(None, (12031, 3, 12, 8, 30, 15, 2, 71, 0)) is None


def test_retry_after_in_seconds_counts_from_now():
    assert retry_at_s(" 120 ", 1000.0) == 1120.0


def test_retry_after_as_a_date_is_that_moment():
    assert retry_at_s("Wed, 12 Mar 2031 08:30:15 GMT", 1000.0) == MOMENT_S


def test_a_retry_after_that_has_passed_is_now():
    assert retry_at_s("Wed, 12 Mar 2031 08:30:15 GMT", MOMENT_S + 60) == MOMENT_S + 60


@pytest.mark.parametrize("header", [None, "", "soon", "-5", "1e99", "9" * 400])
def test_an_unreadable_retry_after_is_none(header):
    assert retry_at_s(header, 1000.0) is None
