"""Least-cost flow by a network simplex on the rate rows: the kernel for many depots.

Dantzig (1951) gave the simplex method for the transportation problem, Cunningham (1976) the trees on which
it cannot repeat itself; Ahuja, Magnanti & Orlin (1993), chapter 11, describe both.

The signatures of all kernels are explicit, so importing this module compiles them, or loads their code.
"""

from __future__ import annotations

import numpy as np

from engine.exact import Integers, TooLarge, total
from engine.network.exchange import cut
from engine.network.flow import Contradiction, Cut
from engine.network.problem import UNLIMITED, Problem
from engine.network.simplex_rows import above_lower_limits
from engine.network.simplex_search import improve, read_off
from engine.network.simplex_start import Hint, first_tree
from engine.network.simplex_tree import ARTIFICIAL, LARGEST_PRICE, NOBODY, Tree


def solve(
    problem: Problem, price: Integers, quantity: Integers | None
) -> tuple[Integers, Integers, Integers]:
    """A least-cost flow of `problem`: quantities per row, depot prices, customer prices, not yet proved.

    price:    (depots,) prices to start from
    quantity: (rows,) quantities to start from, as far as they fit; None to start afresh
    Raises Contradiction with the cut if there is no flow, TooLarge if prices could leave int64.
    """
    detour = _longest_detour(problem)
    rows, left, need = above_lower_limits(problem)
    needing = need > 0
    first = problem.depots + 1
    tree = first_tree(rows, left, need, _hint(problem, price, quantity, detour), detour + 1)
    improve(tree, rows, first)
    if np.any(needing & (tree.link["row"][first:-1] == ARTIFICIAL)):
        raise Contradiction(_cut(problem, tree))
    flow = np.zeros(problem.rows, dtype=np.int64)
    customer_price = np.empty(problem.customers, dtype=np.int64)
    read_off(tree, rows, first, flow, customer_price)
    if problem.at_least is not None:
        flow += problem.at_least
    depot_price = tree.price[: problem.depots].copy()
    level = depot_price[:1].sum()
    return flow, depot_price - level, customer_price + level


def _longest_detour(problem: Problem) -> int:
    """More than any way from node to node over rows can cost or save; raises TooLarge if int64 is too short.

    Such a way meets no depot and no customer twice, and so uses at most two rows of each depot. The link to
    the root costs one detour more, and a hint may add one more: no two prices differ by more than six.
    """
    dearest = problem.dearest
    detour = (2 * min(problem.depots, problem.customers) + 2) * dearest + 1
    if 6 * detour > LARGEST_PRICE:
        # a bound depot by depot takes longer; it helps where only a stand-in depot has large costs
        dearest_of = np.zeros(problem.depots, dtype=np.int64)
        np.maximum.at(dearest_of, problem.depot, np.abs(problem.cost))
        detour = 2 * total(dearest_of) + 1
    if 6 * detour > LARGEST_PRICE:
        raise TooLarge(
            f"A cost of {dearest} is too large for {problem.depots} depots: prices could reach {6 * detour}, "
            f"up to {LARGEST_PRICE} can be computed with exactly. Use a larger currency unit."
        )
    return detour


def _hint(problem: Problem, price: Integers, quantity: Integers | None, detour: int) -> Hint:
    """The caller's guess, made safe: prices from 0 to `detour`, quantities above the lower limits."""
    lowest = int(price.min(initial=0))
    safe_price = np.minimum(price, min(lowest + detour, UNLIMITED)) - lowest
    if quantity is None:
        return Hint(safe_price, np.empty(0, dtype=np.int64))
    return Hint(safe_price, quantity if problem.at_least is None else quantity - problem.at_least)


def _cut(problem: Problem, tree: Tree) -> Cut:
    """The customers whose needs lead back to the root alone, and the depots that serve them already.

    The root's links are so dear that the signs of the prices tell who hangs on which kind of them. Where the
    prices differ in sign, the other depots' rows must be full and these depots' rows to others empty.
    """
    first = problem.depots + 1
    price = tree.price - tree.price[problem.depots]
    parent = tree.link["parent"][first:-1]
    needing = parent != NOBODY
    lacking = needing.copy()
    lacking[needing] = tree.link["cost"][first:-1][needing] - price[parent[needing]] > 0
    return cut(problem, price[: problem.depots] < 0, lacking)
