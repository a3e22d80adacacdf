"""The shipments of a plan with what a reader needs beside them: orders, days, holds, rate row."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from decimal import Decimal
from typing import Protocol

import numpy as np

from engine.exact import total_of
from engine.figures import Customer
from engine.planning.plan import Shipment
from engine.report.look import Style, height_of, number_format, places_of
from engine.report.sheet import Row, Value
from engine.week import Week

NO_HAULIER = "(no haulier named)"


class Sent(Protocol):
    """A plan, or what was issued of one: the week and what is sent in it."""

    @property
    def week(self) -> Week: ...

    @property
    def shipments(self) -> tuple[Shipment, ...]: ...


@dataclass(frozen=True, slots=True)
class Line:
    """A shipment to be listed.

    `rate_row` counts the week's rate rows from 1, in sheet order, None for what has gone; `part` says that
    the customer gets the rest of its order from elsewhere, or not at all.
    """

    shipment: Shipment
    rate_row: int | None
    orders: str
    days: str
    part: bool
    reason: str

    @property
    def haulier(self) -> str:
        return self.shipment.haulier or NO_HAULIER


def lines_of(plan: Sent) -> tuple[Line, ...]:
    """A line for every shipment, depot by depot in sheet order, then customer by customer."""
    week = plan.week
    depots = {name: place for place, name in enumerate(week.depots)}
    customers = {name: place for place, name in enumerate(week.customers)}
    told = {
        name: (order_numbers(customer), delivery_days(customer)) for name, customer in week.customers.items()
    }
    lines = []
    for shipment in plan.shipments:
        hold = week.holds.get(shipment.key) if not shipment.gone else None
        orders, days = told.get(shipment.customer, ("", ""))
        if shipment.gone:
            day = week.gone[shipment.gone].day
            days = day.isoformat() if day else ""
        lines.append(
            Line(
                shipment,
                None if shipment.gone else _rate_row(plan, shipment),
                orders,
                days,
                part=shipment.customer in week.customers
                and shipment.quantity < week.customers[shipment.customer].ordered,
                reason=hold.reason if hold else "",
            )
        )
    nowhere = len(depots), len(customers)
    return tuple(
        sorted(
            lines,
            key=lambda line: (
                depots.get(line.shipment.depot, nowhere[0]),
                customers.get(line.shipment.customer, nowhere[1]),
                line.rate_row or 0,
            ),
        )
    )


def still_to_go(lines: Iterable[Line]) -> list[Line]:
    """The lines without those that have gone."""
    return [line for line in lines if not line.shipment.gone]


def gone_columns(plan: Sent) -> list["ListColumn"]:
    """A column that names what has gone, where anything has."""
    if not plan.week.gone:
        return []
    return [ListColumn("Gone, load", 16, lambda line: line.shipment.gone or None)]


def _rate_row(plan: Sent, shipment: Shipment) -> int:
    number = plan.week.rates.find(shipment.key)
    if number is None:
        raise ValueError(f"The plan ships on {shipment.key}, which is no rate row of its week.")
    return 1 + int(np.searchsorted(plan.week.rates.ids_in_order, number))


def order_numbers(customer: Customer) -> str:
    """The customer's order numbers, as one cell."""
    return ", ".join(dict.fromkeys(order.number for order in customer.orders if order.number))


def delivery_days(customer: Customer) -> str:
    """The customer's delivery days, as one cell."""
    return ", ".join(dict.fromkeys(order.day for order in customer.orders if order.day))


@dataclass(frozen=True, slots=True)
class ListColumn:
    """A column of a list of lines: its heading, its width, what it shows of a line, and how."""

    heading: str
    width: float
    value: Callable[[Line], Value]
    number: str | None = None
    wrap: bool = False

    def style(self, kind: str) -> Style:
        if self.number is None:
            return Style(kind, wrap=self.wrap)
        return Style(kind, self.number, "right")

    @property
    def heading_style(self) -> Style:
        return Style("heading", align="left" if self.number is None else "right", wrap=True)


def quantity_format(plan: Sent) -> str:
    """How quantities of this plan are shown: with as many places as any of them needs."""
    week = plan.week
    return number_format(
        max(
            places_of(shipment.quantity for shipment in plan.shipments),
            places_of(depot.available for depot in week.depots.values()),
            places_of(customer.ordered for customer in week.customers.values()),
        )
    )


def total(values: Iterable[Decimal]) -> Decimal:
    """Their exact sum."""
    return total_of(values)


def heading_row(columns: Sequence[ListColumn]) -> Row:
    """The headings of a list."""
    return Row(
        [column.heading for column in columns], [column.heading_style for column in columns], height=30
    )


def line_rows(columns: Sequence[ListColumn], lines: Iterable[Line]) -> Iterator[Row]:
    """A row a line; what is held is marked."""
    styles, widths = styles_of(columns), [column.width for column in columns]
    for line in lines:
        values = [column.value(line) for column in columns]
        kind = styles["held" if line.shipment.held else "plain"]
        yield Row(values, kind, height_of(values, widths, kind))


def styles_of(columns: Sequence[ListColumn]) -> dict[str, list[Style]]:
    """The styles of a list's rows, by the kind of row."""
    return {kind: [column.style(kind) for column in columns] for kind in ("plain", "held", "total", "short")}
