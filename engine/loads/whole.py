"""Weeks that are networks after all: every quantity and limit in whole loads of one size."""

from __future__ import annotations

import numpy as np

from engine.exact import Integers, TooLarge
from engine.loads.linear import Lines, solve_lines
from engine.loads.problem import NO_LIMIT, LoadProblem
from engine.network import UNLIMITED, Contradiction


def as_network(problem: LoadProblem) -> Integers | None:
    """(rows,) the best quantities if the week is a pure network, proved by the network; None if it is not.

    Where stocks, orders and limits are multiples of the load size, some best flow is too (Dantzig 1963), and
    a whole load costs no more per unit than a part of one: the best flow at the cost of whole loads is best.
    """
    rows = problem.rows
    stepped = (problem.per_load > 0) | (problem.trip_minimum > 0)
    sizes = np.unique(problem.load_size[stepped])
    single = len(sizes) == 1 and int(sizes[0]) > 0
    if not rows or problem.charge_per_use.any() or problem.opening_charge.any() or problem.one_depot.any():
        return None
    if (problem.most_loads != NO_LIMIT).any() or problem.haulier_limited.any() or (len(sizes) and not single):
        return None
    size = int(sizes[0]) if single else 1
    parts = (problem.supply, problem.must_move, problem.demand, problem.at_least)
    limits = problem.at_most[problem.at_most != UNLIMITED]
    if any((part % size).any() for part in (*parts, limits)) or (problem.smallest_drop > size).any():
        return None
    whole = np.maximum(problem.per_unit * size, problem.trip_minimum) + problem.per_load
    whole = np.where(problem.trip_minimum > 0, whole, problem.per_unit * size + problem.per_load)
    usable = np.flatnonzero(problem.most >= problem.least)
    low = np.where(problem.at_least > 0, problem.least, 0)
    if (low % size).any():
        return None
    try:
        lines = Lines(usable, whole[usable], low[usable] // size, problem.most[usable] // size)
        return solve_lines(_in_loads(problem, size), lines) * size
    except (Contradiction, TooLarge):
        return None


def _in_loads(problem: LoadProblem, size: int) -> LoadProblem:
    """Stocks and orders counted in loads, and what such a load costs short or unsent."""
    return LoadProblem.of(
        supply=problem.supply // size,
        must_move=problem.must_move // size,
        unsent_cost=problem.unsent_cost * size,
        demand=problem.demand // size,
        short_cost=problem.short_cost * size,
        rank=problem.rank,
        may_decline=problem.may_decline,
        start=problem.start,
        depot=problem.depot,
    )
