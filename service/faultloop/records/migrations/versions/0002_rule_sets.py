"""Callers' sets of rules: their contents by digest, and the names that stand for them."""

import sqlalchemy as sa
import sqlmodel
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None


def upgrade() -> None:
    """Move the database to this revision."""
    op.create_table(
        "rule_set",
        sa.Column("digest", sqlmodel.AutoString(length=64), nullable=False),
        sa.Column("name", sqlmodel.AutoString(length=60), nullable=False),
        sa.Column("stored_at", sqlmodel.UTCDateTime(), nullable=False),
        sa.Column("content", sa.LargeBinary(), nullable=False),
        sa.PrimaryKeyConstraint("digest", name=op.f("pk_rule_set")),
    )
    op.create_index(op.f("ix_rule_set_name"), "rule_set", ["name"])
    op.create_table(
        "rule_set_name",
        sa.Column("name", sqlmodel.AutoString(length=60), nullable=False),
        sa.Column("digest", sqlmodel.AutoString(length=64), nullable=False),
        sa.Column("stored_at", sqlmodel.UTCDateTime(), nullable=False),
        sa.ForeignKeyConstraint(["digest"], ["rule_set.digest"], name=op.f("fk_rule_set_name_digest_rule_set")),
        sa.PrimaryKeyConstraint("name", name=op.f("pk_rule_set_name")),
    )


def downgrade() -> None:
    """Move the database back to the revision before."""
    op.drop_table("rule_set_name")
    op.drop_table("rule_set")
