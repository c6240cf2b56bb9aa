"""Durations: what is read, what is refused, and pulses that divide an hour."""

from __future__ import annotations

import pytest
from pydantic import ValidationError

from vanner.settings import ServiceSettings
from vanner.settings.duration import parse_duration


@pytest.mark.parametrize(
    ("text", "seconds"),
    [
        ("90s", 90.0),
        ("15m", 900.0),
        ("6h", 21600.0),
        ("28d", 2419200.0),
        ("2w", 1209600.0),
        (" 1.5 h ", 5400.0),
        (45, 45.0),
        (0.5, 0.5),
    ],
)
def test_duration_is_read_in_seconds(text, seconds):
    assert parse_duration(text) == seconds


@pytest.mark.parametrize(
    "value",
    ["", "5", "m", "5 min", "-5m", "1e3s", "٣s", "0s", 0, -1, float("nan"), float("-inf"), True,
     None, [5], {"s": 5}, "3661d", float("inf"), 10**400, -(10**400), "9" * 400 + "s"],
)  # fmt: skip
def test_what_is_no_duration_is_refused(value):
    with pytest.raises(ValueError, match=r"^a duration"):
        parse_duration(value)


@pytest.mark.parametrize("pulse", ["1s", "30s", "60s", "90s", "5m", "20m", "1h", 1.5, 3600])
def test_pulse_that_divides_an_hour_is_taken(pulse):
    assert 3600 % ServiceSettings(pulse=pulse).pulse == 0


@pytest.mark.parametrize("pulse", ["7s", "59s", "40m", "61m", "2h", 0.5, 0.9999999, 1.0000001])
def test_pulse_that_does_not_is_refused(pulse):
    with pytest.raises(ValidationError, match="divide an hour evenly"):
        ServiceSettings(pulse=pulse)
