"""Databases that are locked, or that may not be read or written."""

import json
import os
import sqlite3
import subprocess
import sys
import tempfile
import threading
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

import pytest

from vanner.errors import DatabaseBusyError, DatabaseError
from vanner.store.database import Database

ADD = "INSERT INTO source_state (source, kind, cursor, failures) VALUES ('{}', 'feed', '{{}}', 0)"
BUSY = "is in use by another program; end that program or try again."
ANOTHER_USER = 65534  # the number that most systems give to "nobody"

# Everything is imported before the rights are dropped: the other user may not read our files.
_AS_ANOTHER_USER = """
import json, os, sys
from pathlib import Path
import alembic.command, logging.config
from vanner.errors import DatabaseError
from vanner.store.database import Database

user, root, said = int(sys.argv[1]), Path(sys.argv[2]), {}
if os.geteuid() == 0:
    try:
        os.setgroups([])
        os.setgid(user)
        os.setuid(user)
    except OSError:
        sys.exit(77)
if not os.access(root, os.X_OK):
    sys.exit(77)
for path in map(Path, sys.argv[3:]):
    try:
        database = Database.open(path)
        said[str(path)] = "opened"
        with database.write() as connection:
            connection.exec_driver_sql("DELETE FROM source_state")
        database.close()
    except DatabaseError as error:
        said[str(path)] = [said.get(str(path)), str(error)]
print(json.dumps(said))
"""


def add(database, name):
    with database.write() as connection:
        connection.exec_driver_sql(ADD.format(name))


def names(path):
    with closing(sqlite3.connect(path)) as connection:
        return [
            name for (name,) in connection.execute("SELECT source FROM source_state ORDER BY rowid")
        ]


@pytest.fixture
def holder(database):
    """Another connection to the same database, as another program would have it."""
    add(database, "first")
    with closing(sqlite3.connect(database.path, isolation_level=None)) as connection:
        yield connection


def test_a_write_while_another_program_writes_is_busy_and_loses_nothing(database, holder):
    holder.execute("BEGIN EXCLUSIVE")
    holder.execute(ADD.format("theirs"))
    with pytest.raises(DatabaseBusyError) as caught:
        add(database, "ours")
    assert str(caught.value) == f"The database {database.path} {BUSY}"
    holder.execute("COMMIT")
    add(database, "ours")
    assert names(database.path) == ["first", "theirs", "ours"]


def test_reading_goes_on_while_another_program_writes(database, holder):
    holder.execute("BEGIN EXCLUSIVE")
    holder.execute(ADD.format("theirs"))
    with database.read() as connection:
        rows = connection.exec_driver_sql("SELECT source FROM source_state").fetchall()
    assert rows == [("first",)]


def test_opening_a_database_that_another_program_keeps_to_itself_is_busy(database, holder):
    database.close()
    holder.execute("PRAGMA locking_mode = EXCLUSIVE")
    holder.execute("BEGIN EXCLUSIVE")
    for create in (True, False):
        with pytest.raises(DatabaseBusyError) as caught:
            Database.open(database.path, create=create, busy_timeout_s=0.05)
        assert str(caught.value) == f"The database {database.path} {BUSY}"
    holder.close()
    Database.open(database.path, busy_timeout_s=0.05).close()
    assert names(database.path) == ["first"]


def test_making_a_database_that_another_program_is_making_is_busy(tmp_path):
    path = tmp_path / "new.db"
    with closing(sqlite3.connect(path, isolation_level=None)) as holder:
        holder.execute("BEGIN EXCLUSIVE")
        with pytest.raises(DatabaseBusyError):
            Database.open(path, busy_timeout_s=0.05)
    Database.open(path, busy_timeout_s=0.05).close()


@dataclass(frozen=True)
class Refused:
    """A database that another user came to, and what that user was told."""

    path: Path
    opened: bool
    sentence: str


# The rights of the folder and of the file; a file without rights is not there.
RIGHTS = {
    "file not to be written": (0o777, 0o444),
    "folder not to be written": (0o555, 0o666),
    "file not to be read": (0o777, 0o000),
    "folder not to be entered": (0o000, 0o666),
    "no file in a folder not to be written": (0o555, None),
}


@pytest.fixture(scope="module")
def came(blank):
    """What a user who does not own the files was told, by what was wrong with them.

    The folders lie outside of the tests' own, which no other user can reach.
    """
    with tempfile.TemporaryDirectory(prefix="vanner-test-") as name:
        root = Path(name)
        paths = [root / wrong / "vanner.db" for wrong in RIGHTS]
        for path, (folder, file) in zip(paths, RIGHTS.values(), strict=True):
            path.parent.mkdir()
            if file is not None:
                path.write_bytes(blank.read_bytes())
                path.chmod(file)
            path.parent.chmod(folder)
        root.chmod(0o755)
        done = subprocess.run(
            [sys.executable, "-c", _AS_ANOTHER_USER, str(ANOTHER_USER), root, *paths],
            capture_output=True,
            text=True,
            check=False,
        )
        for path in paths:
            path.parent.chmod(0o755)
        if done.returncode == 77:
            pytest.skip("this system lets the tests act as no other user")
        assert (done.returncode, done.stderr) == (0, "")
        said = json.loads(done.stdout)
        yield {
            path.parent.name: Refused(path, said[str(path)][0] == "opened", said[str(path)][1])
            for path in paths
        }


def left_alone(path, blank):
    return path.read_bytes() == blank.read_bytes() and not list(path.parent.glob("*.db-*"))


def test_a_file_that_may_not_be_written_opens_and_refuses_the_first_write(came, blank):
    one = came["file not to be written"]
    assert one.opened
    assert one.sentence == (
        f"The database {one.path} cannot be used: it cannot be written; "
        "let Vanner write the file and its folder."
    )
    assert one.path.read_bytes() == blank.read_bytes()


def test_a_folder_that_may_not_be_written_refuses_its_database(came, blank):
    one = came["folder not to be written"]
    assert not one.opened
    # SQLite cannot make the log's index there; which code it gives depends on its version.
    reason = one.sentence.removeprefix(f"The database {one.path} cannot be used: ")
    assert reason in (
        "it cannot be written; let Vanner write the file and its folder.",
        "it cannot be opened; check its folder and rights.",
    )
    assert left_alone(one.path, blank)


@pytest.mark.parametrize("wrong", ["file not to be read", "folder not to be entered"])
def test_what_may_not_be_read_is_told_at_opening(came, blank, wrong):
    one = came[wrong]
    assert not one.opened
    assert one.sentence == (
        f"The database {one.path} cannot be read (Permission denied); check its name and rights."
    )
    if os.geteuid() == 0:  # nobody else could look
        assert left_alone(one.path, blank)


def test_a_new_database_in_a_folder_that_may_not_be_written_is_refused(came):
    one = came["no file in a folder not to be written"]
    assert not one.opened
    assert one.sentence == (
        f"The database {one.path} cannot be used: it cannot be opened; check its folder and rights."
    )
    assert not one.path.exists()


def test_a_database_that_vanishes_is_told_and_not_made_anew(database):
    without_connections = Database(database.path)
    database.close()
    database.path.unlink()
    with pytest.raises(DatabaseError, match="cannot be opened"), without_connections.read():
        pass
    assert not database.path.exists()


def test_a_database_that_was_closed_refuses_to_go_on(database):
    database.close()
    for use in (database.read, database.write):
        with pytest.raises(DatabaseError, match="has been closed"), use():
            pass


def test_closing_waits_for_what_another_thread_has_begun(database):
    begun, go_on = threading.Event(), threading.Event()

    def write():
        with database.write() as connection:
            begun.set()
            go_on.wait()
            connection.exec_driver_sql(ADD.format("mast"))

    writer = threading.Thread(target=write)
    writer.start()
    begun.wait()
    closer = threading.Thread(target=database.close)
    closer.start()
    closer.join(timeout=0.2)
    assert closer.is_alive()
    go_on.set()
    writer.join()
    closer.join()
    with closing(sqlite3.connect(database.path)) as reader:
        kept = reader.execute("SELECT source FROM source_state WHERE source = 'mast'").fetchall()
    assert kept == [("mast",)]
