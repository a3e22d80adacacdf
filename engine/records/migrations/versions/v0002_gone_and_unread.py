"""Goods that have gone; what could not be read of the figures; the totals of the latest plan."""

import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table(
        "gone",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("when_read", sa.String(length=8), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("depot", sa.Text(), nullable=False),
        sa.Column("customer", sa.Text(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("rate", sa.BigInteger(), nullable=False),
        sa.Column("rate_scale", sa.SmallInteger(), nullable=False),
        sa.Column("haulier", sa.Text(), nullable=True),
        sa.Column("day", sa.Date(), nullable=True),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_gone_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "when_read", "position", name="pk_gone"),
    )
    op.create_table(
        "remarks",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("severity", sa.Text(), nullable=False),
        sa.Column("rule", sa.Text(), nullable=False),
        sa.Column("message", sa.Text(), nullable=False),
        sa.Column("mend", sa.Text(), nullable=False),
        sa.Column("file", sa.Text(), nullable=False),
        sa.Column("sheet", sa.Text(), nullable=False),
        sa.Column("cell", sa.Text(), nullable=False),
        sa.Column("read", sa.Text(), nullable=False),
        sa.Column("rows", sa.Integer(), nullable=False),
        sa.Column("subject", sa.Text(), nullable=False),
        sa.Column("options", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_remarks_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_remarks"),
    )
    op.create_table(
        "totals",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("version", sa.Integer(), nullable=False),
        sa.Column("status", sa.Text(), nullable=False),
        sa.Column("ordered", sa.BigInteger(), nullable=False),
        sa.Column("ordered_scale", sa.SmallInteger(), nullable=False),
        sa.Column("delivered", sa.BigInteger(), nullable=False),
        sa.Column("delivered_scale", sa.SmallInteger(), nullable=False),
        sa.Column("short", sa.BigInteger(), nullable=False),
        sa.Column("short_scale", sa.SmallInteger(), nullable=False),
        sa.Column("unsent", sa.BigInteger(), nullable=False),
        sa.Column("unsent_scale", sa.SmallInteger(), nullable=False),
        sa.Column("freight_payable", sa.BigInteger(), nullable=False),
        sa.Column("freight_payable_scale", sa.SmallInteger(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_totals_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", name="pk_totals"),
    )
    op.create_table(
        "unread",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("table_name", sa.Text(), nullable=False),
        sa.Column("record", sa.Text(), nullable=True),
        sa.Column("texts", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_unread_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_unread"),
    )
    with op.batch_alter_table("shipments") as shipments:
        shipments.add_column(sa.Column("gone", sa.Text(), nullable=False, server_default=""))
