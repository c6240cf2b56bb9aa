"""One daemon a database."""

import subprocess
import sys

import pytest

from vanner.daemon.lock import is_served, lock_path, sole_daemon
from vanner.errors import DaemonRunningError, DatabaseError

# Holds the lock of a database until its standard input ends.
HOLDER = """
import sys
from pathlib import Path
from vanner.daemon.lock import sole_daemon
with sole_daemon(Path(sys.argv[1])):
    print("held", flush=True)
    sys.stdin.read()
"""


@pytest.fixture
def database(tmp_path):
    return tmp_path / "desk.db"


@pytest.fixture
def holder(database):
    """Another process that holds the lock."""
    with subprocess.Popen(
        [sys.executable, "-c", HOLDER, database], stdin=subprocess.PIPE, stdout=subprocess.PIPE
    ) as process:
        assert process.stdout.readline() == b"held\n"
        yield process
        process.kill()


def test_a_database_is_served_for_the_length_of_the_block(database):
    assert not is_served(database)
    with sole_daemon(database):
        assert is_served(database)
    assert not is_served(database)


def test_asking_makes_no_lock_file(database):
    assert not is_served(database)
    assert not lock_path(database).exists()


def test_a_second_daemon_is_refused_and_the_first_keeps_the_lock(database, holder):
    with pytest.raises(DaemonRunningError, match=r"already serves the database .*desk\.db"):
        sole_daemon(database).__enter__()
    assert is_served(database)
    assert lock_path(database).read_text() == f"{holder.pid}\n"


def test_a_lock_ends_with_a_process_that_is_killed(database, holder):
    assert is_served(database)
    holder.kill()
    holder.wait()
    assert not is_served(database)
    with sole_daemon(database):
        assert is_served(database)


def test_the_lock_is_let_go_where_the_block_raises(database):
    with pytest.raises(KeyError), sole_daemon(database):
        raise KeyError("x")
    assert not is_served(database)


def test_two_databases_in_a_folder_have_a_daemon_each(tmp_path):
    with sole_daemon(tmp_path / "a.db"), sole_daemon(tmp_path / "b.db"):
        assert is_served(tmp_path / "a.db")
        assert is_served(tmp_path / "b.db")


def test_a_lock_file_that_cannot_be_made_is_told_with_its_path(tmp_path):
    path = tmp_path / "no" / "such" / "desk.db"
    with pytest.raises(DatabaseError, match=r"The lock file .*desk\.db\.lock cannot be made"):
        sole_daemon(path).__enter__()
    assert not is_served(path)
