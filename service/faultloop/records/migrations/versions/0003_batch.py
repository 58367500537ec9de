"""Batches, as they were sent and answered."""

import sqlalchemy as sa
import sqlmodel
from alembic import op

revision = "0003"
down_revision = "0002"
branch_labels = None
depends_on = None


def _text(name: str, length: int | None = None) -> sa.Column[str]:
    return sa.Column(name, sqlmodel.AutoString(length=length), nullable=False)


def upgrade() -> None:
    """Move the database to this revision."""
    counts = [sa.Column(name, sa.Integer(), nullable=False) for name in ("rows", "results", "held", "refused")]
    long = [sa.Column(name, sa.LargeBinary(), nullable=False) for name in ("parameters", "content", "answer")]
    op.create_table(
        "batch",
        sa.Column("sequence", sa.BigInteger().with_variant(sa.Integer(), "sqlite"), nullable=False),
        _text("id", 36),
        _text("input_digest", 64),
        _text("format", 4),
        *counts,
        _text("engine"),
        _text("devices_digest", 64),
        sa.Column("stored_at", sqlmodel.UTCDateTime(), nullable=False),
        *long,
        sa.CheckConstraint("format IN ('csv', 'json')", name=op.f("ck_batch_format")),
        sa.CheckConstraint("results + held + refused = rows", name=op.f("ck_batch_counts")),
        sa.PrimaryKeyConstraint("sequence", name=op.f("pk_batch")),
        sa.UniqueConstraint("id", name=op.f("uq_batch_id")),
        sqlite_autoincrement=True,
    )


def downgrade() -> None:
    """Move the database back to the revision before."""
    op.drop_table("batch")
