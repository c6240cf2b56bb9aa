"""What is said of a file that cannot be read at all, and what a right one holds."""

from __future__ import annotations

from pathlib import Path

import pytest

from vanner.errors import SettingsError
from vanner.settings import load_settings


def error_at(path):
    with pytest.raises(SettingsError) as caught:
        load_settings(path)
    return caught.value


def test_missing_file_says_how_to_make_one(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    error = error_at(Path("vanner.toml"))
    assert str(error).endswith("make one with: vanner init")
    assert error.faults == ()
    assert error.exit_status == 2


def test_missing_file_of_another_name_is_named_in_the_advice(tmp_path):
    path = tmp_path / "night.toml"
    assert str(error_at(path)).endswith(f"vanner init {path}")


def test_folder_in_place_of_a_file_is_named_as_one(tmp_path):
    assert f"{tmp_path} is a folder" in str(error_at(tmp_path))


@pytest.mark.parametrize("name", ["a" * 5000, "nul\0nul", "vanner.toml/deeper"])
def test_unreadable_file_is_one_sentence(name, write, right, tmp_path):
    write(right)
    error = error_at(tmp_path / name)
    assert "cannot be read" in str(error)
    assert str(error).isprintable()


def test_file_in_another_encoding_names_line_and_byte(tmp_path, right):
    path = tmp_path / "vanner.toml"
    path.write_bytes(right.encode() + "# Übersicht\n".encode("latin-1"))
    assert error_at(path).faults == (
        "vanner.toml: line 9: byte 0xDC is not UTF-8; save it as UTF-8",
    )


@pytest.mark.parametrize(
    ("text", "place", "advice"),
    [
        ("[service]\npulse = 60s\n", "line 2, column 11", "this is not TOML"),
        ("[service]\npulse\n", "line 2, column 6", "this is not TOML"),
        ("[service]\n\nlog =", "line 3, column 6", "this is not TOML"),
        ('log = "te\nxt"\n', "line 1, column 10", "this is not TOML"),
        ("desk = [1, 2\n", "line 1, column 13", "close its quotes or brackets"),
        ('log = """text\n', "line 1, column 14", "close its quotes or brackets"),
        ("a = 1\na = 2\n", "line 2, column 6", "for the second time"),
        ("[mail]\n[service]\n[mail]\n", "line 3, column 6", "for the second time"),
        ("a = " + "9" * 5000, "", "too many digits"),
        ("a = " + "[" * 5000, "", "nested too deeply"),
    ],
)
def test_broken_toml_names_line_and_column(text, place, advice, error_of):
    (line,) = error_of(text).faults
    assert line.startswith(f"vanner.toml: {place}")
    assert advice in line


def test_broken_line_is_not_shown(error_of):
    error = error_of('[mail]\npassword = "hunter2\n')
    assert "hunter2" not in str(error) + str(error.faults)


def test_right_file_is_read_with_its_values(write, right):
    settings = load_settings(write("service.pulse = '5m'\n" + right + "alerts_per_day = 3\n"))
    assert settings.service.pulse == 300.0
    assert settings.desk[0].alerts_per_day == 3.0
    assert settings.desk[0].false_level_per_day == pytest.approx(0.3)
    assert settings.source_named("harbour").kind == "folder"


@pytest.mark.parametrize("change", ["crlf", "byte order mark"])
def test_file_of_another_editor_is_read(change, right, tmp_path):
    path = tmp_path / "vanner.toml"
    data = right.replace("\n", "\r\n") if change == "crlf" else "\ufeff" + right
    path.write_bytes(data.encode())
    assert load_settings(path).desk[0].name == "metro"


def test_names_lose_blanks_around_them_before_they_are_compared(write, right):
    settings = load_settings(write(right.replace('["harbour"]', '[" harbour "]')))
    assert settings.desk[0].sources == ("harbour",)


def test_desk_without_recipients_and_digest_folder_may_have_digests(write, right):
    settings = load_settings(write(right + 'digests = ["0  7 * * 7"]\n'))
    assert settings.desk[0].digests == ("0 7 * * 7",)


@pytest.mark.parametrize("name", ["ресепшн", "समाचार", "Ops/night 2", "_x"])
def test_names_of_any_script_are_taken(name, write, right):
    assert load_settings(write(right.replace("metro", name))).desk[0].name == name
