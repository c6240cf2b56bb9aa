"""${message}"""

import sqlalchemy as sa
from alembic import op

revision = "${up_revision}"
down_revision = ${repr(down_revision)}
branch_labels = None
depends_on = None


def upgrade() -> None:
    ${upgrades if upgrades else "raise NotImplementedError"}


def downgrade() -> None:
    """A database is never taken back: restore a backup instead."""
    raise NotImplementedError
