"""What an earlier flow says about a changed problem: prices to start from, and quantities on its rows."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.flow import Flow
from engine.network.problem import Problem

LARGEST_START = 2**58
"""Prices beyond this are not started from, so that the search keeps room to move them."""


FEW_ORDERS, PER_DEPOT = 100, 20
"""So many changed orders at most, with so many customers a depot at least, are evened out along chains of
exchanges; else the simplex makes less work of them (measured on 20 to 1,000 depots and 1 to 100 orders)."""


class Guess(NamedTuple):
    """Where to start.

    price:    (depots,) new array
    quantity: (rows,) the earlier quantities as they stand on the rows now, or None
    """

    price: Integers
    quantity: Integers | None


def guess_from(problem: Problem, start: Flow | None) -> Guess:
    """Prices and quantities of `start`, as far as depots and customers still correspond.

    Depots correspond if their number is the same, and so do customers. Rows correspond if they lead from
    the same depot to the same customer and the rows before them correspond too; others start at 0.
    """
    price = np.zeros(problem.depots, dtype=np.int64)
    if start is None or len(start.depot_price) != problem.depots:
        return Guess(price, None)
    reach = max(int(start.depot_price.max(initial=0)), -int(start.depot_price.min(initial=0)))
    if reach > LARGEST_START:
        return Guess(price, None)
    price += start.depot_price
    before = start.problem
    if before.customers != problem.customers:
        return Guess(price, None)
    if _same(before.start, problem.start) and _same(before.depot, problem.depot):
        return Guess(price, start.quantity)
    quantity = np.zeros(problem.rows, dtype=np.int64)
    carry_over(before.start, before.depot, start.quantity, problem.start, problem.depot, quantity)
    return Guess(price, quantity)


def few_orders_differ(problem: Problem, before: Problem) -> bool:
    """Whether nothing but some orders and some depots' quantities is another than before.

    Rows and limits must be the very same arrays: comparing them would take as long as it saves.
    """
    fields = ("start", "depot", "cost", "at_least", "at_most")
    if any(getattr(problem, name) is not getattr(before, name) for name in fields):
        return False
    if problem.customers < PER_DEPOT * problem.depots:
        return False
    return int(np.count_nonzero(problem.demand != before.demand)) <= FEW_ORDERS


def _same(one: Integers, other: Integers) -> bool:
    return one is other or np.array_equal(one, other)


@kernel
def carry_over(
    old_start: Integers, old_depot: Integers, old: Integers, start: Integers, depot: Integers, new: Integers
) -> None:
    """Fills `new` with the quantities of the corresponding rows, in order."""
    for j in range(len(start) - 1):
        # rows mostly stand in the same order, so each search begins behind the last find
        place = old_start[j]
        for row in range(start[j], start[j + 1]):
            there = place
            while there < old_start[j + 1] and old_depot[there] != depot[row]:
                there += 1
            if there < old_start[j + 1]:
                new[row] = old[there]
                place = there + 1
