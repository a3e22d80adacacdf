"""The one way to solve a problem: picks the kernel by shape and proves what it finds."""

from __future__ import annotations

import numpy as np

from engine.network.exchange import solve
from engine.network.flow import Flow
from engine.network.problem import Problem
from engine.network.proof import prove


def least_cost(problem: Problem, start: Flow | None = None) -> Flow:
    """A least-cost flow of `problem`, proved in integers before it is returned.

    start: an earlier flow, of this or a changed problem, whose prices and quantities are reused
    Raises Contradiction, with the cut, if no flow keeps all sums and limits; TooLarge if numbers are so
    large that the arithmetic could leave int64.
    """
    price = np.zeros(problem.depots, dtype=np.int64)
    quantity, depot_price, customer_price = solve(problem, price, None)
    proof = prove(problem, quantity, depot_price, customer_price)
    return Flow(problem, quantity, depot_price, customer_price, proof, "exchange")
