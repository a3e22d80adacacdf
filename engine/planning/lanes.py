"""The rate rows of a plan, used or not, with what goes on each: what a dispatcher reads and adjusts."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from engine.exact import to_decimal
from engine.figures import Basis, Hold, RateKey
from engine.load_sizes import load_sizes, loads_of
from engine.planning.model import rates_with_surcharge
from engine.planning.plan import Plan


@dataclass(frozen=True, slots=True)
class Lane:
    """One rate row in a plan.

    `rate` includes the surcharge, per load where `per` says so; `at_most` is None where there is no limit.
    `loads` is how many vehicles of `load_size` the quantity takes, None where nothing says what a load is.
    """

    key: RateKey
    quantity: Decimal
    rate: Decimal
    cost: Decimal
    hold: Hold | None
    at_least: Decimal | None
    at_most: Decimal | None
    closed: bool
    per: Basis = "unit"
    loads: int | None = None
    load_size: Decimal | None = None

    @property
    def per_unit(self) -> Decimal:
        """What a unit costs at least: a rate per load as if the load were full."""
        return self.rate / self.load_size if self.per == "load" and self.load_size else self.rate


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
        rows = rows[plan.quantity[rows] > 0]
    rows = rows[np.argsort(model.rate_row[rows], kind="stable")]
    return tuple(_lanes(plan, rows.tolist()))


def _lanes(plan: Plan, rows: list[int]) -> Iterable[Lane]:
    model, week = plan.model, plan.week
    ids = week.rates.ids_in_order
    sizes = load_sizes(week)
    with_surcharge = rates_with_surcharge(week.rates.flat, week.rules)
    costs = {one.key: one.cost for one in plan.shipments if not one.gone}
    for row in rows:
        number = int(ids[model.rate_row[row]])
        key, figures = week.rates.key_of(number), week.rates.row(number)
        if figures is None:
            continue
        position = int(model.rate_row[row])
        quantity = to_decimal(int(plan.quantity[row]), model.quantity_places)
        size = sizes.get(position)
        yield Lane(
            key,
            quantity,
            with_surcharge.get(position) or Decimal(0),
            costs.get(key, Decimal(0)),
            week.holds.get(key),
            figures.at_least,
            figures.at_most,
            figures.closed,
            figures.per,
            loads_of(quantity, size),
            size,
        )
