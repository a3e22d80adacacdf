"""Straight lines in place of steps: a network that engine.network solves exactly, the aims in order.

With the steps replaced by what no part of them costs less than, it bounds the aims from below; with the
loads of a plan fixed, it finds the best quantities behind them.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers, TooLarge
from engine.loads.cost import ranks_of
from engine.loads.problem import NO_LIMIT, LoadProblem
from engine.network import Problem, least_cost

LARGEST_WEIGHT = 2**57
"""Divided by the depots, the largest cost that the network takes."""


class Lines(NamedTuple):
    """Straight pieces of rows; several may belong to one row, in the order of rows.

    row:  (lines,) which rate row
    unit: (lines,) cost of a unit
    low, high: (lines,) limits
    """

    row: Integers
    unit: Integers
    low: Integers
    high: Integers


def solve_lines(problem: LoadProblem, lines: Lines, sent_most: Integers | None = None) -> Integers:
    """(rows,) quantities that serve the aims in order at least cost, if costs were these lines.

    sent_most: (depots,) most that may leave each depot, if that is less than its supply
    Raises engine.network.Contradiction if limits cannot be kept; TooLarge if weights do not fit.
    """
    short, must = _weighted(problem, lines)
    depots, customers = problem.depots, problem.customers
    at = problem.customer[lines.row]
    needs = np.flatnonzero(problem.must_move > 0)
    stays = problem.supply - problem.must_move
    must_stay = np.zeros(depots, dtype=np.int64) if sent_most is None else problem.supply - sent_most
    stay_least = np.minimum(np.maximum(must_stay, 0), stays)
    must_least = np.maximum(must_stay - stays, 0)

    count = len(lines.row) + customers + depots + len(needs) + 1
    start = np.zeros(customers + 2, dtype=np.int64)
    np.cumsum(np.bincount(at, minlength=customers) + 1, out=start[1:-1])
    start[-1] = count
    line_at = np.arange(len(lines.row), dtype=np.int64) + at
    short_at = start[1:-1] - 1
    stay_at = start[-2] + np.arange(depots)
    must_at = start[-2] + depots + np.arange(len(needs))

    depot = np.full(count, depots, dtype=np.int64)
    cost = np.zeros(count, dtype=np.int64)
    low, high = np.zeros(count, dtype=np.int64), np.zeros(count, dtype=np.int64)
    depot[line_at], cost[line_at] = problem.depot[lines.row], lines.unit
    low[line_at], high[line_at] = lines.low, lines.high
    cost[short_at], high[short_at] = short, problem.demand
    depot[stay_at], cost[stay_at] = np.arange(depots), problem.unsent_cost
    low[stay_at], high[stay_at] = stay_least, stays
    depot[must_at], cost[must_at] = needs, problem.unsent_cost[needs] + must
    low[must_at], high[must_at] = must_least[needs], problem.must_move[needs]
    everything = int(problem.supply.sum() + problem.demand.sum())
    high[-1] = everything
    flow = least_cost(
        Problem(
            supply=np.append(problem.supply, int(problem.demand.sum())),
            demand=np.append(problem.demand, int(problem.supply.sum())),
            start=start,
            depot=depot,
            cost=cost,
            at_least=low,
            at_most=high,
        )
    )
    quantity = np.zeros(problem.rows, dtype=np.int64)
    np.add.at(quantity, lines.row, flow.quantity[line_at])
    return quantity


def _weighted(problem: LoadProblem, lines: Lines) -> tuple[Integers, int]:
    """Cost of a unit short at each customer, and of a unit that must move and stays, aims above money.

    A cycle of exchanges crosses each stand-in once, so a weight above twice what the rest of a cycle can sum
    to keeps the aims strictly in order.
    """
    money = max(
        (int(np.abs(part).max(initial=0)) for part in (lines.unit, problem.short_cost, problem.unsent_cost)),
        default=0,
    )
    reach = 2 * (problem.depots + 2) * money
    must = 0
    if problem.must_move.any():
        must = 1 + 2 * reach
        reach += must
    short = problem.short_cost.copy()
    for rank in reversed(ranks_of(problem)):
        weight = 1 + 2 * reach
        reach += weight
        if 4 * reach > LARGEST_WEIGHT // (problem.depots + 2):
            raise TooLarge("Rates and charges are too large to keep the aims in order exactly.")
        short[~problem.may_decline & (problem.rank == rank)] += weight
    return short, must


def loads_cap(problem: LoadProblem) -> Integers:
    """(depots,) most that can leave each depot by its supply and its loads."""
    largest = np.zeros(problem.depots, dtype=np.int64)
    size = np.where(problem.load_size > 0, np.minimum(problem.load_size, problem.most), problem.most)
    np.maximum.at(largest, problem.depot, size)
    limited = problem.most_loads != NO_LIMIT
    cap = problem.supply.copy()
    # a product that could wrap is far beyond the supply
    many = np.minimum(problem.most_loads, problem.supply // np.maximum(largest, 1) + 1)
    cap[limited] = np.minimum(cap, many * largest)[limited]
    return cap


def relaxed_lines(problem: LoadProblem, unit: Integers) -> Lines:
    """One line per row that can carry something, at these costs of a unit."""
    open_rows = np.flatnonzero(problem.most >= problem.least)
    low = np.where(problem.at_least > 0, problem.least, 0)
    return Lines(open_rows, unit[open_rows], low[open_rows], problem.most[open_rows])


def lines_behind(problem: LoadProblem, loads: Integers, quantity: Integers) -> Lines | None:
    """Lines on which the cost is exact while no row needs more than its `loads`; None if there are none.

    quantity: a plan with these loads; hauliers that are limited carry no more on any row than there
    """
    used = np.flatnonzero(loads > 0)
    size, rate, trip = problem.load_size[used], problem.per_unit[used], problem.trip_minimum[used]
    least = problem.least[used]
    low = np.where((least > 1) | (problem.at_least[used] > 0), least, 0)
    high = np.where(size > 0, np.minimum(problem.most[used], loads[used] * size), problem.most[used])
    high = np.where(problem.haulier_limited[used], np.minimum(high, quantity[used]), high)
    # with a trip minimum the cost is a line only within the last load
    before = (loads[used] - 1) * size
    low = np.where(trip > 0, np.maximum(low, before), low)
    if (low > high).any():
        return None
    kink = np.where((trip > 0) & (rate > 0), trip // np.maximum(rate, 1), np.where(trip > 0, high, 0))
    free = np.minimum(np.where(trip > 0, before + kink, 0), high)
    # up to `free` a unit costs nothing beyond the loads, one unit carries the rest of the trip minimum
    rows, units, lows, highs = [], [], [], []
    for n, row in enumerate(used.tolist()):
        if not trip[n]:
            pieces = [(int(rate[n]), int(low[n]), int(high[n]))]
        else:
            pieces = [(0, min(int(low[n]), int(free[n])), int(free[n]))]
            step = int(rate[n]) * (int(kink[n]) + 1) - int(trip[n]) if rate[n] > 0 else 0
            rest_low, rest_high = int(low[n]) - pieces[0][1], int(high[n] - free[n])
            if rest_high > 0:
                one = min(rest_low, 1)
                pieces.append((step, one, 1))
                if rest_high > 1:
                    pieces.append((int(rate[n]), rest_low - one, rest_high - 1))
        for unit, least_here, most_here in pieces:
            rows.append(row)
            units.append(unit)
            lows.append(least_here)
            highs.append(most_here)
    as_integers = [np.array(part, dtype=np.int64) for part in (rows, units, lows, highs)]
    return Lines(*as_integers)
