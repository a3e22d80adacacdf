"""The slow, obvious twin of the kernels: one augmenting path at a time in Python integers.

Bellman–Ford finds the cheapest path in the residual network of source, depots, customers and sink. It
knows nothing of prices, samples or samples' shares, and nothing can wrap.
"""

from __future__ import annotations

from fractions import Fraction

from engine.network import UNLIMITED, Problem


def least_cost_or_none(problem: Problem) -> int | None:
    """The least cost of `problem` as a Python int, None if there is no flow."""
    n, m = problem.depots, problem.customers
    supply, demand = problem.supply.tolist(), problem.demand.tolist()
    customer = problem.customer.tolist()
    depot, cost = problem.depot.tolist(), problem.cost.tolist()
    low = [0] * problem.rows if problem.at_least is None else problem.at_least.tolist()
    high = [UNLIMITED] * problem.rows if problem.at_most is None else problem.at_most.tolist()
    fixed = 0
    for row in range(problem.rows):
        supply[depot[row]] -= low[row]
        demand[customer[row]] -= low[row]
        fixed += low[row] * cost[row]
    if min(supply, default=0) < 0 or min(demand, default=0) < 0:
        return None
    source, sink = n + m, n + m + 1
    arcs: list[list[int]] = []  # from, to, cost, room; the arc at index ^ 1 is its reverse
    for i in range(n):
        arcs += [[source, i, 0, supply[i]], [i, source, 0, 0]]
    for j in range(m):
        arcs += [[n + j, sink, 0, demand[j]], [sink, n + j, 0, 0]]
    for row in range(problem.rows):
        i, j = depot[row], n + customer[row]
        arcs += [[i, j, cost[row], high[row] - low[row]], [j, i, -cost[row], 0]]
    left = sum(demand)
    while left:
        path = _cheapest_path(arcs, source, sink, n + m + 2)
        if path is None:
            return None
        amount = min(min(arcs[arc][3] for arc in path), left)
        for arc in path:
            arcs[arc][3] -= amount
            arcs[arc ^ 1][3] += amount
            fixed += amount * arcs[arc][2]
        left -= amount
    return fixed


def _cheapest_path(arcs: list[list[int]], source: int, sink: int, nodes: int) -> list[int] | None:
    distance: list[int | None] = [None] * nodes
    distance[source] = 0
    before = [-1] * nodes
    for _ in range(nodes):
        changed = False
        for index, (tail, head, cost, room) in enumerate(arcs):
            here = distance[tail]
            if room > 0 and here is not None:
                there = distance[head]
                if there is None or here + cost < there:
                    distance[head], before[head], changed = here + cost, index, True
        if not changed:
            break
    if distance[sink] is None:
        return None
    path, node = [], sink
    while node != source:
        path.append(before[node])
        node = arcs[before[node]][0]
    return path


def highs_cost(problem: Problem) -> Fraction | None:
    """What HiGHS finds (through scipy), as a fraction: floats, so only for small figures."""
    import numpy as np
    from scipy.optimize import linprog
    from scipy.sparse import csr_array

    if problem.rows == 0:
        return Fraction(0) if not problem.demand.any() else None
    ones = np.ones(problem.rows)
    where = np.arange(problem.rows)
    depots = csr_array((ones, (problem.depot, where)), shape=(problem.depots, problem.rows))
    customers = csr_array((ones, (problem.customer, where)), shape=(problem.customers, problem.rows))
    low = np.zeros(problem.rows) if problem.at_least is None else problem.at_least
    high = np.full(problem.rows, np.inf) if problem.at_most is None else problem.at_most.astype(float)
    high = np.where(high >= UNLIMITED, np.inf, high)
    from scipy.sparse import vstack

    answer = linprog(
        problem.cost,
        A_eq=vstack([depots, customers]).tocsr(),
        b_eq=np.concatenate([problem.supply, problem.demand]),
        bounds=np.stack([low, high], axis=1),
        method="highs",
    )
    if answer.status == 2:
        return None
    return Fraction(round(answer.fun))
