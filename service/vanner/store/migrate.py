"""Schema versions: finding the migrations, comparing, and upgrading by Alembic.

Alembic is imported only where something is to be upgraded: it would take a quarter of the
start of every command.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

from sqlalchemy import Connection, String, column, inspect, select, table

import vanner
from vanner.errors import DatabaseError
from vanner.store.identity import APPLICATION_ID


@cache
def migrations_folder() -> Path:
    """Where the migrations lie: inside an installed package, else beside the source root."""
    package = Path(vanner.__file__).parent
    inside = package / "migrations"
    return inside if inside.is_dir() else package.parent.parent / "migrations"


@cache
def known_revisions() -> tuple[str, ...]:
    """Revisions of this version, newest first; a migration's file name begins with its own."""
    files = (migrations_folder() / "versions").glob("[0-9]*_*.py")
    return tuple(sorted((file.name.partition("_")[0] for file in files), reverse=True))


def _written_revisions(connection: Connection) -> list[str]:
    """What the database says of its version, in the table that Alembic keeps."""
    if not inspect(connection).has_table("alembic_version"):
        return []
    version = column("version_num", String)
    query = select(version).select_from(table("alembic_version"))
    return list(connection.execute(query).scalars())


def current_revision(connection: Connection, path: Path) -> str | None:
    """The database's schema revision; None for one that holds no tables.

    Raises:
        DatabaseError: The schema is of a newer version, of another program, or damaged.
    """
    # The header of a file in use may be behind its write-ahead log: what counts is read here.
    application = connection.exec_driver_sql("PRAGMA application_id").scalar()
    revisions = _written_revisions(connection)
    if not revisions or application != APPLICATION_ID:
        if inspect(connection).get_table_names():
            raise DatabaseError(
                f"The database {path} belongs to another program; name another file."
            )
        return None
    newer = sorted(set(revisions) - set(known_revisions()))
    if newer:
        raise DatabaseError(
            f"The database {path} was written by a newer version of Vanner "
            f"(schema {newer[-1]}, this version knows up to {known_revisions()[0]}); "
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
    return revision != known_revisions()[0]


def upgrade(connection: Connection) -> None:
    """Bring the schema to this version within the caller's transaction."""
    from alembic import command  # noqa: PLC0415 - see the module's docstring
    from alembic.config import Config  # noqa: PLC0415 - see the module's docstring

    config = Config()
    config.set_main_option("script_location", str(migrations_folder()).replace("%", "%%"))
    config.set_main_option("path_separator", "os")
    config.attributes["connection"] = connection
    command.upgrade(config, "head")
