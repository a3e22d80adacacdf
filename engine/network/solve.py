"""The one way to solve a problem: picks the kernel by shape and proves what it finds."""

from __future__ import annotations

from collections.abc import Callable

from engine.exact import Integers
from engine.network import exchange
from engine.network.flow import Flow, Method
from engine.network.problem import Problem
from engine.network.proof import prove
from engine.network.restart import guess_from

Solver = Callable[[Problem, Integers, Integers | None], tuple[Integers, Integers, Integers]]

FEW_DEPOTS, SOME_DEPOTS, MANY_CUSTOMERS = 15, 20, 75_000
"""Up to few depots the exchange is about as fast, with many customers faster by far; up to some depots only
with very many customers. Beyond, the simplex is faster, where rates grow with distance (measured on 5 to 500
depots and 60 to 100,000 customers)."""


def least_cost(problem: Problem, start: Flow | None = None) -> Flow:
    """A least-cost flow of `problem`, proved in integers before it is returned.

    start: an earlier flow, of this or a changed problem, whose prices and quantities are reused as far as
           they fit; the answer costs the same without it
    Raises Contradiction, with the cut, if no flow keeps all sums and limits; TooLarge if numbers are so
    large that the arithmetic could leave int64.
    """
    price, quantity = guess_from(problem, start)
    method = method_for(problem)
    solve = exchange.solve if method == "exchange" else _simplex()
    quantity, depot_price, customer_price = solve(problem, price, quantity)
    proof = prove(problem, quantity, depot_price, customer_price)
    return Flow(problem, quantity, depot_price, customer_price, proof, method)


def _simplex() -> Solver:
    """The simplex is compiled when its module is imported, so not before it is needed."""
    from engine.network import simplex

    return simplex.solve


def method_for(problem: Problem) -> Method:
    """The kernel that is faster on problems of this shape."""
    most = SOME_DEPOTS if problem.customers >= MANY_CUSTOMERS else FEW_DEPOTS
    return "exchange" if problem.depots <= most else "simplex"
