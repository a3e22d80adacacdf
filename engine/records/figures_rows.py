"""A week as uploaded, as rows and back: depots, customers, orders, holds, gone goods and altered rates."""

from collections.abc import Iterable, Mapping, Sequence
from types import MappingProxyType
from typing import Any

from sqlalchemy import Connection, Table, delete, select

from engine.figures import Customer, Depot, Gone, Haulier, Hold, Order, RateKey, RateRow, Rules
from engine.rates import Rates, RateTable
from engine.records.bulk import insert_columns, insert_rows
from engine.records.decimals import Row, as_row, cells_of, columns_of, from_row, row_of, values_in
from engine.records.schema import customers, depots, gone, hauliers, holds, orders, rate_changes
from engine.week import Week

UPLOADED = "uploaded"
NOW = "now"

RULES_WITHOUT = ("week",)
"""The name of the week has a column of its own, by which weeks are searched."""


def rules_row(rules: Rules) -> Row:
    """The columns of the rules in the row of a week."""
    return row_of(rules, without=RULES_WITHOUT)


def rules_in(row: Mapping[Any, Any]) -> Rules:
    """The rules that the row of a week holds."""
    return Rules(week=row["name"], **values_in(row, Rules, without=RULES_WITHOUT))


def store_figures(connection: Connection, week_id: str, week: Week) -> None:
    """Write everything of a week but its rules and its rate table."""
    of_week = {"week_id": week_id}
    numbers = [(week_id, i) for i in range(len(week.depots))]
    _insert(connection, depots, numbers, Depot, week.depots.values())
    numbers = [(week_id, j) for j in range(len(week.customers))]
    _insert(connection, customers, numbers, Customer, week.customers.values(), without=("orders",))
    listed = [
        (order, (week_id, j, n))
        for j, customer in enumerate(week.customers.values())
        for n, order in enumerate(customer.orders)
    ]
    _insert(connection, orders, [key for _, key in listed], Order, [order for order, _ in listed])
    insert_rows(connection, rate_changes, _rate_rows(of_week, week.rates))
    numbers = [(week_id, number) for number in range(len(week.hauliers))]
    _insert(connection, hauliers, numbers, Haulier, week.hauliers.values())
    store_facts(connection, week_id, week, UPLOADED)
    store_facts(connection, week_id, week, NOW)


def _insert(
    connection: Connection,
    table: Table,
    keys: Sequence[tuple[Any, ...]],
    kind: Any,
    records: Iterable[Any],
    without: Sequence[str] = (),
) -> None:
    """Put in many figures of one kind, each under the key of its row."""
    names = [column.name for column in table.primary_key.columns] + columns_of(kind, without)
    cells = cells_of(kind, records, without)
    rows = [(*key, *row) for key, row in zip(keys, cells, strict=True)]
    insert_columns(connection, table, names, [rows] if rows else [])


def store_facts(connection: Connection, week_id: str, week: Week, when_read: str) -> None:
    """Write the holds and the gone goods of a week, as uploaded or as they are now."""
    head = {"week_id": week_id, "when_read": when_read}
    insert_rows(connection, holds, [{**head, "position": n, **row} for n, row in enumerate(_hold_rows(week))])
    rows = [{**head, "position": n, **row_of(one)} for n, one in enumerate(week.gone.values())]
    insert_rows(connection, gone, rows)


def replace_facts(connection: Connection, week_id: str, before: Week, after: Week) -> None:
    """Let the holds and gone goods that are in force be those of the week as it is now."""
    for table, old, new in ((holds, before.holds, after.holds), (gone, before.gone, after.gone)):
        if old is not new and (old != new):
            connection.execute(delete(table).where(table.c.week_id == week_id, table.c.when_read == NOW))
            head = {"week_id": week_id, "when_read": NOW}
            rows = _hold_rows(after) if table is holds else [row_of(one) for one in after.gone.values()]
            insert_rows(connection, table, [{**head, "position": n, **row} for n, row in enumerate(rows)])


def load_figures(connection: Connection, week_id: str, head: Mapping[Any, Any], table: RateTable) -> Week:
    """The week as uploaded; `head` is its row, `table` the rate table it points to."""
    order_rows: dict[int, list[Order]] = {}
    for row in _rows(connection, orders, week_id):
        order_rows.setdefault(row["customer"], []).append(Order(**values_in(row, Order)))
    found = [
        Customer(
            orders=tuple(order_rows.get(row["position"], ())),
            **values_in(row, Customer, without=("orders",)),
        )
        for row in _rows(connection, customers, week_id)
    ]
    return Week.of(
        tuple(Depot(**values_in(row, Depot)) for row in _rows(connection, depots, week_id)),
        tuple(found),
        _rates(connection, week_id, table, head["rates_added"]),
        rules_in(head),
        _holds(connection, week_id),
        tuple(Gone(**values_in(row, Gone)) for row in _facts(connection, gone, week_id, UPLOADED)),
        tuple(Haulier(**values_in(row, Haulier)) for row in _rows(connection, hauliers, week_id)),
    )


def _hold_rows(week: Week) -> list[Row]:
    return [
        {**key._asdict(), **as_row({"quantity": hold.quantity, "reason": hold.reason}, ["quantity"])}
        for key, hold in week.holds.items()
    ]


def _holds(connection: Connection, week_id: str) -> dict[RateKey, Hold]:
    return {
        RateKey(row["depot"], row["customer"], row["haulier"], row["number"]): Hold(
            **from_row(row, ["quantity", "reason"], ["quantity"])
        )
        for row in _facts(connection, holds, week_id, UPLOADED)
    }


def _rate_rows(of_week: Row, rates: Rates) -> list[Row]:
    """Where the rates differ from their table; rows that were taken out keep what they held."""
    blank: Row = {column.name: None for column in rate_changes.columns}
    rows = []
    for number in sorted({*rates.overlay, *rates.removed}):
        row = rates.overlay.get(number)
        rows.append(
            {
                **blank,
                **of_week,
                "row_id": number,
                "removed": number in rates.removed,
                **({} if row is None else row_of(row)),
            }
        )
    return rows


def _rates(connection: Connection, week_id: str, table: RateTable, added: int) -> Rates:
    overlay: dict[int, RateRow] = {}
    removed = set()
    for row in _rows(connection, rate_changes, week_id):
        if row["removed"]:
            removed.add(row["row_id"])
        if row["depot"] is not None:
            overlay[row["row_id"]] = RateRow(**values_in(row, RateRow))
    return Rates(table, MappingProxyType(overlay), frozenset(removed), added)


def _rows(connection: Connection, table: Table, week_id: str) -> list[Mapping[Any, Any]]:
    """The rows of a week in the order of their key."""
    found = connection.execute(
        select(table).where(table.c.week_id == week_id).order_by(*table.primary_key.columns)
    )
    return list(found.mappings())


def _facts(connection: Connection, table: Table, week_id: str, when_read: str) -> list[Mapping[Any, Any]]:
    return [row for row in _rows(connection, table, week_id) if row["when_read"] == when_read]
