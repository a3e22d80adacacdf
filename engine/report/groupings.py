"""The plan again by depot (to load from), by customer and by haulier (to match invoices with)."""

from collections import defaultdict
from collections.abc import Callable, Iterable, Mapping, Sequence
from decimal import Decimal
from typing import TypeVar

from engine.columns import SEND
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.figures_sheets import letter
from engine.report.lines import (
    NO_HAULIER,
    Line,
    ListColumn,
    Sent,
    delivery_days,
    gone_columns,
    heading_row,
    line_rows,
    order_numbers,
    quantity_format,
    still_to_go,
    styles_of,
    total,
)
from engine.report.load_columns import filled, loads_columns, per_columns
from engine.report.look import height_of, number_format, places_of
from engine.report.plan_sheet import total_values
from engine.report.sheet import Formula, Row, Sheet, Value

Name = TypeVar("Name", str, str | None)


def loading_columns(plan: Sent) -> list[ListColumn]:
    """What a depot needs to load: no rates, no costs."""
    unit = plan.week.rules.unit
    columns = [
        ListColumn("Customer", 30, lambda line: line.shipment.customer),
        ListColumn("Haulier", 22, lambda line: line.shipment.haulier),
        ListColumn(SEND.heading, 12, lambda line: line.shipment.quantity, quantity_format(plan)),
        ListColumn("Unit", 8, lambda _: unit),
        ListColumn("Days", 14, lambda line: line.days or None, wrap=True),
        ListColumn("Order numbers", 30, lambda line: line.orders or None, wrap=True),
        ListColumn("Part of order", 10, lambda line: "yes" if line.part else None),
    ]
    if any(shipment.loads is not None for shipment in plan.shipments):
        columns.insert(4, ListColumn("Loads", 8, lambda line: line.shipment.loads, "0"))
        columns.insert(5, ListColumn("Filled", 18, filled))
    return columns


def by_depot_sheet(plan: Plan, lines: Sequence[Line], header: str) -> Sheet:
    """Sheet *By depot*: each depot's loading list on a page of its own, without money."""
    columns = [ListColumn("Depot", 20, lambda line: line.shipment.depot), *loading_columns(plan)]
    at = _grouped(still_to_go(lines), plan.week.depots, lambda line: line.shipment.depot)
    rows, breaks = _in_groups(columns, at, "{}: to load")
    return _list("By depot", columns, rows, header, breaks=breaks)


def by_haulier_sheet(plan: Plan, lines: Sequence[Line], header: str) -> Sheet:
    """Sheet *By haulier*: what each haulier carries; its total is what the invoices should say."""
    unit = plan.week.rules.unit
    payable = number_format(minor_places(plan.week.rules.currency))
    columns = [
        ListColumn("Haulier", 20, lambda line: line.haulier),
        ListColumn("Depot", 20, lambda line: line.shipment.depot),
        ListColumn("Customer", 26, lambda line: line.shipment.customer),
        ListColumn(SEND.heading, 12, lambda line: line.shipment.quantity, quantity_format(plan)),
        ListColumn("Unit", 7, lambda _: unit),
        ListColumn(
            "Rate",
            12,
            lambda line: line.shipment.rate,
            number_format(places_of(shipment.rate for shipment in plan.shipments), always=2),
        ),
        *per_columns(plan),
        ListColumn("Payable", 15, lambda line: line.shipment.payable, payable),
        ListColumn("Order numbers", 28, lambda line: line.orders or None, wrap=True),
        ListColumn("Days", 12, lambda line: line.days or None, wrap=True),
        *gone_columns(plan),
    ]
    if any(shipment.loads is not None for shipment in plan.shipments):
        columns.insert(5, ListColumn("Loads", 8, lambda line: line.shipment.loads, "0"))
    at = _grouped(lines, hauliers_of(plan), lambda line: line.shipment.haulier)
    rows, _ = _in_groups(columns, at, "{}: invoices should say")
    if lines:
        rows.append(Row([]))
        overall = total_values(columns, lines, 2, len(rows) - 1)
        rows.append(Row(["All hauliers", *overall], styles_of(columns)["total"]))
    return _list("By haulier", columns, rows, header)


def by_customer_sheet(plan: Plan, lines: Sequence[Line], header: str) -> Sheet:
    """Sheet *By customer*: what each customer gets, from where, and what it goes short of."""
    week, unit = plan.week, plan.week.rules.unit
    quantity = quantity_format(plan)
    payable = number_format(minor_places(week.rules.currency))
    columns = [
        ListColumn("Customer", 26, lambda line: line.shipment.customer),
        ListColumn("Depot", 20, lambda line: line.shipment.depot),
        ListColumn("Haulier", 18, lambda line: line.shipment.haulier),
        ListColumn(SEND.heading, 12, lambda line: line.shipment.quantity, quantity),
        ListColumn("Unit", 7, lambda _: unit),
        ListColumn("Payable", 15, lambda line: line.shipment.payable, payable),
        ListColumn("Whole order", 12, lambda _: None, quantity),
        ListColumn("Goes short of", 12, lambda _: None, quantity),
        ListColumn("Days", 12, lambda line: line.days or None, wrap=True),
        ListColumn("Order numbers", 28, lambda line: line.orders or None, wrap=True),
        *(loads_columns() if any(one.loads is not None for one in plan.shipments) else []),
        *gone_columns(plan),
    ]
    styles = styles_of(columns)
    at = _grouped(lines, week.customers, lambda line: line.shipment.customer)
    missing = {short.customer: short.quantity for short in plan.short}
    rows = [heading_row(columns)]
    for name, customer in week.customers.items():
        short = missing.get(name)
        kind = "short" if short else "plain"
        for place, line in enumerate(at.get(name, ())):
            values = [one.value(line) for one in columns]
            if place == 0:
                values[6], values[7] = customer.ordered, short
            rows.append(
                Row(values, styles[kind], height_of(values, [c.width for c in columns], styles[kind]))
            )
        if name not in at:
            rest = [customer.ordered, short, delivery_days(customer) or None, order_numbers(customer) or None]
            rows.append(Row([name, None, None, Decimal(0), unit, None, *rest], styles[kind]))
    rows.extend(  # gone to somebody who is not in the week
        Row([one.value(line) for one in columns], styles["short"])
        for line in lines
        if line.shipment.customer not in week.customers
    )
    last = len(rows)
    rows.append(Row([]))
    sums: list[Value] = ["Total", None, None]
    for column, amounts in (
        ("D", [line.shipment.quantity for line in lines]),
        ("E", None),
        ("F", [line.shipment.payable for line in lines]),
        ("G", [customer.ordered for customer in week.customers.values()]),
        ("H", list(missing.values())),
    ):
        sums.append(
            None if amounts is None else Formula(f"SUBTOTAL(109,{column}2:{column}{last})", total(amounts))
        )
    rows.append(Row([*sums, *[None] * (len(columns) - len(sums))], styles["total"]))
    return _list("By customer", columns, rows, header, filtered=f"A1:{letter(len(columns) - 1)}{last}")


def hauliers_of(plan: Plan) -> tuple[str | None, ...]:
    """Every haulier that carries something, by name; shipments that name none come last."""
    named = sorted({s.haulier for s in plan.shipments if s.haulier}, key=lambda name: (name.casefold(), name))
    return (*named, None) if any(not s.haulier for s in plan.shipments) else tuple(named)


def _grouped(
    lines: Sequence[Line], names: Iterable[Name], of: Callable[[Line], Name]
) -> dict[Name, list[Line]]:
    """The lines of each name, names in the order given and only those that have lines."""
    found: dict[Name, list[Line]] = defaultdict(list)
    for line in lines:
        found[of(line)].append(line)
    return {name: found[name] for name in names if name in found}


def _in_groups(
    columns: Sequence[ListColumn], at: Mapping[Name, list[Line]], words: str
) -> tuple[list[Row], list[int]]:
    """Headings, then each group's lines and its total; and the rows after which a group ends."""
    styles = styles_of(columns)
    rows: list[Row] = [heading_row(columns)]
    breaks = []
    for name, lines in at.items():
        first = len(rows) + 1
        rows.extend(line_rows(columns, lines))
        of_group: list[Value] = total_values(columns, lines, first, len(rows))
        rows.append(Row([words.format(name or NO_HAULIER), *of_group], styles["total"]))
        breaks.append(len(rows))
    return rows, breaks[:-1]


def _list(
    name: str,
    columns: Sequence[ListColumn],
    rows: Sequence[Row],
    header: str,
    breaks: Sequence[int] = (),
    filtered: str | None = None,
) -> Sheet:
    return Sheet(
        name,
        [column.width for column in columns],
        rows,
        length=len(rows),
        frozen="B2",
        filtered=filtered,
        repeated="1:1",
        breaks=breaks,
        header=header,
    )
