"""Where everything stands on sheet *Proof*, and where the figures it points at stand on their own sheets."""

from collections.abc import Iterable, Sequence
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.columns import (
    CUSTOMER_COLUMNS,
    DEPOT_COLUMNS,
    GONE_COLUMNS,
    HAULIER_COLUMNS,
    RULE_COLUMNS,
    Column,
)
from engine.exact import Integers
from engine.money import minor_places
from engine.planning.plan import Plan
from engine.report.figures_sheets import RATE_HEADINGS, all_fit, letter, rates_place
from engine.report.lines import Line
from engine.report.look import places_of
from engine.report.proof_figures import ProofFigures

MOST_ROWS_LISTED = 100_000
"""Above this many rate rows only the used ones are listed: a spreadsheet would take minutes to calculate."""


class Layout(NamedTuple):
    """Sheet rows (from 1) of each table's first and last line, and how to point elsewhere.

    listed:  rows of the problem that are listed, customer by customer
    depots, customers, gone, rates: first and last sheet row; an empty table has last < first
    linked:  whether formulas point at the other sheets; else figures are copies
    plan:    letters of the columns of *Plan*, by heading; its lines stand in rows 2 to `plan_last`
    places:  decimal places of quantities, money per unit, cost and payable amounts, as far as a
             spreadsheet number keeps them
    """

    listed: Integers
    every_row: bool
    depots: tuple[int, int]
    customers: tuple[int, int]
    gone: tuple[int, int]
    rates: tuple[int, int]
    linked: bool
    plan: dict[str, str]
    plan_last: int
    places: "Places"

    def range(self, column: str, table: tuple[int, int]) -> str:
        """A column of one of the tables, as an absolute range."""
        return f"${column}${table[0]}:${column}${max(table)}"

    def on_plan(self, heading: str) -> str:
        """A column of *Plan*, as an absolute range."""
        column = self.plan[heading]
        return f"Plan!${column}$2:${column}${self.plan_last}"


class Places(NamedTuple):
    quantity: int
    money: int
    cost: int
    total: int
    payable: int


def layout_of(
    plan: Plan, figures: ProofFigures, lines: Sequence[Line], plan_letters: dict[str, str], first: int
) -> Layout:
    """The layout, its first table beginning at sheet row `first` (name, headings, lines, stand-in, gap)."""
    model = plan.model
    every_row = len(figures.rows) <= MOST_ROWS_LISTED
    listed = figures.rows if every_row else figures.rows[plan.flow.quantity[figures.rows] > 0]
    depots = (first + 2, first + 1 + len(model.depots))
    customers = (depots[1] + 5, depots[1] + 4 + len(model.customers))
    many = len(plan.week.gone)
    gone = (customers[1] + 5, customers[1] + 4 + many)
    above = gone[1] + 1 if many else customers[1] + 2
    rates = (above + 3, above + 2 + len(listed))
    return Layout(
        listed,
        every_row,
        depots,
        customers,
        gone,
        rates,
        all_fit(plan.week),
        plan_letters,
        1 + len(lines),
        places_of_plan(plan),
    )


def places_of_plan(plan: Plan) -> Places:
    """Decimal places of a plan's figures, as far as a spreadsheet number keeps them."""
    model = plan.model
    rates = int(np.abs(model.money).max(initial=0)) // 10**model.money_places
    cost = max((abs(shipment.cost) for shipment in plan.shipments), default=Decimal(0))
    quantity = max((shipment.quantity for shipment in plan.shipments), default=Decimal(0))
    places = max(model.quantity_places + model.money_places, places_of(s.cost for s in plan.shipments))
    minor = minor_places(plan.week.rules.currency)
    total = max(abs(plan.freight_cost), abs(plan.total_cost))
    return Places(
        _kept(model.quantity_places, quantity),
        _kept(model.money_places, Decimal(rates)),
        max(_kept(places, cost), minor),
        _kept(places, total),
        minor,
    )


def _kept(places: int, largest: Decimal) -> int:
    """Places that survive in a spreadsheet number of this size, with a digit to spare for sums."""
    digits = max(1, largest.adjusted() + 1) if largest else 1
    return max(0, min(places, 14 - digits))


def on_depots(field: str, place: int) -> str:
    """The cell of *Depots* that holds a field of the depot at a position."""
    return f"Depots!${_letter_of(DEPOT_COLUMNS, field)}${place + 2}"


def on_customers(field: str, row: int) -> str:
    """The cell of *Customers* that holds a field, in an order row counted from 0."""
    return f"Customers!${_letter_of(CUSTOMER_COLUMNS, field)}${row + 2}"


def on_rates(heading: str, position: int) -> str:
    """The cell of *Rates* under a heading, for the rate row at a position."""
    sheet, row = rates_place(position)
    return f"{sheet}!${letter(RATE_HEADINGS.index(heading))}${row}"


def on_gone(field: str, place: int) -> str:
    """The cell of *Gone* that holds a field of what has gone, at a position."""
    return f"Gone!${_letter_of(GONE_COLUMNS, field)}${place + 2}"


def on_hauliers(field: str, place: int) -> str:
    """The cell of *Hauliers* that holds a field of the haulier at a position."""
    return f"Hauliers!${_letter_of(HAULIER_COLUMNS, field)}${place + 2}"


def on_rules(field: str) -> str:
    """The cell of *Rules* that holds a rule."""
    return f"Rules!$B${2 + [column.field for column in RULE_COLUMNS].index(field)}"


def _letter_of(columns: Iterable[Column], field: str) -> str:
    return letter([column.field for column in columns].index(field))
