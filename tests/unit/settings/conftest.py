"""Settings files under test: a right one, and what is said of a wrong one."""

from __future__ import annotations

import pytest

from vanner.errors import SettingsError
from vanner.settings import load_settings

RIGHT = """\
[[source]]
name = "harbour"
kind = "folder"
path = "inbox"

[[desk]]
name = "metro"
sources = ["harbour"]
"""


@pytest.fixture
def right() -> str:
    """The smallest file that has no fault; its last table is the desk."""
    return RIGHT


@pytest.fixture
def write(tmp_path):
    """Writes a settings file and returns its path."""

    def written(text):
        path = tmp_path / "vanner.toml"
        path.write_text(text, encoding="utf-8")
        return path

    return written


@pytest.fixture
def error_of(write):
    """The error that a file with this text raises."""

    def raised(text):
        with pytest.raises(SettingsError) as caught:
            load_settings(write(text))
        return caught.value

    return raised
