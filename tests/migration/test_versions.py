"""Databases of an older and of a newer version."""

import sqlite3
from contextlib import closing

import pytest

from vanner.errors import DatabaseError
from vanner.store.database import Database
from vanner.store.identity import APPLICATION_ID


@pytest.fixture
def path(tmp_path):
    """A database of this version that holds one source."""
    path = tmp_path / "vanner.db"
    Database.open(path).close()
    with closing(sqlite3.connect(path)) as connection:
        connection.execute(
            "INSERT INTO source_state (source, kind, cursor, failures) "
            "VALUES ('quay-wire', 'feed', '{}', 2)"
        )
        connection.commit()
    return path


def revisions(path):
    with closing(sqlite3.connect(path)) as connection:
        return [row[0] for row in connection.execute("SELECT version_num FROM alembic_version")]


def schema(path):
    with closing(sqlite3.connect(path)) as connection:
        return sorted(connection.execute("SELECT name, coalesce(sql, '') FROM sqlite_master"))


def sources(path):
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute("SELECT source, failures FROM source_state").fetchall()


def test_a_database_of_a_newer_version_is_refused_and_left_as_it_is(path, later_vanner):
    done = later_vanner().open(path, migrate=True)
    assert (done.returncode, done.stdout, done.stderr) == (0, "", "")
    before = path.read_bytes()
    for migrate in (True, False):
        with pytest.raises(DatabaseError) as caught:
            Database.open(path, migrate=migrate)
        assert str(caught.value) == (
            f"The database {path} was written by a newer version of Vanner "
            "(schema 0002, this version knows up to 0001); install that version."
        )
        assert path.read_bytes() == before


def test_an_older_database_is_refused_where_it_is_not_to_be_upgraded(path, later_vanner):
    before = path.read_bytes()
    done = later_vanner().open(path, migrate=False)
    assert done.returncode == DatabaseError.exit_status
    assert done.stdout == (
        f"The database {path} is of an older version (schema 0001); "
        "run `vanner db upgrade` first.\n"
    )
    assert path.read_bytes() == before


def test_an_older_database_is_upgraded_on_opening_and_keeps_its_rows(path, later_vanner):
    done = later_vanner().open(path, migrate=True)
    assert (done.returncode, done.stdout, done.stderr) == (0, "", "")
    assert revisions(path) == ["0002"]
    assert "remark" in {name for name, _ in schema(path)}
    assert sources(path) == [("quay-wire", 2)]


def test_a_migration_that_fails_leaves_the_database_as_it_was(path, later_vanner):
    before = path.read_bytes()
    done = later_vanner('op.execute("INSERT INTO nowhere VALUES (1)")').open(path, migrate=True)
    assert done.returncode == DatabaseError.exit_status
    assert "refused a statement: no such table: nowhere" in done.stdout
    assert "Traceback" not in done.stderr
    assert path.read_bytes() == before
    Database.open(path, migrate=False).close()


def test_a_database_that_names_several_versions_is_refused(path, later_vanner):
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("INSERT INTO alembic_version VALUES ('0002')")
        connection.commit()
    done = later_vanner().open(path, migrate=True)
    assert done.returncode == DatabaseError.exit_status
    assert "several versions at once" in done.stdout
    assert revisions(path) == ["0001", "0002"]


def test_an_unknown_version_is_taken_for_a_newer_one(path):
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("UPDATE alembic_version SET version_num = 'a1b2c3'")
        connection.commit()
    before = path.read_bytes()
    with pytest.raises(DatabaseError, match=r"newer version of Vanner \(schema a1b2c3"):
        Database.open(path)
    assert path.read_bytes() == before


def test_a_database_without_tables_is_refused_or_filled(tmp_path):
    path = tmp_path / "vanner.db"
    with closing(sqlite3.connect(path)) as connection:
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    before = path.read_bytes()
    with pytest.raises(DatabaseError, match=r"still empty.*`vanner db upgrade`"):
        Database.open(path, migrate=False)
    assert path.read_bytes() == before
    Database.open(path).close()
    assert revisions(path) == ["0001"]


def test_opening_a_current_database_again_changes_nothing(path):
    before = path.read_bytes()
    Database.open(path).close()
    assert path.read_bytes() == before
