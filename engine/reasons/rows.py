"""A rate row of the week and the row of its problem: from one to the other."""

from decimal import Decimal

import numpy as np

from engine.figures import RateKey
from engine.planning.gone import left, superseded
from engine.planning.plan import Plan
from engine.week import describe


def row_of(plan: Plan, key: RateKey) -> int:
    """The row of the problem that a rate row of the week is.

    Raises:
        ValueError: the week has no such row, or its depot or customer is not in the week.
    """
    number = plan.week.rates.find(key)
    if number is not None:
        position = int(np.searchsorted(plan.week.rates.ids_in_order, number))
        rows = np.flatnonzero(plan.model.rate_row == position)
        if len(rows):
            return int(rows[0])
    raise ValueError(f"There is no rate row for {describe(key)} in the plan.")


def key_at(plan: Plan, row: int) -> RateKey:
    """What names the rate row that a row of the problem is."""
    rates = plan.week.rates
    return rates.key_of(int(rates.ids_in_order[plan.model.rate_row[row]]))


def gone_on(plan: Plan, key: RateKey) -> Decimal:
    """What has gone on a rate row; it counts as part of what is held there.

    Of several rows of a lane and haulier it counts on the first that is still valid.
    """
    week = plan.week
    gone = left(week).row.get((key.depot, key.customer, key.haulier))
    if not gone:
        return Decimal(0)
    replaced = superseded(week.rates.flat)
    in_order = week.rates.ids_in_order
    for number in week.rates.ids(key.depot, key.customer, key.haulier):
        position = int(np.searchsorted(in_order, number))
        if position < len(in_order) and in_order[position] == number and not replaced[position]:
            return gone if week.rates.find(key) == number else Decimal(0)
    return Decimal(0)
