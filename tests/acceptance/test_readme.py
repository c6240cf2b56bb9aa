"""What the README tells a newcomer to write and to type works as it stands there."""

from __future__ import annotations

import re
import signal
import sqlite3
import subprocess
import time
from contextlib import closing
from pathlib import Path
from typing import get_args

import pytest
import typer
from typer.testing import CliRunner

from vanner import errors
from vanner.cli.app import app
from vanner.clock import DAY_S
from vanner.settings import load_settings
from vanner.settings.models import SourceSettings

CLONE = Path(__file__).parents[2]
README = (CLONE / "README.md").read_text(encoding="utf-8")
PROSE = " ".join(README.split())
BLOCKS = re.findall(r"^```(\w*)\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
SETTINGS = [text for language, text in BLOCKS if language == "toml"]
SHELL_LINES = [
    line for language, text in BLOCKS if language == "sh" for line in text.splitlines() if line
]
URL = "https://news.ossenhithe.example/feed.xml"
FEED = b"""<rss version="2.0"><channel><title>Ossenhithe News</title>
<item><guid>one</guid><title>Lamp oil fair opens</title>
<description>Stalls line the quay.</description></item></channel></rss>"""


def section(heading: str) -> str:
    """The text below a heading, up to the next one."""
    found = re.search(
        rf"^## {re.escape(heading)}\n(.*?)(?=^## |\Z)", README, re.MULTILINE | re.DOTALL
    )
    assert found
    return found[1]


@pytest.fixture
def desk(tmp_path, past, http_server) -> Path:
    """A newcomer's folder: the README's settings with a feed of their own, and their past."""
    assert SETTINGS[0].count(URL) == 1
    settings = SETTINGS[0].replace(URL, http_server.set("/feed.xml", FEED))
    (tmp_path / "vanner.toml").write_text(settings, encoding="utf-8")
    (tmp_path / "past.jsonl.gz").write_bytes(past.path.read_bytes())
    return tmp_path


def test_every_block_is_of_a_language_that_these_tests_run():
    assert {language for language, _ in BLOCKS} == {"toml", "sh", "sql"}
    assert README.count("```") == 2 * len(BLOCKS)


def test_a_desk_is_set_up_in_fewer_than_ten_lines():
    assert SETTINGS[0] in section("Set up a desk")
    assert 0 < len(SETTINGS[0].splitlines()) < 10


@pytest.mark.parametrize("settings", SETTINGS, ids=["first", "whole"])
def test_a_settings_block_has_no_fault(tmp_path, settings):
    (tmp_path / "vanner.toml").write_text(settings, encoding="utf-8")
    told = load_settings(tmp_path / "vanner.toml")
    assert [desk.name for desk in told.desk] == ["metro"]


def test_the_second_settings_say_what_the_readme_says_of_them(tmp_path):
    (tmp_path / "vanner.toml").write_text(SETTINGS[1], encoding="utf-8")
    told = load_settings(tmp_path / "vanner.toml")
    (desk,) = told.desk
    assert re.search(r"This desk \w+ about three alerts a day, by mail", PROSE)
    assert desk.alerts_per_day == 3
    assert told.mail is not None
    assert desk.mail_alerts
    assert desk.recipients
    assert "a digest at each change of shift, in local time" in PROSE
    assert desk.digests
    assert told.zone_of(desk).key != "UTC"


def test_a_desk_that_sets_no_more_follows_the_times_that_the_readme_states(tmp_path):
    (tmp_path / "vanner.toml").write_text(SETTINGS[0], encoding="utf-8")
    (desk,) = load_settings(tmp_path / "vanner.toml").desk
    assert "until it has read three days and 20,000 words, at the latest after 14 days" in PROSE
    assert (desk.warm_up, desk.warm_up_words) == (3 * DAY_S, 20_000)
    assert desk.warm_up_at_most == 14 * DAY_S
    assert "A story that has had no new item for two days is *cleared*" in PROSE
    assert desk.clear_after == 2 * DAY_S


def rows(database: Path, sql: str) -> list[tuple]:
    with closing(sqlite3.connect(f"{database.as_uri()}?mode=ro", uri=True)) as connection:
        return connection.execute(sql).fetchall()


def serve_and_stop(folder: Path, environment: dict[str, str]) -> int:
    """Type `vanner run`, wait until the feed's item is accepted, send SIGTERM; the status."""
    with (folder / "log").open("wb") as log:
        daemon = subprocess.Popen(
            ["sh", "-c", "exec vanner run"], cwd=folder, env=environment, stdout=log, stderr=log
        )
    try:
        for _ in range(600):
            assert daemon.poll() is None, (folder / "log").read_text()
            if "service_started" in (folder / "log").read_text() and rows(
                folder / "vanner.db", "SELECT guid FROM items"
            ):
                break
            time.sleep(0.1)
        daemon.send_signal(signal.SIGTERM)
        return daemon.wait(timeout=60)
    finally:
        daemon.kill()
        daemon.wait()


def test_every_shell_line_works_as_written(desk, past, shell, environment):
    told = {}
    for line in SHELL_LINES:
        if line == "vanner run":
            assert serve_and_stop(desk, environment) == 0
            continue
        result = shell(line, desk)
        assert result.returncode == 0, f"{line}: {result.stderr}"
        told[line.removeprefix("vanner ")] = result.stdout
    assert "harbour (feed): 1 " in told["check"]
    assert rows(desk / "vanner.db", "SELECT guid FROM items WHERE guid = 'one'") == [("one",)]
    # The archive's items were imported as the one source's and wait for the next start.
    imported = "SELECT count(*) FROM items WHERE guid != 'one' AND source = 'harbour'"
    for name in ("vanner.db", "monday.db", "again.db"):
        assert rows(desk / name, imported) == [(len(past.entries),)]
    replayed = rows(desk / "try.db", "SELECT headline FROM alerts")
    assert ("Harbour wall collapses at Dunmarrow",) in replayed
    assert told['db query "SELECT raised_at, headline FROM alerts" --format csv'] == (
        "raised_at,headline\n"
    )
    assert re.search(r"\bmetro\b", told["status"])
    assert re.search(r"\bharbour\b", told["status"])
    assert told["digest metro"]


def listed_commands() -> list[str]:
    """The commands of the table, in full."""
    found = []
    for cell in re.findall(r"^\| (`[^|]+) \|", section("Commands"), re.MULTILINE):
        found += [name.removeprefix("vanner ") for name in re.findall(r"`([^`]+)`", cell)]
    return found


def there_commands() -> list[str]:
    found = []
    for name, command in typer.main.get_command(app).commands.items():
        below = getattr(command, "commands", None)
        found += [name] if below is None else [f"{name} {one}" for one in below]
    return found


def test_the_table_lists_every_command_once():
    assert sorted(listed_commands()) == sorted(there_commands())


@pytest.mark.parametrize("command", listed_commands())
def test_a_listed_command_explains_itself(command):
    result = CliRunner().invoke(app, [*command.split(), "--help"], prog_name="vanner")
    assert result.exit_code == 0
    assert f"Usage: vanner {command}" in result.output
    assert f"Example: vanner {command}" in result.output


def test_every_command_that_the_text_names_is_in_the_table():
    named = {" ".join(name.split()) for name in re.findall(r"`vanner ([^`]+)`", README)}
    assert named
    for name in named:
        assert any(name.split()[: len(one.split())] == one.split() for one in listed_commands())


def indented_commands() -> list[str]:
    indented = re.findall(r"^    (sh \S+)$", README, re.MULTILINE)
    return indented + re.findall(r"`(sh [^`]+)`", README)


def test_the_scripts_that_the_readme_names_are_there_and_are_shell():
    assert set(indented_commands()) == {"sh deploy/try", "sh tests/run"}
    for command in indented_commands():
        script = CLONE / command.removeprefix("sh ")
        assert script.is_file()
        subprocess.run(["sh", "-n", str(script)], check=True)


def listed_statuses() -> dict[int, str]:
    found = re.search(r"Exit status: (.+?)\. ", PROSE)
    assert found
    return {int(one.split()[0]): one.split(maxsplit=1)[1] for one in found[1].split(", ")}


@pytest.mark.parametrize(
    ("word", "error"),
    [
        ("failed", errors.VannerError),
        ("failed", errors.SourceError),
        ("failed", errors.DeliveryError),
        ("settings", errors.SettingsError),
        ("database cannot be used", errors.DatabaseError),
        ("database cannot be used", errors.DatabaseBusyError),
        ("daemon already serves", errors.DaemonRunningError),
        ("input cannot be read", errors.InputError),
    ],
)
def test_an_error_leaves_with_the_status_that_the_readme_lists(word, error):
    assert word in listed_statuses()[error.exit_status]


def test_no_status_is_left_out_and_help_lists_the_same():
    kinds = [kind for kind in vars(errors).values() if isinstance(kind, type)]
    raised = {kind.exit_status for kind in kinds if issubclass(kind, errors.VannerError)}
    assert set(listed_statuses()) == {0, 130} | raised
    told = CliRunner().invoke(app, ["--help"], prog_name="vanner").output
    epilog = " ".join(told.split("Exit status:")[1].split())
    assert [int(number) for number in re.findall(r"\d+", epilog)] == sorted(listed_statuses())


def test_the_table_of_sources_lists_every_kind():
    listed = re.findall(r"^\| `(\w+)` \|", section("Sources"), re.MULTILINE)
    union, _ = get_args(SourceSettings)
    kinds = [get_args(kind.model_fields["kind"].annotation)[0] for kind in get_args(union)]
    assert listed == kinds


def anchor(heading: str) -> str:
    """As GitHub forms a heading's anchor (from memory): lower case, hyphens for blanks."""
    return re.sub(r"[^\w\- ]", "", heading.lower()).replace(" ", "-")


def test_links_within_the_repository_lead_somewhere():
    links = [link for link in re.findall(r"\]\(([^)]+)\)", README) if "://" not in link]
    headings = {anchor(text) for text in re.findall(r"^#+ (.+)$", README, re.MULTILINE)}
    assert links
    for link in links:
        path, _, fragment = link.partition("#")
        assert (CLONE / path).exists()
        assert path or fragment in headings
