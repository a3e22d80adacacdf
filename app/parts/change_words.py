"""A change in words: what was done to what."""

from datetime import date
from decimal import Decimal
from typing import Any

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.columns import CUSTOMER_COLUMNS, DEPOT_COLUMNS, HAULIER_COLUMNS, RATE_COLUMNS, RULE_COLUMNS
from engine.exact import canonical, total_of
from engine.figures import Customer, Depot, Gone, Haulier, Order, RateKey, RateRow
from engine.week import describe

HEADINGS = {
    what: {column.field: column.heading for column in columns}
    for what, columns in {
        "depot": DEPOT_COLUMNS,
        "customer": CUSTOMER_COLUMNS,
        "rate": RATE_COLUMNS,
        "rule": RULE_COLUMNS,
        "haulier": HAULIER_COLUMNS,
    }.items()
}
SHOWN = 3


def words_of(change: Change) -> str:
    """What a change does, for a list: names and figures as they are, not yet safe inside Markdown."""
    match change:
        case Add(record=RateRow() as row):
            key = RateKey(row.depot, row.customer, row.haulier)
            return f"Rate added: {describe(key)} at {canonical(row.rate)}"
        case Add(record=Gone() as gone):
            return f"Gone: {canonical(gone.quantity)} from {gone.depot} to {gone.customer} ({gone.name})"
        case Add(record=Depot() | Customer() | Haulier() as record):
            return f"{type(record).__name__} added: {record.name}"
        case Remove(what=what, key=key):
            return f"{what.capitalize()} taken out: {_named(key)}"
        case Alter(what="rule", field=field, value=value):
            return f"{_heading('rule', field)} set to {shown(value)}"
        case Alter(what=what, key=key, field="name", value=value):
            return f"{what.capitalize()} {_named(key)} renamed to {value}"
        case Alter(what=what, key=key, field=field, value=value):
            return f"{_named(key)}: {_heading(what, field)} set to {shown(value)}"
        case SetHold(key=key, quantity=quantity, reason=reason):
            return f"{describe(key)} held at {shown(quantity)}" + (f" ({reason})" if reason else "")
        case Lift(key=key):
            return f"{describe(key)}: hold lifted"
        case Together(changes=changes, note=note):
            said = "; ".join(words_of(one) for one in changes[:SHOWN])
            more = f"; and {len(changes) - SHOWN} more" if len(changes) > SHOWN else ""
            return (f"{note}: " if note else "") + said + more
    return type(change).__name__


def _named(key: str | RateKey) -> str:
    return describe(key) if isinstance(key, RateKey) else key


def _heading(what: str, field: str) -> str:
    return HEADINGS.get(what, {}).get("ordered" if field == "orders" else field, field.replace("_", " "))


def shown(value: Any) -> str:
    """A figure as text."""
    if value is None:
        return "blank"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, Decimal):
        return canonical(value)
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, tuple):
        return canonical(total_of(order.quantity for order in value if isinstance(order, Order)))
    return str(value)
