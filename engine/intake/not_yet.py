"""What a week may hold and no plan can price yet: each stops, since a wrong price is worse than none."""

from collections.abc import Callable, Iterator

import numpy as np

from engine.exact import BLANK
from engine.figures import ANY_SINGLE_DEPOT, Customer
from engine.findings import Finding, Severity
from engine.intake.places import Where, nowhere
from engine.rates import Flags, RateTable
from engine.week import Week

_ROWS: tuple[tuple[str, str, Callable[[RateTable], Flags]], ...] = (
    ("per", "Whole loads cannot be planned yet", lambda table: table.per_load),
    ("trip_minimum", "A trip minimum cannot be planned yet", lambda table: _given(table, "trip_minimum")),
    (
        "charge_per_use",
        "A charge per use cannot be planned yet",
        lambda table: _given(table, "charge_per_use"),
    ),
)
_CUSTOMERS: tuple[tuple[str, str, Callable[[Customer], bool]], ...] = (
    ("smallest_drop", "A smallest drop cannot be planned yet", lambda customer: bool(customer.smallest_drop)),
    (
        "one_depot",
        "Any single depot for a customer cannot be planned yet",
        lambda customer: customer.one_depot == ANY_SINGLE_DEPOT,
    ),
)


def not_planned_yet(week: Week, where: Where = nowhere) -> Iterator[Finding]:
    """A finding that stops for each kind of figure that cannot be planned, at its first row."""
    table = week.rates.flat
    for name, sentence, marked in _ROWS:
        positions = np.flatnonzero(marked(table))
        if len(positions):
            row = int(positions[0])
            depot, customer, _ = table.named(row)
            yield _finding(sentence, f"{depot} to {customer}", len(positions), where("rates", row, name))
    for name, sentence, asked in _CUSTOMERS:
        customers = [customer.name for customer in week.customers.values() if asked(customer)]
        if customers:
            yield _finding(sentence, customers[0], len(customers), where("customers", customers[0], name))


def _given(table: RateTable, name: str) -> Flags:
    column = table.decimals.get(name)
    if column is None:
        return np.zeros(len(table), dtype=bool)
    given: Flags = (column.values != BLANK) & (column.values != 0)
    return given


def _finding(sentence: str, example: str, count: int, place: tuple[str, str, str]) -> Finding:
    many = f" and {count - 1} more" if count > 1 else ""
    file, sheet, cell = place
    return Finding(
        Severity.STOPS,
        "not planned yet",
        f"{sentence} ({example}{many}).",
        "Take the figure out, or give the rate per unit.",
        file,
        sheet,
        cell,
    )
