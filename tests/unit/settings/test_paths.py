"""Relative paths start at the settings file's folder, wherever the program was started."""

from __future__ import annotations

from pathlib import Path

import pytest

from vanner.settings import FolderSettings, Settings, load_settings

TEXT = """\
[service]
database = "sqlite:///data/night.db"
[[source]]
name = "harbour"
kind = "folder"
path = "inbox"
[[source]]
name = "wire"
kind = "feed"
url = "https://wire.example/feed"
username = "watch"
password = { file = "wire.txt" }
[[desk]]
name = "metro"
sources = ["harbour"]
digest_folder = "digests"
[mail]
host = "mail.example"
sender = "vanner@town.example"
username = "vanner"
password = { file = "/etc/vanner/mail.txt" }
"""


@pytest.fixture(params=["absolute", "relative"])
def settings(request, write, tmp_path, monkeypatch):
    path = write(TEXT)
    monkeypatch.chdir(tmp_path.parent)
    return load_settings(path if request.param == "absolute" else path.relative_to(Path.cwd()))


def test_folder_of_a_source_starts_at_the_file(settings, tmp_path):
    assert settings.source[0].path == tmp_path / "inbox"


def test_digest_folder_starts_at_the_file(settings, tmp_path):
    assert settings.desk[0].digest_folder == tmp_path / "digests"


def test_file_of_a_secret_starts_at_the_file(settings, tmp_path):
    (tmp_path / "wire.txt").write_text("hunter2\n", encoding="utf-8")
    assert settings.source[1].password.read() == "hunter2"


def test_absolute_path_stays(settings):
    assert settings.mail.password.file == Path("/etc/vanner/mail.txt")


def test_database_starts_at_the_file(settings, tmp_path):
    assert settings.database_path == tmp_path / "data" / "night.db"
    assert settings.service.database == f"sqlite:///{tmp_path}/data/night.db"


def test_absolute_database_stays(write, right):
    text = "[service]\ndatabase = 'sqlite:////srv/vanner.db'\n" + right
    assert load_settings(write(text)).database_path == Path("/srv/vanner.db")


@pytest.mark.parametrize("head", ["", "[service]\n"])
def test_default_database_starts_at_the_file(head, write, right, tmp_path):
    assert load_settings(write(head + right)).database_path == tmp_path / "vanner.db"


def test_database_path_is_absolute_without_a_file_too():
    assert Settings().database_path == Path.cwd() / "vanner.db"


def test_path_stays_as_it_is_without_a_file():
    folder = FolderSettings(name="harbour", kind="folder", path=Path("inbox"))
    assert folder.path == Path("inbox")
