"""Assessments, as they were asked and answered."""

import sqlalchemy as sa
import sqlmodel
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def _text(name: str, length: int | None = None, nullable: bool = False) -> sa.Column[str]:
    return sa.Column(name, sqlmodel.AutoString(length=length), nullable=nullable)


def upgrade() -> None:
    """Move the database to this revision."""
    op.create_table(
        "assessment",
        sa.Column("sequence", sa.BigInteger().with_variant(sa.Integer(), "sqlite"), nullable=False),
        _text("id", 36),
        _text("input_digest", 64),
        _text("verdict", 20),
        _text("urgency", 20),
        _text("rules"),
        _text("label", nullable=True),
        _text("engine"),
        _text("rules_digest", 64),
        _text("devices_digest", 64),
        sa.Column("stored_at", sqlmodel.UTCDateTime(), nullable=False),
        sa.Column("request", sa.LargeBinary(), nullable=False),
        sa.Column("answer", sa.LargeBinary(), nullable=False),
        sa.CheckConstraint(
            "verdict IN ('fail', 'undetermined', 'marginal', 'pass-with-conditions', 'pass')",
            name=op.f("ck_assessment_verdict"),
        ),
        sa.CheckConstraint(
            "urgency IN ('stop-use', 'urgent', 'planned', 'note', 'none')",
            name=op.f("ck_assessment_urgency"),
        ),
        sa.PrimaryKeyConstraint("sequence", name=op.f("pk_assessment")),
        sa.UniqueConstraint("id", name=op.f("uq_assessment_id")),
        sqlite_autoincrement=True,
    )
    op.create_index(op.f("ix_assessment_verdict_sequence"), "assessment", ["verdict", "sequence"])
    op.create_index(op.f("ix_assessment_urgency_sequence"), "assessment", ["urgency", "sequence"])


def downgrade() -> None:
    """Move the database back to the revision before."""
    op.drop_table("assessment")
