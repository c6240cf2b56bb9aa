"""What signals do while a command runs."""

import os
import signal
import threading

import pytest

from vanner.cli.interrupting import interrupted_at_once, leave_at_latest, stop_signals


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGINT])
def test_a_signal_sets_the_event_and_ends_nothing(number):
    with stop_signals() as stop:
        assert not stop.is_set()
        os.kill(os.getpid(), number)
        assert stop.wait(30)


@pytest.mark.parametrize("guard", [stop_signals, interrupted_at_once])
def test_afterwards_signals_do_what_they_did_before(guard):
    numbers = (signal.SIGTERM, signal.SIGINT)
    before = [signal.getsignal(number) for number in numbers]
    with guard():
        assert [signal.getsignal(number) for number in numbers] != before
    assert [signal.getsignal(number) for number in numbers] == before


def test_what_takes_too_long_after_a_stop_is_left():
    stop, left = threading.Event(), threading.Event()
    leave_at_latest(stop, 0.05, left.set)
    assert not left.wait(0.2)
    stop.set()
    assert left.wait(30)
