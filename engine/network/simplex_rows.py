"""What the network simplex reads of a problem: its rows above their lower limits."""

from __future__ import annotations

from typing import Any, NamedTuple

import numba
import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers, total
from engine.network.compiled import kernel
from engine.network.exchange import cut
from engine.network.flow import Contradiction, Cut
from engine.network.problem import Problem

NEVER = 2**61
"""Cost of a row that can carry nothing: dearer than any sum of a cost and two prices."""

types: Any = numba.types
VOID, BOOL, INT, INTS = types.void, types.boolean, types.int64, types.int64[::1]
PAIR = types.UniTuple(INT, 2)
"""What kernels take and give; their signatures are explicit, so that none is compiled twice."""


def signature(result: Any, *arguments: Any) -> object:
    """The signature of a kernel that takes `arguments` and gives `result`."""
    return result(*arguments)


class Rows(NamedTuple):
    """What the kernels read of a problem, lower limits already taken out.

    start:  (customers + 1,) rows of customer j
    depot:  (rows,) depot of each row
    cost:   (rows,) of one unit; rows that can carry nothing stand so high that they never enter
    room:   (rows,) most that a row can carry, or empty if no limit can ever bind
    full:   (rows,) int8, 1 where a row outside the tree carries all of `room`; empty like `room`
    filled: (customers,) int32, how many rows of the customer are full
    binding: how many rows have a limit above 0 that can bind
    every:  whether each customer has exactly one row from each depot, in the order of the depots
    """

    start: Integers
    depot: Integers
    cost: Integers
    room: Integers
    full: NDArray[np.int8]
    filled: NDArray[np.int32]
    binding: int
    every: bool


ROWS: Any = types.NamedTuple([INTS] * 4 + [types.int8[::1], types.int32[::1], INT, BOOL], Rows)


def above_lower_limits(problem: Problem) -> tuple[Rows, Integers, Integers]:
    """The rows without what must move on them in any case, and what depots and customers have left to do.

    Raises Contradiction if the lower limits alone are too much for a depot or a customer.
    """
    left, need = problem.supply.copy(), problem.demand.copy()
    room, cost, binding = np.empty(0, dtype=np.int64), problem.cost, 0
    if problem.at_least is not None:
        row = take_out(problem.start, problem.depot, problem.at_least, left, need)
        if row >= 0:
            raise Contradiction(_overfull(problem, row))
    if problem.at_most is not None:
        room = problem.at_most if problem.at_least is None else problem.at_most - problem.at_least
        binding, closed = count_limits(problem.start, problem.depot, room, left, need)
        if closed:
            cost = np.where(room > 0, cost, NEVER)
        if binding + closed == 0:
            room = np.empty(0, dtype=np.int64)
    rows = Rows(
        start=problem.start,
        depot=problem.depot,
        cost=cost,
        room=room,
        full=np.zeros(len(room), dtype=np.int8),
        filled=np.zeros(problem.customers, dtype=np.int32),
        binding=binding,
        every=problem.look.every,
    )
    return rows, left, need


def _overfull(problem: Problem, row: int) -> Cut:
    """Lower limits that add up to more than a depot has or a customer needs; `row` is where it shows."""
    depot, j = int(problem.depot[row]), int(problem.customer[row])
    at_depot = problem.depot == depot
    if problem.at_least is not None and total(problem.at_least[at_depot]) > int(problem.supply[depot]):
        nobody = np.zeros(problem.customers, dtype=bool)
        return cut(problem, np.arange(problem.depots) == depot, nobody)
    return cut(problem, np.ones(problem.depots, dtype=bool), np.arange(problem.customers) != j)


@kernel(signature(INT, INTS, INTS, INTS, INTS, INTS))
def take_out(start: Integers, depot: Integers, at_least: Integers, left: Integers, need: Integers) -> int:
    """Takes the lower limits out of what is left to do; the first row whose limit is too much, or -1."""
    for j in range(len(need)):
        for row in range(start[j], start[j + 1]):
            if at_least[row] > left[depot[row]] or at_least[row] > need[j]:
                return row
            left[depot[row]] -= at_least[row]
            need[j] -= at_least[row]
    return -1


@kernel(signature(PAIR, INTS, INTS, INTS, INTS, INTS))
def count_limits(
    start: Integers, depot: Integers, room: Integers, left: Integers, need: Integers
) -> tuple[int, int]:
    """How many rows have a limit above 0 that can bind, and how many can carry nothing at all."""
    binding = closed = 0
    for j in range(len(need)):
        for row in range(start[j], start[j + 1]):
            closed += room[row] == 0
            binding += 0 < room[row] < min(left[depot[row]], need[j])
    return binding, closed
