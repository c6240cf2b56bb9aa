"""A later version of Vanner: a copy of the package whose migrations go one step further."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import pytest

import vanner
from vanner.store.migrate import migrations_folder

_MIGRATION = """
import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table("remark", sa.Column("remark_id", sa.Integer(), primary_key=True))
    op.add_column("item", sa.Column("remark", sa.Text(), nullable=True))
    {last}
"""

_OPEN = """
import sys
from pathlib import Path
from vanner.errors import DatabaseError
from vanner.store.database import Database

try:
    Database.open(Path(sys.argv[1]), create=False, migrate=sys.argv[2] == "migrate").close()
except DatabaseError as error:
    print(error)
    sys.exit(error.exit_status)
"""


@dataclass(frozen=True)
class LaterVanner:
    """Runs the later version in a process of its own."""

    source_root: Path

    def open(self, path: Path, *, migrate: bool) -> subprocess.CompletedProcess[str]:
        """Open a database with it; its exit status and, on stdout, what it says."""
        return subprocess.run(
            [sys.executable, "-c", _OPEN, str(path), "migrate" if migrate else "leave"],
            env=os.environ | {"PYTHONPATH": str(self.source_root)},
            cwd=self.source_root,
            capture_output=True,
            text=True,
            check=False,
        )


@pytest.fixture
def later_vanner(tmp_path: Path) -> Callable[..., LaterVanner]:
    """Makes a later version; `last` is the last statement of its migration."""

    def make(last: str = "pass") -> LaterVanner:
        root = tmp_path / "later"
        leave = shutil.ignore_patterns("__pycache__", "migrations")
        shutil.copytree(Path(vanner.__file__).parent, root / "service" / "vanner", ignore=leave)
        shutil.copytree(
            migrations_folder(), root / "migrations", ignore=shutil.ignore_patterns("__pycache__")
        )
        migration = root / "migrations" / "versions" / "0002_remarks.py"
        migration.write_text(_MIGRATION.format(last=last))
        return LaterVanner(root / "service")

    return make
