"""The one way to solve a problem: picks the kernel by shape and proves what it finds."""

from __future__ import annotations

import threading
from collections.abc import Callable

from engine.exact import Integers, TooLarge
from engine.network import exchange
from engine.network.flow import Flow, Method
from engine.network.problem import Problem
from engine.network.proof import prove
from engine.network.restart import few_orders_differ, guess_from

Answer = tuple[Integers, Integers, Integers]
Solver = Callable[[Problem, Integers, Integers | None], Answer]

FEW_DEPOTS, SOME_DEPOTS, MANY_CUSTOMERS = 15, 20, 75_000
"""Up to few depots the exchange is about as fast, with many customers faster by far; up to some depots only
with very many customers. Beyond, the simplex is faster, where rates grow with distance (measured on 5 to 500
depots and 60 to 100,000 customers)."""


only_simplex = threading.Event()
"""Set while the code of the exchange is still being made."""


def least_cost(problem: Problem, start: Flow | None = None) -> Flow:
    """A least-cost flow of `problem`, proved in integers before it is returned.

    start: an earlier flow, of this or a changed problem, whose prices and quantities are reused as far as
           they fit; the answer costs the same without it
    Raises Contradiction, with the cut, if no flow keeps all sums and limits; TooLarge if numbers are so
    large that the arithmetic could leave int64.
    """
    method, answer = _solved(problem, start)
    proof = prove(problem, *answer)
    return Flow(problem, *answer, proof, method)


def _solved(problem: Problem, start: Flow | None) -> tuple[Method, Answer]:
    """Quantities, depot prices and customer prices, and how they were found; not yet proved."""
    price, quantity = guess_from(problem, start)
    if (
        start is not None
        and quantity is start.quantity
        and few_orders_differ(problem, start.problem)
        and not only_simplex.is_set()
    ):
        answer = exchange.resume(problem, start.problem, quantity, price)
        if answer is not None:
            return "exchange", answer
    if method_for(problem) == "exchange":
        try:
            return "exchange", exchange.solve(problem, price, quantity)
        except TooLarge:
            # its prices are only guarded while they rise; the simplex bounds its own beforehand
            pass
    return "simplex", _simplex()(problem, price, quantity)


def _simplex() -> Solver:
    """The simplex is compiled when its module is imported, so not before it is needed."""
    from engine.network import simplex

    return simplex.solve


def method_for(problem: Problem) -> Method:
    """The kernel that is faster on problems of this shape, of those that are there."""
    if only_simplex.is_set():
        return "simplex"
    most = SOME_DEPOTS if problem.customers >= MANY_CUSTOMERS else FEW_DEPOTS
    return "exchange" if problem.depots <= most else "simplex"
