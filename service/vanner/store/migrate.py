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
        DatabaseError: The schema is of a newer version, or of another program.
    """
    revision = MigrationContext.configure(connection).get_current_revision()
    if revision is None:
        if inspect(connection).get_table_names():
            raise DatabaseError(
                f"The database {path} belongs to another program; name another file."
            )
        return None
    if revision not in _known_revisions():
        raise DatabaseError(
            f"The database {path} was written by a newer version of Vanner "
            f"(schema {revision}, this version knows up to {_known_revisions()[0]}); "
            "install that version."
        )
    return revision


def is_behind(revision: str | None) -> bool:
    """Whether a revision is older than this version's."""
    return revision != _known_revisions()[0]


def upgrade(connection: Connection) -> None:
    """Bring the schema to this version within the caller's transaction."""
    config = _config()
    config.attributes["connection"] = connection
    command.upgrade(config, "head")
