"""Whole loads: hauliers, opening charges, loading days; what of a shipment is charged by the load or once."""

import sqlalchemy as sa
from alembic import op

revision = "0003"
down_revision = "0002"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table(
        "hauliers",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        *_decimal("at_most"),
        *_decimal("load_size"),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_hauliers_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_hauliers"),
    )
    for table, name in (("depots", "opening_charge"), ("weeks", "days"), ("plans", "opening_cost")):
        with op.batch_alter_table(table) as batch:
            for column in _decimal(name):
                batch.add_column(column)
    with op.batch_alter_table("shipments") as batch:
        batch.add_column(sa.Column("per", sa.Text(), nullable=False, server_default="unit"))
        for column in (*_decimal("load_size"), *_decimal("once")):
            batch.add_column(column)


def _decimal(name: str) -> tuple[sa.Column[int], sa.Column[int]]:
    return (
        sa.Column(name, sa.BigInteger(), nullable=True),
        sa.Column(f"{name}_scale", sa.SmallInteger(), nullable=True),
    )
