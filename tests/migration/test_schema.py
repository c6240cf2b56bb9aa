"""The migrations make the schema that the code is written against, and the public views."""

import sqlite3
from contextlib import closing

import pytest
from alembic import command
from alembic.autogenerate import compare_metadata
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import create_engine

from vanner.store.database import Database
from vanner.store.migrate import known_revisions, migrations_folder
from vanner.store.schema import metadata

# The design, section 6: the views that users may rely on, with their columns in order.
PUBLIC_VIEWS = {
    "alerts": "alert_id, desk, state, raised_at, last_activity_at, headline, bits, items, sources",
    "noted": "story_id, desk, noted_at, last_activity_at, headline, bits, items, sources",
    "alert_terms": "alert_id, term, bits, seen, expected, joined_at",
    "alert_items": "alert_id, added_at, item_id, guid, source, title, url, published_at",
    "items": "item_id, source, guid, title, url, language, published_at, received_at, status",
    "item_topics": "desk, item_id, term, weight, own_share, count",
    "readings": "desk, item_id, words, standing, running, house, own, bits_per_word",
    "term_hours": "desk, term, hour, items",
    "source_health": "source, kind, last_polled_at, last_item_at, items_24h, failures, last_error",
    "digests": "digest_id, desk, scheduled_for, covers_from, covers_until, subject, body_text",
}


@pytest.fixture
def migrated(tmp_path):
    path = tmp_path / "vanner.db"
    Database.open(path).close()
    return path


def differences(path):
    engine = create_engine(f"sqlite:///{path}")
    with engine.connect() as connection:
        context = MigrationContext.configure(connection, opts={"compare_type": True})
        found = compare_metadata(context, metadata)
    engine.dispose()
    return found


def shape(connection):
    """What SQLite itself knows of the tables: columns, keys, indexes, with or without row ids."""
    found = {}
    for _, name, kind, _, without_rowid, strict in connection.execute("PRAGMA table_list"):
        if kind != "table" or name.startswith(("sqlite_", "alembic_")):
            continue
        indexes = {
            (index[1], index[2], tuple(connection.execute(f"PRAGMA index_info({index[1]})")))
            for index in connection.execute(f"PRAGMA index_list({name})")
        }
        keys = {row[2:] for row in connection.execute(f"PRAGMA foreign_key_list({name})")}
        columns = list(connection.execute(f"PRAGMA table_xinfo({name})"))
        found[name] = (columns, keys, indexes, without_rowid, strict)
    return found


def test_an_empty_database_migrated_to_head_has_no_difference_to_the_schema(migrated):
    assert differences(migrated) == []


@pytest.mark.parametrize(
    "change",
    [
        "DROP INDEX story_raised",
        "ALTER TABLE item ADD COLUMN remark TEXT",
        "CREATE TABLE remark (remark_id INTEGER PRIMARY KEY)",
    ],
)
def test_a_difference_to_the_schema_would_be_found(migrated, change):
    with closing(sqlite3.connect(migrated)) as connection:
        connection.execute(change)
    assert len(differences(migrated)) == 1


def test_the_migrated_tables_have_the_columns_keys_and_indexes_of_the_schema(migrated, tmp_path):
    made = tmp_path / "made.db"
    engine = create_engine(f"sqlite:///{made}")
    metadata.create_all(engine)
    engine.dispose()
    with closing(sqlite3.connect(migrated)) as one, closing(sqlite3.connect(made)) as other:
        assert shape(one) == shape(other)
        assert len(shape(one)) == len(metadata.tables)


def test_the_public_views_are_those_of_the_design_and_no_others(migrated):
    with closing(sqlite3.connect(migrated)) as connection:
        views = connection.execute("SELECT name FROM sqlite_master WHERE type = 'view'")
        assert {name for (name,) in views} == set(PUBLIC_VIEWS)


@pytest.mark.parametrize("view", PUBLIC_VIEWS)
def test_a_public_view_has_exactly_its_columns_in_order(migrated, view):
    with closing(sqlite3.connect(migrated)) as connection:
        cursor = connection.execute(f"SELECT * FROM {view}")  # noqa: S608 - a name from above
        assert ", ".join(column[0] for column in cursor.description) == PUBLIC_VIEWS[view]


def test_a_downgrade_is_refused_and_changes_nothing(migrated):
    config = Config()
    config.set_main_option("script_location", str(migrations_folder()))
    config.set_main_option("path_separator", "os")
    before = migrated.read_bytes()
    engine = create_engine(f"sqlite:///{migrated}")
    with engine.connect() as connection:
        config.attributes["connection"] = connection
        with pytest.raises(NotImplementedError):
            command.downgrade(config, "base")
    engine.dispose()
    assert migrated.read_bytes() == before


def test_revisions_told_from_file_names_are_those_that_alembic_walks():
    config = Config()
    config.set_main_option("script_location", str(migrations_folder()))
    config.set_main_option("path_separator", "os")
    walked = ScriptDirectory.from_config(config).walk_revisions()
    assert known_revisions() == tuple(script.revision for script in walked)
