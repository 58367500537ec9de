"""${message}."""

import sqlalchemy as sa
import sqlmodel
from alembic import op
${imports if imports else ""}
revision = ${repr(up_revision)}
down_revision = ${repr(down_revision)}
branch_labels = ${repr(branch_labels)}
depends_on = ${repr(depends_on)}


def upgrade() -> None:
    """Move the database to this revision."""
    ${upgrades if upgrades else "pass"}


def downgrade() -> None:
    """Move the database back to the revision before."""
    ${downgrades if downgrades else "pass"}
