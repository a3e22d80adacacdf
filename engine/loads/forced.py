"""What lower limits force, and whether it can be kept at all."""

from __future__ import annotations

import numpy as np

from engine.exact import Integers
from engine.loads.answer import NoPlan
from engine.loads.cost import loads_on
from engine.loads.problem import NO_LIMIT, LoadProblem


def least_plan(problem: LoadProblem) -> Integers:
    """(rows,) the plan that sends only what lower limits force; it uses the least of everything.

    Raises NoPlan, with the rows that contradict each other, if that is too much already.
    """
    forced = problem.at_least > 0
    quantity = np.where(forced, problem.least, 0)
    beyond = forced & (problem.least > problem.at_most)
    if beyond.any():
        row = int(np.argmax(beyond))
        raise NoPlan(
            "row",
            row,
            (row,),
            f"Row {row} must carry at least {problem.at_least[row]}, so at least its smallest drop of "
            f"{problem.smallest_drop[row]}, but at most {problem.at_most[row]}.",
        )
    _check_sums(problem, "customer", problem.customer, quantity, problem.demand)
    _check_sums(problem, "depot", problem.depot, quantity, problem.supply)
    limit = np.where(problem.most_loads == NO_LIMIT, np.iinfo(np.int64).max, problem.most_loads)
    _check_sums(problem, "depot", problem.depot, loads_on(problem, quantity), limit)
    carried = np.where(problem.haulier_limited, quantity, 0)
    if len(problem.haulier_most):
        _check_sums(problem, "haulier", np.maximum(problem.haulier, 0), carried, problem.haulier_most)
    for j in np.flatnonzero(problem.one_depot).tolist():
        rows = np.arange(problem.start[j], problem.start[j + 1])
        rows = rows[quantity[rows] > 0]
        if len(set(problem.depot[rows].tolist())) > 1:
            raise NoPlan(
                "customer",
                j,
                tuple(rows.tolist()),
                f"Customer {j} takes from one depot, but rows from several depots must carry something.",
            )
    return quantity


def _check_sums(problem: LoadProblem, what: str, index: Integers, amount: Integers, limit: Integers) -> None:
    """Raises NoPlan where the amounts of one customer, depot or haulier are more than its limit."""
    summed = np.zeros(len(limit), dtype=np.int64)
    np.add.at(summed, index, amount)
    over = (summed > limit) & ((limit != NO_LIMIT) | (what != "haulier"))
    if over.any():
        place = int(np.argmax(over))
        rows = tuple(np.flatnonzero((index == place) & (amount > 0)).tolist())
        raise NoPlan(
            what,
            place,
            rows,
            f"The lower limits of rows at {what} {place} come to {summed[place]}, its limit is "
            f"{limit[place]}: lower one of them or raise the limit.",
        )
