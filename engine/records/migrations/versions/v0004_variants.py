"""Variants of a week, and the plan that was really sent in it."""

import sqlalchemy as sa
from alembic import op

revision = "0004"
down_revision = "0003"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table(
        "variants",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("body", sa.Text(), nullable=False),
        sa.Column("who", sa.Text(), nullable=False),
        sa.Column("made", sa.DateTime(timezone=True), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_variants_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_variants"),
        sa.UniqueConstraint("week_id", "name", name="uq_variants_week_id_name"),
    )
    op.create_table(
        "sent",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("depot", sa.Text(), nullable=False),
        sa.Column("customer", sa.Text(), nullable=False),
        sa.Column("haulier", sa.Text(), nullable=True),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_sent_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_sent"),
    )
