"""What one unit more or less would cost at a least-cost flow, exactly, through any chain of displacements.

No single set of prices can say this where a flow is degenerate: one more may cost another amount than
one less saves. The cheapest ways of handing a unit over between two depots at one customer, closed under
chains (Floyd 1962; Warshall 1962), do say it: they are the shortest paths of the residual network, shrunk
to the depots (Ahuja, Magnanti & Orlin 1993, chapter 9).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers, TooLarge
from engine.network.compiled import kernel
from engine.network.flow import Flow
from engine.network.problem import UNLIMITED, Figures

NO_WAY = 2**61
"""In place of a cost: there is no way, however dear."""

LARGEST_COST = 2**57
"""The largest cost times the number of depots must stay below this, so that no chain leaves int64."""


@dataclass(frozen=True)
class Exchange:
    """One displacement: at `customer`, `from_depot` sends less on one row and `to_depot` more on another.

    cost: of one unit, may be negative
    """

    from_depot: int
    to_depot: int
    customer: int
    less_on: int
    more_on: int
    cost: int


@dataclass(frozen=True, eq=False)
class Closure:
    """What handing one unit over from depot i to depot k costs: i sends one less, k sends one more.

    flow:    the least-cost flow
    direct:  (depots, depots) cheapest exchange at a single customer, NO_WAY if there is none
    less_on: (depots, depots) the row of i of that exchange, above its lower limit; -1 if there is none
    more_on: (depots, depots) the row of k, below its upper limit
    cost:    (depots, depots) cheapest chain of exchanges, 0 from a depot to itself, NO_WAY if there is none
    """

    flow: Flow
    direct: Integers
    less_on: Integers
    more_on: Integers
    cost: Integers

    def chain(self, i: int, k: int) -> tuple[Exchange, ...] | None:
        """The cheapest chain from depot i to depot k, with the fewest exchanges; None if there is no way.

        Its costs add up to `cost[i, k]`. From a depot to itself it is empty.
        """
        if self.cost[i, k] >= NO_WAY:
            return None
        before = {i: i}
        line = [i]
        for here in line:
            if here == k:
                break
            cheapest = (self.direct[here] < NO_WAY) & (self.cost[:, k] < NO_WAY)
            cheapest &= self.direct[here] + self.cost[:, k] == self.cost[here, k]
            for there in np.flatnonzero(cheapest).tolist():
                if there not in before:
                    before[there] = here
                    line.append(there)
        exchanges = []
        while k != i:
            exchanges.append(self._exchange(before[k], k))
            k = before[k]
        return tuple(reversed(exchanges))

    def _exchange(self, i: int, k: int) -> Exchange:
        row = int(self.less_on[i, k])
        customer = int(self.flow.problem.start.searchsorted(row, side="right")) - 1
        return Exchange(i, k, customer, row, int(self.more_on[i, k]), int(self.direct[i, k]))

    def one_more(self, j: int) -> tuple[Integers, Integers]:
        """What it costs if customer j orders one more and depot i has one more to send, for every depot i.

        Returns (depots,) cost after minus cost before, NO_WAY if it cannot be done, and (depots,) the row
        that brings the unit to the customer, -1 if none: from depot k, say; then `chain(k, i)` follows.
        """
        problem, quantity = self.flow.problem, self.flow.quantity
        rows = np.arange(problem.start[j], problem.start[j + 1])
        if problem.at_most is not None:
            rows = rows[quantity[rows] < problem.at_most[rows]]
        brings = self.cost[problem.depot[rows]]
        return _least(rows, np.where(brings < NO_WAY, brings + problem.cost[rows, None], NO_WAY))

    def one_less(self, j: int) -> tuple[Integers, Integers]:
        """What it costs if customer j orders one less and depot i has one less to send, for every depot i.

        Returns (depots,) cost after minus cost before (mostly negative: a saving), NO_WAY if it cannot be
        done, and (depots,) the row that brings less, -1 if none: from depot k, say; `chain(i, k)` is before.
        """
        problem, quantity = self.flow.problem, self.flow.quantity
        rows = np.arange(problem.start[j], problem.start[j + 1])
        least = 0 if problem.at_least is None else problem.at_least[rows]
        rows = rows[quantity[rows] > least]
        spares = self.cost[:, problem.depot[rows]].T
        return _least(rows, np.where(spares < NO_WAY, spares - problem.cost[rows, None], NO_WAY))


def close(flow: Flow) -> Closure:
    """The exchange costs between all depots at `flow`, and the cheapest chains of them.

    Raises TooLarge if a chain's cost could leave int64.
    """
    problem = flow.problem
    cost = problem.cost
    largest = max(int(cost.max(initial=0)), -int(cost.min(initial=0)))
    if largest * (problem.depots + 1) > LARGEST_COST:
        raise TooLarge(
            f"A cost of {largest} is too large for chains through {problem.depots} depots: "
            f"use a larger currency unit."
        )
    shape = (problem.depots, problem.depots)
    direct = np.full(shape, NO_WAY, dtype=np.int64)
    less_on, more_on = np.full(shape, -1, dtype=np.int64), np.full(shape, -1, dtype=np.int64)
    exchange_directly(problem.figures, flow.quantity, direct, less_on, more_on)
    chains = direct.copy()
    close_chains(chains)
    return Closure(flow, direct, less_on, more_on, chains)


@kernel
def exchange_directly(
    figures: Figures, quantity: Integers, direct: Integers, less_on: Integers, more_on: Integers
) -> None:
    """Fills the cheapest exchange at a single customer for every ordered pair of depots."""
    for j in range(len(figures.demand)):
        first, last = figures.start[j], figures.start[j + 1]
        for row in range(first, last):
            floor = figures.at_least[row] if len(figures.at_least) else 0
            if quantity[row] <= floor:
                continue
            i, given_up = figures.depot[row], figures.cost[row]
            for other in range(first, last):
                cap = figures.at_most[other] if len(figures.at_most) else UNLIMITED
                k, price = figures.depot[other], figures.cost[other] - given_up
                if quantity[other] < cap and price < direct[i, k] and other != row:
                    direct[i, k], less_on[i, k], more_on[i, k] = price, row, other


@kernel
def close_chains(cost: Integers) -> None:
    """Shortest paths between all pairs, in place (Floyd 1962); nothing below NO_WAY leads through NO_WAY."""
    depots = len(cost)
    for i in range(depots):
        cost[i, i] = 0
    for middle in range(depots):
        onward = cost[middle]
        for i in range(depots):
            here = cost[i, middle]
            if here >= NO_WAY:
                continue
            row = cost[i]
            for k in range(depots):
                there = here + onward[k]
                better = (there < row[k]) & (onward[k] < NO_WAY)
                row[k] = there if better else row[k]


def _least(rows: Integers, costs: NDArray[np.int64]) -> tuple[Integers, Integers]:
    """Per column the least of `costs` (rows, depots) and the row where it stands, -1 for NO_WAY."""
    if len(rows) == 0:
        depots = costs.shape[1]
        return np.full(depots, NO_WAY, dtype=np.int64), np.full(depots, -1, dtype=np.int64)
    place = costs.argmin(axis=0)
    least = costs[place, np.arange(costs.shape[1])]
    return least, np.where(least < NO_WAY, rows[place], -1)
