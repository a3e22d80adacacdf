"""A rate row of the week and the row of its problem: from one to the other."""

import numpy as np

from engine.figures import RateKey
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
