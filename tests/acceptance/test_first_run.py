"""A newcomer's first minutes: a fresh clone, one command, and the same command again."""

from __future__ import annotations

import os
import shutil
import sqlite3
import subprocess
import sys
from contextlib import closing
from pathlib import Path

import pytest

CLONE = Path(__file__).parents[2]
NOT_CLONED = shutil.ignore_patterns(".*", "__pycache__", "*.egg-info", "dist", "*.db", "*.db-*")


@pytest.fixture
def clone(tmp_path) -> Path:
    """The last commit in a folder with spaces in its path; the files themselves where they
    came without their history, as in a source distribution.
    """
    clone = tmp_path / "a newcomer's clone"
    if (CLONE / ".git").exists():
        subprocess.run(["git", "clone", "--quiet", CLONE, clone], check=True)
    else:
        shutil.copytree(CLONE, clone, ignore=NOT_CLONED)
    return clone


@pytest.fixture
def package_index(tmp_path) -> None:
    """Skips where pip reaches no package index, but not where CI is "true"."""
    pins = (CLONE / "deploy" / "constraints.txt").read_text(encoding="utf-8")
    (pin,) = (line for line in pins.splitlines() if line.startswith("annotated-doc=="))
    # Without the cache, which would answer for an index that cannot be reached.
    pip = [sys.executable, "-m", "pip", "download", "--no-deps", "--no-cache-dir", "--retries=0"]
    found = subprocess.run(
        [*pip, "--dest", tmp_path / "probe", pin], check=False, capture_output=True, text=True
    )
    if found.returncode == 0:
        return
    reason = f"pip reaches no package index to install Vanner from: {found.stderr.strip()[-300:]}"
    if os.environ.get("CI") == "true":
        pytest.fail(reason)
    pytest.skip(reason)


def first_try(clone: Path) -> subprocess.CompletedProcess[str]:
    kept = {name: value for name, value in os.environ.items() if not name.startswith("VANNER_")}
    return subprocess.run(
        ["sh", "deploy/try", "--seconds", "10"],
        cwd=clone,
        env={name: value for name, value in kept.items() if name != "PYTHONPATH"},
        check=False,
        capture_output=True,
        text=True,
    )


def alerts(clone: Path) -> int:
    uri = f"{(clone / 'vanner-demo.db').as_uri()}?mode=ro"
    with closing(sqlite3.connect(uri, uri=True)) as connection:
        return connection.execute("SELECT count(*) FROM alerts").fetchone()[0]


@pytest.mark.slow
@pytest.mark.usefixtures("package_index")
def test_a_fresh_clone_shows_the_demo_and_shows_it_again(clone):
    first = first_try(clone)
    assert first.returncode == 0, first.stderr
    assert alerts(clone) > 0
    installed = (clone / ".venv" / "vanner-installed").stat().st_mtime_ns
    second = first_try(clone)
    assert second.returncode == 0, second.stderr
    assert alerts(clone) > 0
    # The second time nothing was installed.
    assert (clone / ".venv" / "vanner-installed").stat().st_mtime_ns == installed
    # Nothing is left in the clone that its .gitignore does not know.
    if (clone / ".git").exists():
        left = subprocess.run(
            ["git", "status", "--porcelain"], cwd=clone, check=True, capture_output=True, text=True
        )
        assert left.stdout == ""
