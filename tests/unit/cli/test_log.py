"""The log: every line of one form, whoever wrote it."""

import json
import logging
import warnings

import pytest
import structlog

from vanner.cli.log import set_up_log


@pytest.fixture
def log(capsys):
    """Sets the log up and gives a function that gathers its lines."""
    root = logging.getLogger()
    handlers, level = root.handlers[:], root.level

    def set_up(form, **told):
        set_up_log(form, **told)

        def lines():
            written = capsys.readouterr()
            assert written.out == ""
            return written.err.splitlines()

        return lines

    yield set_up
    structlog.reset_defaults()
    logging.captureWarnings(False)
    root.handlers[:], root.level = handlers, level


def fail():
    try:
        [].pop()
    except IndexError:
        structlog.get_logger().exception("pulse_failed", desk="metro")


def test_an_event_is_a_json_line_with_its_fields(log):
    lines = log("json")
    structlog.get_logger().info("items_accepted", source="Möwen-Post", new=3)
    (event,) = map(json.loads, lines())
    assert event.pop("timestamp").endswith("Z")
    assert event == {"event": "items_accepted", "level": "info", "source": "Möwen-Post", "new": 3}


def test_an_event_is_a_line_of_text_with_its_fields(log):
    lines = log("text")
    structlog.get_logger().warning("poll_failed", source="wire", failures=2)
    (line,) = lines()
    assert "poll_failed" in line
    assert "warning" in line
    assert "source=wire" in line
    assert "failures=2" in line
    assert line.isprintable()


@pytest.mark.parametrize("form", ["text", "json"])
def test_what_a_field_holds_stays_within_its_line_and_steers_no_terminal(log, form):
    lines = log(form)
    structlog.get_logger().warning("item_left_out", reason="odd\x1b[2J\nservice_stopped\r\x85")
    (line,) = lines()
    assert line.isprintable()
    assert "service_stopped" in line


@pytest.mark.parametrize("form", ["text", "json"])
def test_a_quiet_log_leaves_out_what_is_no_warning(log, form):
    lines = log(form, quiet=True)
    structlog.get_logger().info("items_accepted")
    structlog.get_logger().warning("poll_failed")
    (line,) = lines()
    assert "poll_failed" in line


def test_an_exception_is_one_json_line(log):
    lines = log("json")
    fail()
    (event,) = map(json.loads, lines())
    assert (event["event"], event["desk"], event["level"]) == ("pulse_failed", "metro", "error")
    assert "IndexError: pop from empty list" in event["exception"]


def test_an_exception_in_text_follows_its_line_plainly(log):
    lines = log("text")
    fail()
    first, *rest = lines()
    assert "pulse_failed" in first
    assert rest[0] == "Traceback (most recent call last):"
    assert rest[-1] == "IndexError: pop from empty list"


def test_what_libraries_report_has_the_same_form(log):
    lines = log("json")
    logging.getLogger("some.library").warning("pool of %d is full", 8)
    logging.getLogger("some.library").info("nothing that matters")
    with warnings.catch_warnings():
        warnings.simplefilter("always")
        logging.captureWarnings(True)
        warnings.warn("old way of doing it", UserWarning, stacklevel=1)
        logging.captureWarnings(False)
    report, warning = map(json.loads, lines())
    assert (report["event"], report["level"]) == ("library_message", "warning")
    assert (report["library"], report["message"]) == ("some.library", "pool of 8 is full")
    assert (warning["event"], warning["library"]) == ("library_message", "py.warnings")
    assert "old way of doing it" in warning["message"]


def test_an_error_of_a_library_keeps_its_traceback(log):
    lines = log("json")
    try:
        [].pop()
    except IndexError:
        logging.getLogger("some.library").exception("job failed")
    (event,) = map(json.loads, lines())
    assert "IndexError: pop from empty list" in event["exception"]


def test_a_wish_for_colour_reaches_no_file(log, monkeypatch):
    monkeypatch.setenv("FORCE_COLOR", "1")
    lines = log("text")
    structlog.get_logger().error("post_failed")
    assert all(line.isprintable() for line in lines())
