"""The scripts that set Vanner up, as far as that needs no network."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from importlib import metadata
from pathlib import Path

import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

CLONE = Path(__file__).parents[2]
CONSTRAINTS = CLONE / "deploy" / "constraints.txt"
POSIX_SCRIPTS = ("deploy/try", "deploy/setup.sh", "deploy/test_data.sh", "tests/run")


@pytest.mark.parametrize("script", POSIX_SCRIPTS)
def test_a_script_is_valid_shell(script: str) -> None:
    subprocess.run(["sh", "-n", str(CLONE / script)], check=True)


def test_the_run_of_all_checks_is_valid_bash() -> None:
    subprocess.run(["bash", "-n", str(CLONE / ".ci/run")], check=True)


@pytest.mark.parametrize("script", ["deploy/try", "tests/run", ".ci/run"])
def test_a_script_can_be_started_by_its_path(script: str) -> None:
    assert os.access(CLONE / script, os.X_OK)


@pytest.fixture
def clone(tmp_path: Path) -> Path:
    """A clone's files that setting up reads, in a folder with spaces in its path."""
    clone = tmp_path / "a clone's folder"
    shutil.copytree(CLONE / "deploy", clone / "deploy")
    shutil.copy(CLONE / "pyproject.toml", clone)
    for folder in ("service", "migrations"):
        (clone / folder).mkdir()
        (clone / folder / "a file.py").write_text("1\n")
    return clone


def setup(clone: Path, commands: str, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run commands in a shell that has sourced deploy/setup.sh, from another folder."""
    return subprocess.run(
        ["sh", "-euc", f'root=$1; . "$root/deploy/setup.sh"; {commands}', "sh", str(clone)],
        check=False,
        capture_output=True,
        text=True,
        cwd="/",
        env={**os.environ, "PYTHON": sys.executable, **environment},
    )


def test_the_python_that_is_named_is_the_one_used(clone: Path) -> None:
    assert setup(clone, "find_python").stdout == f"{sys.executable}\n"


def test_a_python_that_is_too_old_is_refused_in_one_sentence(clone: Path) -> None:
    old = clone / "old python"
    # Answers as Python 3.10 does to the question whether it is 3.11 or later.
    old.write_text("#!/bin/sh\nexit 1\n")
    old.chmod(0o755)
    result = setup(clone, "set_up_to_use", PYTHON=str(old))
    assert result.returncode == 1
    assert result.stdout == ""
    assert len(result.stderr.splitlines()) == 1
    assert str(old) in result.stderr
    assert not (clone / ".venv").exists()


def test_no_python_at_all_is_told_in_one_sentence(clone: Path, tmp_path: Path) -> None:
    result = setup(clone, f"PATH='{tmp_path}'; find_python", PYTHON="")
    assert result.returncode == 1
    assert len(result.stderr.splitlines()) == 1
    assert "3.11" in result.stderr


@pytest.mark.slow
def test_an_environment_is_kept_until_it_breaks_or_moves_and_then_made_anew(clone: Path) -> None:
    assert setup(clone, "venv_works").returncode == 1
    assert setup(clone, "make_venv; venv_works").returncode == 0
    kept = clone / ".venv" / "kept"
    kept.touch()
    assert setup(clone, "make_venv").returncode == 0
    assert kept.exists()
    python = clone / ".venv" / "bin" / "python"
    python.rename(python.with_name("gone"))
    assert setup(clone, "venv_works").returncode == 1
    python.with_name("gone").rename(python)
    assert setup(clone, "venv_works").returncode == 0
    moved = clone.rename(clone.with_name("another place"))
    assert setup(moved, "venv_works").returncode == 1
    assert setup(moved, "make_venv; venv_works").returncode == 0
    assert not (moved / ".venv" / "kept").exists()


def fingerprint(clone: Path, kind: str) -> str:
    python = clone / ".venv" / "bin" / "python"
    python.parent.mkdir(parents=True, exist_ok=True)
    if not python.exists():
        python.symlink_to(sys.executable)
    result = setup(clone, f"fingerprint {kind}")
    assert result.returncode == 0
    assert result.stdout.strip()
    return result.stdout


def test_without_an_environment_nothing_counts_as_installed(clone: Path) -> None:
    result = setup(clone, "fingerprint wheel")
    assert result.returncode == 1
    assert result.stdout == ""
    assert setup(clone, "installed wheel").returncode == 1


@pytest.mark.parametrize("kind", ["editable", "wheel"])
@pytest.mark.parametrize("changed", ["pyproject.toml", "deploy/constraints.txt"])
def test_a_change_of_what_is_required_asks_for_an_installation(
    clone: Path, kind: str, changed: str
) -> None:
    before = fingerprint(clone, kind)
    assert fingerprint(clone, kind) == before
    with (clone / changed).open("a") as file:
        file.write("# changed\n")
    assert fingerprint(clone, kind) != before


@pytest.mark.parametrize("changed", ["service/a file.py", "migrations/a file.py"])
def test_a_change_of_the_sources_asks_for_a_wheel_only(clone: Path, changed: str) -> None:
    wheel, editable = fingerprint(clone, "wheel"), fingerprint(clone, "editable")
    (clone / changed).write_text("2\n")
    assert fingerprint(clone, "wheel") != wheel
    assert fingerprint(clone, "editable") == editable


def pins() -> dict[str, str]:
    lines = CONSTRAINTS.read_text().splitlines()
    pinned = [re.fullmatch(r"([\w.-]+)==(\S+)", line) for line in lines if line[:1] != "#"]
    assert pinned
    assert all(pinned)
    return {canonicalize_name(match[1]): match[2] for match in pinned if match}


def requirements_of(name: str, extras: set[str]) -> set[tuple[str, frozenset[str]]]:
    wanted = set()
    for line in metadata.requires(name) or []:
        requirement = Requirement(line)
        marker = requirement.marker
        if marker is None or any(marker.evaluate({"extra": extra}) for extra in extras | {""}):
            wanted.add((canonicalize_name(requirement.name), frozenset(requirement.extras)))
    return wanted


def test_every_pinned_version_is_the_one_installed() -> None:
    for name, version in pins().items():
        assert metadata.version(name) == version


def test_every_library_that_vanner_and_its_tests_need_is_pinned() -> None:
    needed = {("vanner", frozenset({"test"}))}
    seen: set[tuple[str, frozenset[str]]] = set()
    while needed:
        library = needed.pop()
        seen.add(library)
        needed |= requirements_of(library[0], set(library[1])) - seen
    names = {name for name, _ in seen} - {"vanner"}
    assert len(names) > 30
    assert names == set(pins())
