"""Schema versions by Alembic: finding the migrations, comparing and upgrading."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from alembic import command
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Connection, inspect

import vanner
from vanner.errors import DatabaseError
from vanner.store.identity import APPLICATION_ID


@cache
def migrations_folder() -> Path:
    """Where the migrations lie: inside an installed package, else beside the source root."""
    package = Path(vanner.__file__).parent
    inside = package / "migrations"
    return inside if inside.is_dir() else package.parent.parent / "migrations"


def _config() -> Config:
    config = Config()
    config.set_main_option("script_location", str(migrations_folder()).replace("%", "%%"))
    config.set_main_option("path_separator", "os")
    return config


@cache
def _known_revisions() -> tuple[str, ...]:
    """Revisions of this version, newest first."""
    script = ScriptDirectory.from_config(_config())
    return tuple(entry.revision for entry in script.walk_revisions())


def current_revision(connection: Connection, path: Path) -> str | None:
    """The database's schema revision; None for one that holds no tables.

    Raises:
        DatabaseError: The schema is of a newer version, of another program, or damaged.
    """
    # The header of a file in use may be behind its write-ahead log: what counts is read here.
    application = connection.exec_driver_sql("PRAGMA application_id").scalar()
    revisions = MigrationContext.configure(connection).get_current_heads()
    if not revisions or application != APPLICATION_ID:
        if inspect(connection).get_table_names():
            raise DatabaseError(
                f"The database {path} belongs to another program; name another file."
            )
        return None
    newer = sorted(set(revisions) - set(_known_revisions()))
    if newer:
        raise DatabaseError(
            f"The database {path} was written by a newer version of Vanner "
            f"(schema {newer[-1]}, this version knows up to {_known_revisions()[0]}); "
            "install that version."
        )
    if len(revisions) > 1:
        raise DatabaseError(
            f"The database {path} says that it is of several versions at once; "
            "restore a backup made by `vanner db backup`."
        )
    return revisions[0]


def is_behind(revision: str | None) -> bool:
    """Whether a revision is older than this version's."""
    return revision != _known_revisions()[0]


def upgrade(connection: Connection) -> None:
    """Bring the schema to this version within the caller's transaction."""
    config = _config()
    config.attributes["connection"] = connection
    command.upgrade(config, "head")
