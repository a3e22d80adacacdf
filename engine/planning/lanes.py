"""The rate rows of a plan, used or not, with what goes on each: what a dispatcher reads and adjusts."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from engine.exact import to_decimal
from engine.figures import Hold, RateKey
from engine.planning.plan import Plan


@dataclass(frozen=True, slots=True)
class Lane:
    """One rate row in a plan. `rate` includes the surcharge; `at_most` is None where there is no limit."""

    key: RateKey
    quantity: Decimal
    rate: Decimal
    cost: Decimal
    hold: Hold | None
    at_least: Decimal | None
    at_most: Decimal | None
    closed: bool


def lanes(
    plan: Plan, depot: str | None = None, customer: str | None = None, unused: bool = False
) -> tuple[Lane, ...]:
    """The used rate rows of a depot, a customer or all, in sheet order; with `unused`, the others as well."""
    model = plan.model
    rows = np.flatnonzero(model.rate_row >= 0)
    if depot is not None:
        rows = rows[model.problem.depot[rows] == model.depots.index(depot)]
    if customer is not None:
        rows = rows[model.problem.customer[rows] == model.customers.index(customer)]
    if not unused:
        rows = rows[plan.flow.quantity[rows] > 0]
    rows = rows[np.argsort(model.rate_row[rows], kind="stable")]
    return tuple(_lanes(plan, rows.tolist()))


def _lanes(plan: Plan, rows: list[int]) -> Iterable[Lane]:
    model, week = plan.model, plan.week
    ids = week.rates.ids_in_order
    for row in rows:
        number = int(ids[model.rate_row[row]])
        key, figures = week.rates.key_of(number), week.rates.row(number)
        if figures is None:
            continue
        quantity, rate = int(plan.flow.quantity[row]), int(model.money[row])
        yield Lane(
            key,
            to_decimal(quantity, model.quantity_places),
            to_decimal(rate, model.money_places),
            to_decimal(quantity * rate, model.quantity_places + model.money_places),
            week.holds.get(key),
            figures.at_least,
            figures.at_most,
            figures.closed,
        )
