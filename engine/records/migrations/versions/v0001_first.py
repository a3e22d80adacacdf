"""The first tables: weeks, their rates, changes, issued plans, answers."""

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None

AMOUNTS = ("at_least", "at_most", "load_size", "trip_minimum", "charge_per_use", "surcharge", "km")

SHARED_ROWS = f"""
SELECT w.id AS week_id, r.position AS row_id, d.name AS depot, c.name AS customer, h.name AS haulier,
       r.rate AS rate, t.rate_scale AS rate_scale,
       CASE WHEN r.per_load THEN 'load' ELSE 'unit' END AS per, r.closed AS closed,
       {", ".join(f"r.{name} AS {name}, t.{name}_scale AS {name}_scale" for name in AMOUNTS)}
FROM weeks w
JOIN rate_tables t ON t.id = w.rate_table_id
JOIN rate_rows r ON r.table_id = t.id
JOIN names d ON d.list_id = w.depot_list_id AND d.code = r.depot
JOIN names c ON c.list_id = w.customer_list_id AND c.code = r.customer
LEFT JOIN names h ON h.list_id = w.haulier_list_id AND h.code = r.haulier
WHERE NOT EXISTS (SELECT 1 FROM rate_changes x WHERE x.week_id = w.id AND x.row_id = r.position)
"""

OWN_ROWS = f"""
SELECT week_id, row_id, depot, customer, haulier, rate, rate_scale, per, closed,
       {", ".join(f"{name}, {name}_scale" for name in AMOUNTS)}
FROM rate_changes WHERE NOT removed
"""


def upgrade() -> None:
    op.create_table(
        "answers",
        sa.Column("desk", sa.Text(), nullable=False),
        sa.Column("rule", sa.Text(), nullable=False),
        sa.Column("subject", sa.Text(), nullable=False),
        sa.Column("answer", sa.Text(), nullable=False),
        sa.Column("given", sa.DateTime(timezone=True), nullable=False),
        sa.PrimaryKeyConstraint("desk", "rule", "subject", name="pk_answers"),
    )
    op.create_table(
        "name_lists",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("content_hash", sa.String(length=64), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_name_lists"),
        sa.UniqueConstraint("content_hash", name="uq_name_lists_content_hash"),
    )
    op.create_table(
        "rate_tables",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("content_hash", sa.String(length=64), nullable=False),
        sa.Column("row_count", sa.Integer(), nullable=False),
        sa.Column("rate_scale", sa.SmallInteger(), nullable=False),
        sa.Column("at_least_scale", sa.SmallInteger(), nullable=True),
        sa.Column("at_most_scale", sa.SmallInteger(), nullable=True),
        sa.Column("load_size_scale", sa.SmallInteger(), nullable=True),
        sa.Column("trip_minimum_scale", sa.SmallInteger(), nullable=True),
        sa.Column("charge_per_use_scale", sa.SmallInteger(), nullable=True),
        sa.Column("surcharge_scale", sa.SmallInteger(), nullable=True),
        sa.Column("km_scale", sa.SmallInteger(), nullable=True),
        sa.Column("has_valid_from", sa.Boolean(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_rate_tables"),
        sa.UniqueConstraint("content_hash", name="uq_rate_tables_content_hash"),
    )
    op.create_table(
        "names",
        sa.Column("list_id", sa.Integer(), nullable=False),
        sa.Column("code", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(["list_id"], ["name_lists.id"], name="fk_names_list_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("list_id", "code", name="pk_names"),
        sqlite_with_rowid=False,
    )
    op.create_table(
        "rate_rows",
        sa.Column("table_id", sa.Integer(), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("depot", sa.Integer(), nullable=False),
        sa.Column("customer", sa.Integer(), nullable=False),
        sa.Column("haulier", sa.Integer(), nullable=True),
        sa.Column("rate", sa.BigInteger(), nullable=True),
        sa.Column("per_load", sa.Boolean(), nullable=False),
        sa.Column("closed", sa.Boolean(), nullable=False),
        sa.Column("at_least", sa.BigInteger(), nullable=True),
        sa.Column("at_most", sa.BigInteger(), nullable=True),
        sa.Column("load_size", sa.BigInteger(), nullable=True),
        sa.Column("trip_minimum", sa.BigInteger(), nullable=True),
        sa.Column("charge_per_use", sa.BigInteger(), nullable=True),
        sa.Column("surcharge", sa.BigInteger(), nullable=True),
        sa.Column("km", sa.BigInteger(), nullable=True),
        sa.Column("valid_from_day", sa.Integer(), nullable=True),
        sa.ForeignKeyConstraint(
            ["table_id"], ["rate_tables.id"], name="fk_rate_rows_table_id", ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("table_id", "position", name="pk_rate_rows"),
        sqlite_with_rowid=False,
    )
    op.create_table(
        "weeks",
        sa.Column("id", sa.String(length=40), nullable=False),
        sa.Column("read_id", sa.String(length=40), nullable=False),
        sa.Column("desk", sa.Text(), nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("created", sa.DateTime(timezone=True), nullable=False),
        sa.Column("changed", sa.DateTime(timezone=True), nullable=False),
        sa.Column("archived", sa.DateTime(timezone=True), nullable=True),
        sa.Column("copied_from", sa.String(length=40), nullable=True),
        sa.Column("version", sa.Integer(), nullable=False),
        sa.Column("decimal_mark", sa.String(length=1), nullable=False),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("currency", sa.Text(), nullable=False),
        sa.Column("fuel_surcharge", sa.BigInteger(), nullable=True),
        sa.Column("fuel_surcharge_scale", sa.SmallInteger(), nullable=True),
        sa.Column("load_size", sa.BigInteger(), nullable=True),
        sa.Column("load_size_scale", sa.SmallInteger(), nullable=True),
        sa.Column("when_short", sa.Text(), nullable=False),
        sa.Column("charge_if_short", sa.BigInteger(), nullable=True),
        sa.Column("charge_if_short_scale", sa.SmallInteger(), nullable=True),
        sa.Column("step", sa.BigInteger(), nullable=True),
        sa.Column("step_scale", sa.SmallInteger(), nullable=True),
        sa.Column("rate_table_id", sa.Integer(), nullable=False),
        sa.Column("depot_list_id", sa.Integer(), nullable=False),
        sa.Column("customer_list_id", sa.Integer(), nullable=False),
        sa.Column("haulier_list_id", sa.Integer(), nullable=False),
        sa.Column("rates_added", sa.Integer(), nullable=False),
        sa.ForeignKeyConstraint(["customer_list_id"], ["name_lists.id"], name="fk_weeks_customer_list_id"),
        sa.ForeignKeyConstraint(["depot_list_id"], ["name_lists.id"], name="fk_weeks_depot_list_id"),
        sa.ForeignKeyConstraint(["haulier_list_id"], ["name_lists.id"], name="fk_weeks_haulier_list_id"),
        sa.ForeignKeyConstraint(["rate_table_id"], ["rate_tables.id"], name="fk_weeks_rate_table_id"),
        sa.PrimaryKeyConstraint("id", name="pk_weeks"),
        sa.UniqueConstraint("read_id", name="uq_weeks_read_id"),
    )
    op.create_index("ix_weeks_created", "weeks", ["created"], unique=False)
    op.create_index("ix_weeks_desk", "weeks", ["desk"], unique=False)
    op.create_table(
        "changes",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("sequence", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("token", sa.String(length=40), nullable=False),
        sa.Column("kind", sa.Text(), nullable=False),
        sa.Column("body", sa.Text(), nullable=False),
        sa.Column("who", sa.Text(), nullable=False),
        sa.Column("made", sa.DateTime(timezone=True), nullable=False),
        sa.Column("why", sa.Text(), nullable=False),
        sa.Column("undoes", sa.Integer(), nullable=True),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_changes_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "sequence", name="pk_changes"),
        sa.UniqueConstraint("token", name="uq_changes_token"),
    )
    op.create_table(
        "customers",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("charge_if_short", sa.BigInteger(), nullable=True),
        sa.Column("charge_if_short_scale", sa.SmallInteger(), nullable=True),
        sa.Column("priority", sa.Text(), nullable=True),
        sa.Column("one_depot", sa.Text(), nullable=True),
        sa.Column("may_decline", sa.Boolean(), nullable=False),
        sa.Column("smallest_drop", sa.BigInteger(), nullable=True),
        sa.Column("smallest_drop_scale", sa.SmallInteger(), nullable=True),
        sa.Column("latitude", sa.BigInteger(), nullable=True),
        sa.Column("latitude_scale", sa.SmallInteger(), nullable=True),
        sa.Column("longitude", sa.BigInteger(), nullable=True),
        sa.Column("longitude_scale", sa.SmallInteger(), nullable=True),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_customers_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_customers"),
    )
    op.create_table(
        "depots",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("available", sa.BigInteger(), nullable=False),
        sa.Column("available_scale", sa.SmallInteger(), nullable=False),
        sa.Column("must_move", sa.BigInteger(), nullable=True),
        sa.Column("must_move_scale", sa.SmallInteger(), nullable=True),
        sa.Column("charge_if_unsent", sa.BigInteger(), nullable=True),
        sa.Column("charge_if_unsent_scale", sa.SmallInteger(), nullable=True),
        sa.Column("loads_a_day", sa.BigInteger(), nullable=True),
        sa.Column("loads_a_day_scale", sa.SmallInteger(), nullable=True),
        sa.Column("latitude", sa.BigInteger(), nullable=True),
        sa.Column("latitude_scale", sa.SmallInteger(), nullable=True),
        sa.Column("longitude", sa.BigInteger(), nullable=True),
        sa.Column("longitude_scale", sa.SmallInteger(), nullable=True),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_depots_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "position", name="pk_depots"),
    )
    op.create_table(
        "holds",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("when_read", sa.String(length=8), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("depot", sa.Text(), nullable=False),
        sa.Column("customer", sa.Text(), nullable=False),
        sa.Column("haulier", sa.Text(), nullable=True),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("reason", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_holds_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "when_read", "position", name="pk_holds"),
    )
    op.create_table(
        "plans",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("version", sa.Integer(), nullable=False),
        sa.Column("issued", sa.DateTime(timezone=True), nullable=False),
        sa.Column("who", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.Column("status", sa.Text(), nullable=False),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("currency", sa.Text(), nullable=False),
        sa.Column("freight_payable", sa.BigInteger(), nullable=False),
        sa.Column("freight_payable_scale", sa.SmallInteger(), nullable=False),
        sa.Column("short_cost", sa.BigInteger(), nullable=False),
        sa.Column("short_cost_scale", sa.SmallInteger(), nullable=False),
        sa.Column("unsent_cost", sa.BigInteger(), nullable=False),
        sa.Column("unsent_cost_scale", sa.SmallInteger(), nullable=False),
        sa.Column("freight_cost_exact", sa.Text(), nullable=False),
        sa.Column("total_cost_exact", sa.Text(), nullable=False),
        sa.Column("lower_bound_exact", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_plans_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("id", name="pk_plans"),
        sa.UniqueConstraint("week_id", "number", name="uq_plans_week_id_number"),
    )
    op.create_table(
        "rate_changes",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("row_id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("removed", sa.Boolean(), nullable=False),
        sa.Column("depot", sa.Text(), nullable=True),
        sa.Column("customer", sa.Text(), nullable=True),
        sa.Column("haulier", sa.Text(), nullable=True),
        sa.Column("rate", sa.BigInteger(), nullable=True),
        sa.Column("rate_scale", sa.SmallInteger(), nullable=True),
        sa.Column("per", sa.Text(), nullable=True),
        sa.Column("closed", sa.Boolean(), nullable=True),
        sa.Column("at_least", sa.BigInteger(), nullable=True),
        sa.Column("at_least_scale", sa.SmallInteger(), nullable=True),
        sa.Column("at_most", sa.BigInteger(), nullable=True),
        sa.Column("at_most_scale", sa.SmallInteger(), nullable=True),
        sa.Column("load_size", sa.BigInteger(), nullable=True),
        sa.Column("load_size_scale", sa.SmallInteger(), nullable=True),
        sa.Column("trip_minimum", sa.BigInteger(), nullable=True),
        sa.Column("trip_minimum_scale", sa.SmallInteger(), nullable=True),
        sa.Column("charge_per_use", sa.BigInteger(), nullable=True),
        sa.Column("charge_per_use_scale", sa.SmallInteger(), nullable=True),
        sa.Column("surcharge", sa.BigInteger(), nullable=True),
        sa.Column("surcharge_scale", sa.SmallInteger(), nullable=True),
        sa.Column("km", sa.BigInteger(), nullable=True),
        sa.Column("km_scale", sa.SmallInteger(), nullable=True),
        sa.Column("valid_from", sa.Date(), nullable=True),
        sa.ForeignKeyConstraint(
            ["week_id"], ["weeks.id"], name="fk_rate_changes_week_id", ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("week_id", "row_id", name="pk_rate_changes"),
    )
    op.create_table(
        "orders",
        sa.Column("week_id", sa.String(length=40), nullable=False),
        sa.Column("customer", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("number", sa.Text(), nullable=True),
        sa.Column("day", sa.Text(), nullable=True),
        sa.ForeignKeyConstraint(
            ["week_id", "customer"],
            ["customers.week_id", "customers.position"],
            name="fk_orders_week_id_customer",
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(["week_id"], ["weeks.id"], name="fk_orders_week_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("week_id", "customer", "position", name="pk_orders"),
    )
    op.create_table(
        "shipments",
        sa.Column("plan_id", sa.Integer(), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("depot", sa.Text(), nullable=False),
        sa.Column("customer", sa.Text(), nullable=False),
        sa.Column("haulier", sa.Text(), nullable=True),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("rate", sa.BigInteger(), nullable=False),
        sa.Column("rate_scale", sa.SmallInteger(), nullable=False),
        sa.Column("cost_exact", sa.Text(), nullable=False),
        sa.Column("payable", sa.BigInteger(), nullable=False),
        sa.Column("payable_scale", sa.SmallInteger(), nullable=False),
        sa.Column("loads", sa.Integer(), nullable=True),
        sa.Column("held", sa.Boolean(), nullable=False),
        sa.ForeignKeyConstraint(["plan_id"], ["plans.id"], name="fk_shipments_plan_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("plan_id", "position", name="pk_shipments"),
    )
    op.create_table(
        "short",
        sa.Column("plan_id", sa.Integer(), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("customer", sa.Text(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("charge", sa.BigInteger(), nullable=False),
        sa.Column("charge_scale", sa.SmallInteger(), nullable=False),
        sa.Column("cost", sa.BigInteger(), nullable=False),
        sa.Column("cost_scale", sa.SmallInteger(), nullable=False),
        sa.ForeignKeyConstraint(["plan_id"], ["plans.id"], name="fk_short_plan_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("plan_id", "position", name="pk_short"),
    )
    op.create_table(
        "unsent",
        sa.Column("plan_id", sa.Integer(), nullable=False),
        sa.Column("position", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("depot", sa.Text(), nullable=False),
        sa.Column("quantity", sa.BigInteger(), nullable=False),
        sa.Column("quantity_scale", sa.SmallInteger(), nullable=False),
        sa.Column("charge", sa.BigInteger(), nullable=False),
        sa.Column("charge_scale", sa.SmallInteger(), nullable=False),
        sa.Column("cost", sa.BigInteger(), nullable=False),
        sa.Column("cost_scale", sa.SmallInteger(), nullable=False),
        sa.Column("must_move", sa.BigInteger(), nullable=False),
        sa.Column("must_move_scale", sa.SmallInteger(), nullable=False),
        sa.ForeignKeyConstraint(["plan_id"], ["plans.id"], name="fk_unsent_plan_id", ondelete="CASCADE"),
        sa.PrimaryKeyConstraint("plan_id", "position", name="pk_unsent"),
    )
    op.execute(f"CREATE VIEW rates_as_uploaded AS {SHARED_ROWS} UNION ALL {OWN_ROWS}")
