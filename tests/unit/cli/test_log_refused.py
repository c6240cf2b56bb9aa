"""A log that cannot be written ends nothing."""

import logging
import sys

import pytest
import structlog

from vanner.cli.log import set_up_log


@pytest.mark.parametrize("form", ["text", "json"])
def test_events_into_a_full_disk_are_lost_and_nothing_else(form, monkeypatch):
    with open("/dev/full", "w", encoding="utf-8") as full:  # noqa: PTH123 - a device, no path of ours
        monkeypatch.setattr(sys, "stderr", full)
        set_up_log(form)
        structlog.get_logger().error("poll_failed", source="wire")
        logging.getLogger("somebody").warning("a library's own words")
        monkeypatch.undo()
        # What is still held back must not surface when the device is closed.
        full.buffer.raw.close()


def test_events_after_standard_error_is_closed_end_nothing(tmp_path, monkeypatch):
    gone = (tmp_path / "log").open("w", encoding="utf-8")
    monkeypatch.setattr(sys, "stderr", gone)
    set_up_log("text")
    gone.close()
    structlog.get_logger().warning("mail_failed", key="alert-metro-1")
    monkeypatch.undo()
    set_up_log("text")
    assert (tmp_path / "log").read_text() == ""


def test_events_are_written_again_once_there_is_room(capsys):
    set_up_log("text")
    structlog.get_logger().warning("mail_failed", key="alert-metro-1")
    assert "mail_failed" in capsys.readouterr().err
