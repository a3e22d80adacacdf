"""Sheet *Plan*: every shipment, with what it costs."""

from collections.abc import Iterator, Sequence
from decimal import Decimal

from engine.columns import SEND
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.lines import (
    Line,
    ListColumn,
    gone_columns,
    heading_row,
    line_rows,
    quantity_format,
    styles_of,
    total,
)
from engine.report.load_columns import loads_columns, per_columns
from engine.report.look import DEEP, number_format, places_of
from engine.report.sheet import Formula, Row, Sheet, Value


def plan_columns(plan: Plan) -> list[ListColumn]:
    """What *Plan* shows of each shipment; a CSV file of the plan has the same columns."""
    unit = plan.week.rules.unit
    payable = number_format(minor_places(plan.week.rules.currency))
    rate = number_format(places_of(shipment.rate for shipment in plan.shipments), always=2)
    cost = number_format(places_of(shipment.cost for shipment in plan.shipments), always=2)
    columns = [
        ListColumn("Depot", 20, lambda line: line.shipment.depot),
        ListColumn("Customer", 24, lambda line: line.shipment.customer),
        ListColumn("Haulier", 18, lambda line: line.shipment.haulier),
        ListColumn(SEND.heading, 12, lambda line: line.shipment.quantity, quantity_format(plan)),
        ListColumn("Unit", 7, lambda _: unit),
        ListColumn("Rate", 12, lambda line: line.shipment.rate, rate),
        ListColumn("Cost", 15, lambda line: line.shipment.cost, cost),
        ListColumn("Payable", 15, lambda line: line.shipment.payable, payable),
        ListColumn("Held", 7, lambda line: "yes" if line.shipment.held else None),
        ListColumn("Hold reason", 28, lambda line: line.reason or None, wrap=True),
        ListColumn("Order numbers", 28, lambda line: line.orders or None, wrap=True),
        ListColumn("Days", 12, lambda line: line.days or None, wrap=True),
        ListColumn("Rate row", 9, lambda line: line.rate_row, "0"),
        *gone_columns(plan),
    ]
    if any(shipment.loads is not None for shipment in plan.shipments):
        columns[5:5] = loads_columns()
        after = 1 + [column.heading for column in columns].index("Rate")
        columns[after:after] = per_columns(plan)
    return columns


SUMMED = (SEND.heading, "Loads", "Cost", "Payable")


def plan_letters(columns: Sequence[ListColumn]) -> dict[str, str]:
    """The letter of each column, by its heading."""
    return {column.heading: _letter(place) for place, column in enumerate(columns)}


def plan_sheet(plan: Plan, lines: Sequence[Line], header: str) -> Sheet:
    """Sheet *Plan*: headings in row 1, a row a shipment, and a total that follows the filter."""
    columns = plan_columns(plan)
    last = 1 + len(lines)
    return Sheet(
        "Plan",
        [column.width for column in columns],
        _rows(columns, lines),
        length=last + (2 if lines else 1),
        frozen="C2",
        filtered=f"A1:{_letter(len(columns) - 1)}{last}",
        repeated="1:1",
        header=header,
        tab=DEEP,
    )


def _rows(columns: Sequence[ListColumn], lines: Sequence[Line]) -> Iterator[Row]:
    styles, last = styles_of(columns), 1 + len(lines)
    yield heading_row(columns)
    yield from line_rows(columns, lines)
    if not lines:
        yield Row(["Nothing can be sent: see Notes."], styles["plain"])
        return
    yield Row([])
    yield Row(["Total", *total_values(columns, lines, 2, last)], styles["total"])


def total_values(columns: Sequence[ListColumn], lines: Sequence[Line], first: int, last: int) -> list[Value]:
    """The total row of a list but for its first cell: sums of what the filter shows.

    first, last: the sheet rows to be summed; totals among them are passed over (SUBTOTAL does so).
    """
    values: list[Value] = []
    for place, column in enumerate(columns[1:], 1):
        if column.heading not in SUMMED:
            values.append(None)
            continue
        letter = _letter(place)
        amounts = [Decimal(v) for line in lines if isinstance(v := column.value(line), Decimal | int)]
        values.append(Formula(f"SUBTOTAL(109,{letter}{first}:{letter}{last})", total(amounts)))
    return values


def _letter(place: int) -> str:
    return chr(ord("A") + place)
