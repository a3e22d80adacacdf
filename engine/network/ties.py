"""Which of several least-cost flows: the one nearest an earlier one, and then one on few lanes.

With r = cost - depot price - customer price of any proved flow, rows with r other than 0 carry the same in
every least-cost flow: their lower or their upper limit (Dantzig 1963, complementary slackness). The choice
is among the rest, the tied rows, and is itself a transportation problem: a tied row is split at the
quantity that it carried earlier, and every unit below that quantity earns 1, every unit above costs 1.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.cycles import cancel_cycles
from engine.network.flow import Flow
from engine.network.problem import UNLIMITED, Problem
from engine.network.proof import prove
from engine.network.solve import least_cost


class Choice(NamedTuple):
    """What is left to choose.

    problem: the tied rows alone, split, above their lower limits
    row:     (split rows,) the row that each is a part of
    lowest:  (rows,) what every row carries in any case
    """

    problem: Problem
    row: Integers
    lowest: Integers


def nearest(flow: Flow, near: Integers | None = None) -> Flow:
    """The least-cost flow that differs least from `near`: least sum over the rows of the differences.

    Among these it is one without cycles of partly filled rows, where a row that carries exactly what it
    carried earlier counts as full. (The fewest lanes are not promised: that is NP-hard.)

    near: (rows,) earlier quantities; None to ask only that there are no cycles
    """
    choice = _choice(flow, near)
    parts = least_cost(choice.problem).quantity.copy()
    cancel_cycles(choice.problem.figures, choice.problem.customer, parts)
    quantity = choice.lowest.copy()
    np.add.at(quantity, choice.row, parts)
    proof = prove(flow.problem, quantity, flow.depot_price, flow.customer_price)
    return Flow(flow.problem, quantity, flow.depot_price, flow.customer_price, proof, flow.method)


def reduced_costs(flow: Flow) -> Integers:
    """(rows,) cost less depot price less customer price: 0 on every row whose quantity is open to choice."""
    problem = flow.problem
    return problem.cost - flow.depot_price[problem.depot] - flow.customer_price[problem.customer]


def _choice(flow: Flow, near: Integers | None) -> Choice:
    """The problem that `nearest` solves; its totals are what the tied rows carry above their limits."""
    problem, quantity = flow.problem, flow.quantity
    floor = np.zeros(problem.rows, dtype=np.int64) if problem.at_least is None else problem.at_least
    tied = np.flatnonzero(reduced_costs(flow) == 0)
    lowest = quantity.copy()
    lowest[tied] = floor[tied]
    # nothing ever carries more than its customer needs
    reach = np.minimum(quantity[tied] - floor[tied] + problem.demand[problem.customer[tied]], UNLIMITED // 2)
    if problem.at_most is not None:
        reach = np.minimum(reach, problem.at_most[tied] - floor[tied])
    kink = np.zeros(len(tied), dtype=np.int64)
    if near is not None:
        kink = np.clip(near[tied], floor[tied], floor[tied] + reach) - floor[tied]
    row = np.repeat(tied, 2)
    at_most = np.stack([kink, reach - kink], axis=1).reshape(-1)
    reward = 0 if near is None else 1
    cost = np.tile(np.array([-reward, reward], dtype=np.int64), len(tied))
    open_rows = at_most > 0
    row, at_most, cost = row[open_rows], at_most[open_rows], cost[open_rows]
    moving = quantity - lowest
    supply, demand = np.zeros_like(problem.supply), np.zeros_like(problem.demand)
    np.add.at(supply, problem.depot, moving)
    np.add.at(demand, problem.customer, moving)
    start = np.searchsorted(problem.customer[row], np.arange(problem.customers + 1)).astype(np.int64)
    return Choice(Problem(supply, demand, start, problem.depot[row], cost, None, at_most), row, lowest)
