"""The tables: what is on disk, and how other tools can read it.

A decimal is two columns, `x` and `x_scale`: an integer and how many of its digits stand behind the
point (1250 with scale 2 is 12.5). Rate rows have one scale a column, kept beside the table they belong
to, because there may be a million of them. Exact unrounded sums, whose digits no integer column is
sure to hold, are text. Times are in UTC. Names are stored in rate rows as positions in a list of names;
the view `rates_as_uploaded` puts the names back.
"""

from typing import Any

from sqlalchemy import (
    BigInteger,
    Boolean,
    Column,
    Date,
    DateTime,
    ForeignKey,
    ForeignKeyConstraint,
    Integer,
    MetaData,
    SmallInteger,
    String,
    Table,
    Text,
    UniqueConstraint,
)

metadata = MetaData(
    naming_convention={
        "ix": "ix_%(table_name)s_%(column_0_N_name)s",
        "uq": "uq_%(table_name)s_%(column_0_N_name)s",
        "fk": "fk_%(table_name)s_%(column_0_N_name)s",
        "pk": "pk_%(table_name)s",
    }
)

ID_LENGTH = 40
HASH_LENGTH = 64


def decimal(name: str, needed: bool = False) -> tuple[Column[Any], Column[Any]]:
    """The two columns of a decimal."""
    return (
        Column(name, BigInteger, nullable=not needed),
        Column(f"{name}_scale", SmallInteger, nullable=not needed),
    )


def of_week(primary: bool = True) -> Column[Any]:
    """The column that says which week a row belongs to."""
    return Column(
        "week_id",
        String(ID_LENGTH),
        ForeignKey("weeks.id", ondelete="CASCADE"),
        primary_key=primary,
        nullable=False,
    )


def place(name: str = "position") -> Column[Any]:
    """A column that is part of a key and never numbered by the database itself."""
    return Column(name, Integer, primary_key=True, autoincrement=False)


name_lists = Table(
    "name_lists",
    metadata,
    Column("id", Integer, primary_key=True),
    Column("content_hash", String(HASH_LENGTH), nullable=False, unique=True),
)
"""Lists of names, each stored once however many weeks use it."""

names = Table(
    "names",
    metadata,
    Column("list_id", Integer, ForeignKey("name_lists.id", ondelete="CASCADE"), primary_key=True),
    place("code"),
    Column("name", Text, nullable=False),
    sqlite_with_rowid=False,
)

rate_tables = Table(
    "rate_tables",
    metadata,
    Column("id", Integer, primary_key=True),
    Column("content_hash", String(HASH_LENGTH), nullable=False, unique=True),
    Column("row_count", Integer, nullable=False),
    Column("rate_scale", SmallInteger, nullable=False),
    Column("at_least_scale", SmallInteger),
    Column("at_most_scale", SmallInteger),
    Column("load_size_scale", SmallInteger),
    Column("trip_minimum_scale", SmallInteger),
    Column("charge_per_use_scale", SmallInteger),
    Column("surcharge_scale", SmallInteger),
    Column("km_scale", SmallInteger),
    Column("has_valid_from", Boolean, nullable=False),
)
"""Rate tables by content, each stored once; a scale that is missing is a column blank throughout."""

rate_rows = Table(
    "rate_rows",
    metadata,
    Column("table_id", Integer, ForeignKey("rate_tables.id", ondelete="CASCADE"), primary_key=True),
    place(),
    Column("depot", Integer, nullable=False),
    Column("customer", Integer, nullable=False),
    Column("haulier", Integer),
    Column("rate", BigInteger),
    Column("per_load", Boolean, nullable=False),
    Column("closed", Boolean, nullable=False),
    Column("at_least", BigInteger),
    Column("at_most", BigInteger),
    Column("load_size", BigInteger),
    Column("trip_minimum", BigInteger),
    Column("charge_per_use", BigInteger),
    Column("surcharge", BigInteger),
    Column("km", BigInteger),
    Column("valid_from_day", Integer),
    sqlite_with_rowid=False,
)
"""`valid_from_day` counts days: 1 is the first of January of the year 1."""

weeks = Table(
    "weeks",
    metadata,
    Column("id", String(ID_LENGTH), primary_key=True),
    Column("read_id", String(ID_LENGTH), nullable=False, unique=True),
    Column("desk", Text, nullable=False, index=True),
    Column("name", Text, nullable=False),
    Column("created", DateTime(timezone=True), nullable=False, index=True),
    Column("changed", DateTime(timezone=True), nullable=False),
    Column("archived", DateTime(timezone=True)),
    Column("copied_from", String(ID_LENGTH)),
    Column("version", Integer, nullable=False),
    Column("decimal_mark", String(1), nullable=False),
    Column("unit", Text, nullable=False),
    Column("currency", Text, nullable=False),
    *decimal("fuel_surcharge"),
    *decimal("load_size"),
    Column("when_short", Text, nullable=False),
    *decimal("charge_if_short"),
    *decimal("step"),
    Column("rate_table_id", Integer, ForeignKey("rate_tables.id"), nullable=False),
    Column("depot_list_id", Integer, ForeignKey("name_lists.id"), nullable=False),
    Column("customer_list_id", Integer, ForeignKey("name_lists.id"), nullable=False),
    Column("haulier_list_id", Integer, ForeignKey("name_lists.id"), nullable=False),
    Column("rates_added", Integer, nullable=False),
    *decimal("days"),
)
"""A week as uploaded, its rules among it. `version` counts the changes made since."""

depots = Table(
    "depots",
    metadata,
    of_week(),
    place(),
    Column("name", Text, nullable=False),
    *decimal("available", needed=True),
    *decimal("must_move"),
    *decimal("charge_if_unsent"),
    *decimal("loads_a_day"),
    *decimal("latitude"),
    *decimal("longitude"),
    *decimal("opening_charge"),
)

customers = Table(
    "customers",
    metadata,
    of_week(),
    place(),
    Column("name", Text, nullable=False),
    *decimal("charge_if_short"),
    Column("priority", Text),
    Column("one_depot", Text),
    Column("may_decline", Boolean, nullable=False),
    *decimal("smallest_drop"),
    *decimal("latitude"),
    *decimal("longitude"),
)

hauliers = Table(
    "hauliers",
    metadata,
    of_week(),
    place(),
    Column("name", Text, nullable=False),
    *decimal("at_most"),
    *decimal("load_size"),
)
"""Hauliers of whom there is something to say."""

orders = Table(
    "orders",
    metadata,
    of_week(),
    place("customer"),
    place(),
    *decimal("quantity", needed=True),
    Column("number", Text),
    Column("day", Text),
    ForeignKeyConstraint(
        ["week_id", "customer"], ["customers.week_id", "customers.position"], ondelete="CASCADE"
    ),
)
"""Order rows; `customer` is the position of the customer in the week."""

rate_changes = Table(
    "rate_changes",
    metadata,
    of_week(),
    place("row_id"),
    Column("removed", Boolean, nullable=False),
    Column("depot", Text),
    Column("customer", Text),
    Column("haulier", Text),
    *decimal("rate"),
    Column("per", Text),
    Column("closed", Boolean),
    *decimal("at_least"),
    *decimal("at_most"),
    *decimal("load_size"),
    *decimal("trip_minimum"),
    *decimal("charge_per_use"),
    *decimal("surcharge"),
    *decimal("km"),
    Column("valid_from", Date),
)
"""Where a week's rates, as uploaded, differ from the rate table that it shares with other weeks."""

holds = Table(
    "holds",
    metadata,
    of_week(),
    Column("when_read", String(8), primary_key=True),
    place(),
    Column("depot", Text, nullable=False),
    Column("customer", Text, nullable=False),
    Column("haulier", Text),
    Column("number", Integer, nullable=False),
    *decimal("quantity", needed=True),
    Column("reason", Text, nullable=False),
)
"""Holds; `when_read` is 'uploaded' or 'now': what came with the figures, and what is in force."""

changes = Table(
    "changes",
    metadata,
    of_week(),
    place("sequence"),
    Column("token", String(ID_LENGTH), nullable=False, unique=True),
    Column("kind", Text, nullable=False),
    Column("body", Text, nullable=False),
    Column("who", Text, nullable=False),
    Column("made", DateTime(timezone=True), nullable=False),
    Column("why", Text, nullable=False),
    Column("undoes", Integer),
)
"""The list of changes, from 1; `undoes` is the sequence number of the change that one reverts."""

plans = Table(
    "plans",
    metadata,
    Column("id", Integer, primary_key=True),
    of_week(primary=False),
    Column("number", Integer, nullable=False),
    Column("version", Integer, nullable=False),
    Column("issued", DateTime(timezone=True), nullable=False),
    Column("who", Text, nullable=False),
    Column("note", Text, nullable=False),
    Column("status", Text, nullable=False),
    Column("unit", Text, nullable=False),
    Column("currency", Text, nullable=False),
    *decimal("freight_payable", needed=True),
    *decimal("short_cost", needed=True),
    *decimal("unsent_cost", needed=True),
    Column("freight_cost_exact", Text, nullable=False),
    Column("total_cost_exact", Text, nullable=False),
    Column("lower_bound_exact", Text, nullable=False),
    *decimal("opening_cost"),
    UniqueConstraint("week_id", "number"),
)
"""Plans as they were issued; `version` is that of the week which they answer."""

shipments = Table(
    "shipments",
    metadata,
    Column("plan_id", Integer, ForeignKey("plans.id", ondelete="CASCADE"), primary_key=True),
    place(),
    Column("depot", Text, nullable=False),
    Column("customer", Text, nullable=False),
    Column("haulier", Text),
    Column("number", Integer, nullable=False),
    *decimal("quantity", needed=True),
    *decimal("rate", needed=True),
    Column("cost_exact", Text, nullable=False),
    *decimal("payable", needed=True),
    Column("loads", Integer),
    Column("held", Boolean, nullable=False),
    Column("gone", Text, nullable=False, server_default=""),
    Column("per", Text, nullable=False, server_default="unit"),
    *decimal("load_size"),
    *decimal("once"),
)
"""`gone` is the name of a quantity that had left when the plan was issued, empty for what was still to go."""

short = Table(
    "short",
    metadata,
    Column("plan_id", Integer, ForeignKey("plans.id", ondelete="CASCADE"), primary_key=True),
    place(),
    Column("customer", Text, nullable=False),
    *decimal("quantity", needed=True),
    *decimal("charge", needed=True),
    *decimal("cost", needed=True),
)

unsent = Table(
    "unsent",
    metadata,
    Column("plan_id", Integer, ForeignKey("plans.id", ondelete="CASCADE"), primary_key=True),
    place(),
    Column("depot", Text, nullable=False),
    *decimal("quantity", needed=True),
    *decimal("charge", needed=True),
    *decimal("cost", needed=True),
    *decimal("must_move", needed=True),
)

answers = Table(
    "answers",
    metadata,
    Column("desk", Text, primary_key=True),
    Column("rule", Text, primary_key=True),
    Column("subject", Text, primary_key=True),
    Column("answer", Text, nullable=False),
    Column("given", DateTime(timezone=True), nullable=False),
)
"""What a desk has answered to questions about its figures, names that mean another included."""

gone = Table(
    "gone",
    metadata,
    of_week(),
    Column("when_read", String(8), primary_key=True),
    place(),
    Column("name", Text, nullable=False),
    Column("depot", Text, nullable=False),
    Column("customer", Text, nullable=False),
    *decimal("quantity", needed=True),
    *decimal("rate", needed=True),
    Column("haulier", Text),
    Column("day", Date),
)
"""What has left; `when_read` is 'uploaded' or 'now', as for holds."""

remarks = Table(
    "remarks",
    metadata,
    of_week(),
    place(),
    Column("severity", Text, nullable=False),
    Column("rule", Text, nullable=False),
    Column("message", Text, nullable=False),
    Column("mend", Text, nullable=False),
    Column("file", Text, nullable=False),
    Column("sheet", Text, nullable=False),
    Column("cell", Text, nullable=False),
    Column("read", Text, nullable=False),
    Column("rows", Integer, nullable=False),
    Column("subject", Text, nullable=False),
    Column("options", Text, nullable=False),
)
"""What was said of the sheets and stays until it is answered or accepted; `options` is a JSON list."""

unread = Table(
    "unread",
    metadata,
    of_week(),
    place(),
    Column("table_name", Text, nullable=False),
    Column("record", Text),
    Column("texts", Text, nullable=False),
)
"""Texts of the figures that nobody could read yet: kept until they are mended. `texts` is JSON by field."""

totals = Table(
    "totals",
    metadata,
    of_week(),
    Column("version", Integer, nullable=False),
    Column("status", Text, nullable=False),
    *decimal("ordered", needed=True),
    *decimal("delivered", needed=True),
    *decimal("short", needed=True),
    *decimal("unsent", needed=True),
    *decimal("freight_payable", needed=True),
)
"""What the latest plan of a week adds up to, whether it was issued or not."""

variants = Table(
    "variants",
    metadata,
    of_week(),
    place(),
    Column("name", Text, nullable=False),
    Column("body", Text, nullable=False),
    Column("who", Text, nullable=False),
    Column("made", DateTime(timezone=True), nullable=False),
    UniqueConstraint("week_id", "name"),
)
"""Named lists of changes on top of a week's figures; `body` is one grouped change, as in `changes`."""

sent = Table(
    "sent",
    metadata,
    of_week(),
    place(),
    Column("depot", Text, nullable=False),
    Column("customer", Text, nullable=False),
    Column("haulier", Text),
    Column("number", Integer, nullable=False),
    *decimal("quantity", needed=True),
)
"""The plan that was really sent in a week, where somebody said: what the usual plan may be."""
