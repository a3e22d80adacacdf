"""The transportation problem in integers: what each depot has, what each customer needs, the rows."""

from __future__ import annotations

from copy import copy
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine.exact import Integers, TooLarge, total
from engine.network.compiled import kernel

UNLIMITED = int(np.iinfo(np.int64).max)
"""In `at_most`: no limit."""

LARGEST_FIGURE = 2**62 - 1
"""Totals of quantities, and every cost, stay within plus or minus this, so that sums of two cannot wrap."""


class Look(NamedTuple):
    """What one look over all rows finds.

    outside: the first row whose depot does not exist, or -1
    lowest:  least cost of all rows, 0 without rows
    highest: largest cost of all rows, likewise
    every:   whether each customer has exactly one row from each depot, in the order of the depots
    """

    outside: int
    lowest: int
    highest: int
    every: bool


class Figures(NamedTuple):
    """A problem as kernels take it; an empty `at_least` or `at_most` stands for no such limits."""

    supply: Integers
    demand: Integers
    start: Integers
    depot: Integers
    cost: Integers
    at_least: Integers
    at_most: Integers


@dataclass(frozen=True, eq=False)
class Problem:
    """Who can send how much to whom, at which cost: Hitchcock (1941) with several limited rows a lane.

    All arrays are whole numbers (int32 or int64; stored as int64, an int64 array is not copied and must
    not be changed afterwards). `at_least` and `at_most` may be None: 0 and unlimited.

    supply:   (depots,) quantity that must leave each depot
    demand:   (customers,) quantity that must reach each customer; same total as supply
    start:    (customers + 1,) the rows of customer j are start[j] up to, not including, start[j+1]
    depot:    (rows,) index of the depot that each row sends from; repeats at one customer are allowed
    cost:     (rows,) cost of one unit, may be negative
    at_least: (rows,) smallest quantity on each row
    at_most:  (rows,) largest quantity on each row, UNLIMITED for none

    Raises ValueError for unequal totals, negative quantities, indices out of range or lower limits
    above upper ones; TooLarge (a ValueError) where sums could leave int64.
    """

    supply: Integers
    demand: Integers
    start: Integers
    depot: Integers
    cost: Integers
    at_least: Integers | None = None
    at_most: Integers | None = None
    look: Look = field(init=False, repr=False)

    def __post_init__(self) -> None:
        for name in ("supply", "demand", "start", "depot", "cost", "at_least", "at_most"):
            given = getattr(self, name)
            if given is not None:
                object.__setattr__(self, name, _whole_numbers(name, given))
        _check_quantities(self)
        object.__setattr__(self, "look", _checked_rows(self))
        _check_limits(self)

    @classmethod
    def dense(cls, supply: ArrayLike, demand: ArrayLike, cost: ArrayLike) -> Problem:
        """A problem where every depot serves every customer, without limits.

        supply: (depots,); demand: (customers,); cost: (depots, customers), of one unit.
        """
        matrix = np.asarray(cost)
        depots, customers = np.size(supply), np.size(demand)
        if matrix.shape != (depots, customers) and not (matrix.size == 0 and depots * customers == 0):
            raise ValueError(
                f"cost has shape {matrix.shape}, but there are {depots} depots and {customers} customers: "
                f"give one row per depot and one column per customer."
            )
        return cls(
            supply=np.asarray(supply),
            demand=np.asarray(demand),
            start=np.arange(customers + 1, dtype=np.int64) * depots,
            depot=np.broadcast_to(np.arange(depots, dtype=np.int64), (customers, depots)).reshape(-1),
            cost=matrix.T.reshape(-1),
        )

    def with_quantities(self, supply: ArrayLike, demand: ArrayLike) -> Problem:
        """The same rows with other quantities; what was checked about the rows is not checked again.

        supply: (depots,); demand: (customers,). Raises as the class does.
        """
        other = copy(self)
        for name, given, before in (("supply", supply, self.supply), ("demand", demand, self.demand)):
            quantities = _whole_numbers(name, np.asarray(given))
            if len(quantities) != len(before):
                raise ValueError(
                    f"{name} has {len(quantities)} entries where there were {len(before)}: give as many."
                )
            object.__setattr__(other, name, quantities)
        other.__dict__.pop("figures", None)
        _check_quantities(other)
        return other

    @property
    def dearest(self) -> int:
        """Largest cost of a row, its sign left out."""
        return max(-self.look.lowest, self.look.highest)

    @property
    def depots(self) -> int:
        """Number of depots."""
        return len(self.supply)

    @property
    def customers(self) -> int:
        """Number of customers."""
        return len(self.demand)

    @property
    def rows(self) -> int:
        """Number of rate rows."""
        return len(self.cost)

    @cached_property
    def customer(self) -> Integers:
        """(rows,) index of the customer that each row sends to."""
        return np.repeat(np.arange(self.customers, dtype=np.int64), np.diff(self.start))

    @cached_property
    def figures(self) -> Figures:
        """The arrays themselves, for kernels."""
        none = np.empty(0, dtype=np.int64)
        return Figures(
            self.supply,
            self.demand,
            self.start,
            self.depot,
            self.cost,
            none if self.at_least is None else self.at_least,
            none if self.at_most is None else self.at_most,
        )


def _whole_numbers(name: str, given: NDArray[Any]) -> Integers:
    """`given` as a one-dimensional, contiguous, writable int64 array, the only kind that kernels take."""
    array = np.asarray(given)
    if array.ndim != 1:
        raise ValueError(f"{name} has {array.ndim} dimensions (shape {array.shape}): give a flat list.")
    if array.size == 0:
        return np.empty(0, dtype=np.int64)
    if array.dtype.kind not in "iu":
        raise ValueError(
            f"{name} holds {array.dtype} values: give whole numbers (int32 or int64); "
            f"decimals are scaled to whole numbers first, see engine.exact."
        )
    if array.dtype.kind == "u" and int(array.max()) > UNLIMITED:
        raise TooLarge(f"{name} holds {int(array.max())}, the largest whole number accepted is {UNLIMITED}.")
    return np.require(array, dtype=np.int64, requirements=["C", "W", "A"])


def _check_quantities(problem: Problem) -> None:
    totals = []
    for name, quantities in (("supply", problem.supply), ("demand", problem.demand)):
        if len(quantities) and int(quantities.min()) < 0:
            position = int(quantities.argmin())
            raise ValueError(
                f"{name}[{position}] is {quantities[position]}: quantities cannot be negative, use 0 or more."
            )
        totals.append(total(quantities))
        if totals[-1] > LARGEST_FIGURE:
            raise TooLarge(
                f"{name} adds up to {totals[-1]}, the largest total accepted is {LARGEST_FIGURE}: "
                f"use a larger unit."
            )
    if totals[0] != totals[1]:
        raise ValueError(
            f"supply adds up to {totals[0]}, demand to {totals[1]}: they must be equal. "
            f"Add a stand-in customer for what stays, or a stand-in depot for what is missing."
        )


def _checked_rows(problem: Problem) -> Look:
    """Checks the rows but for their limits, and says what was seen on the way."""
    start, depot, cost = problem.start, problem.depot, problem.cost
    if len(start) != problem.customers + 1:
        raise ValueError(
            f"start has {len(start)} entries for {problem.customers} customers: "
            f"give one per customer and one for the end."
        )
    if len(depot) != len(cost):
        raise ValueError(f"depot has {len(depot)} rows, cost has {len(cost)}: give one of each per row.")
    if start[0] != 0 or start[-1] != len(cost):
        raise ValueError(
            f"start runs from {start[0]} to {start[-1]}, it must run from 0 to {len(cost)} (the rows)."
        )
    if np.any(start[1:] < start[:-1]):
        customer = int(np.argmax(start[1:] < start[:-1]))
        raise ValueError(
            f"start falls from {start[customer]} to {start[customer + 1]} after customer {customer}: "
            f"rows must stand customer by customer."
        )
    look = Look(*look_over(start, depot, cost, problem.depots))
    if look.outside >= 0:
        raise ValueError(
            f"depot[{look.outside}] is {depot[look.outside]}, but there are {problem.depots} depots: "
            f"indices run from 0 to {problem.depots - 1}."
        )
    if max(-look.lowest, look.highest) > LARGEST_FIGURE:
        row = int(np.argmax((cost > LARGEST_FIGURE) | (cost < -LARGEST_FIGURE)))
        raise TooLarge(
            f"cost[{row}] is {cost[row]}, costs must lie within plus or minus {LARGEST_FIGURE}: "
            f"use a larger currency unit."
        )
    return look


@kernel
def look_over(start: Integers, depot: Integers, cost: Integers, depots: int) -> tuple[int, int, int, bool]:
    """One pass over the rows, see `Look`; written so that it runs in vectors where rows are complete."""
    if len(cost) == 0:
        return -1, 0, 0, len(start) == 1 or depots == 0
    lowest = highest = cost[0]
    every = True
    for j in range(len(start) - 1):
        depots_here, costs_here = depot[start[j] : start[j + 1]], cost[start[j] : start[j + 1]]
        misplaced = 0
        for n in range(len(costs_here)):
            misplaced += depots_here[n] != n
            lowest = min(lowest, costs_here[n])
            highest = max(highest, costs_here[n])
        if misplaced == 0 and len(costs_here) <= depots:
            every = every and len(costs_here) == depots
            continue
        every = False
        for n in range(len(costs_here)):
            if depots_here[n] < 0 or depots_here[n] >= depots:
                return start[j] + n, lowest, highest, False
    return -1, lowest, highest, every


def _check_limits(problem: Problem) -> None:
    at_least, at_most = problem.at_least, problem.at_most
    for name, limits in (("at_least", at_least), ("at_most", at_most)):
        if limits is None:
            continue
        if len(limits) != problem.rows:
            raise ValueError(f"{name} has {len(limits)} entries for {problem.rows} rows: give one per row.")
        if len(limits) and int(limits.min()) < 0:
            row = int(limits.argmin())
            raise ValueError(f"{name}[{row}] is {limits[row]}: a limit cannot be negative, use 0 or more.")
    if at_least is not None and at_most is not None and np.any(at_least > at_most):
        row = int(np.argmax(at_least > at_most))
        raise ValueError(
            f"at_least[{row}] is {at_least[row]} but at_most[{row}] is {at_most[row]}: "
            f"lower the first or raise the second."
        )
