"""One customer at given depot prices: its cheapest rows, filled, and how far they are from changing.

Lower limits are taken out beforehand, so that a row carries between 0 and its room.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.problem import UNLIMITED

FAR = 2**61
"""Stands for no way at all; every real price or path stays within plus or minus 2**60."""

UNSERVED = -1
"""Instead of a gap: the customer's rows cannot carry what it needs."""


class Rows(NamedTuple):
    """A problem without lower limits, as the depot exchange reads it.

    supply:  (depots,)
    demand:  (customers,)
    start:   (customers + 1,) the rows of customer j
    depot:   (rows,)
    cost:    (rows,)
    room:    (rows,) most that each row carries, or empty if nothing is limited
    regular: (customers,) 1 where the customer has exactly one row per depot, in the order of the depots
    """

    supply: Integers
    demand: Integers
    start: Integers
    depot: Integers
    cost: Integers
    room: Integers
    regular: NDArray[np.uint8]


class State(NamedTuple):
    """What the depot exchange changes.

    flow:     (rows,) at every customer the cheapest at `price`, never above `room`
    price:    (depots,)
    excess:   (depots,) what the customers take from each depot, less its supply
    handover: (depots, depots) least cost of handing one unit over from depot i to depot k at one customer
    via:      (depots, depots) the row of depot i that gives the unit up
    """

    flow: Integers
    price: Integers
    excess: Integers
    handover: Integers
    via: Integers


@kernel
def mark_regular(figures_start: Integers, depot: Integers, depots: int, regular: NDArray[np.uint8]) -> None:
    """Fills `Rows.regular`."""
    for j in range(len(regular)):
        first = figures_start[j]
        same = figures_start[j + 1] - first == depots
        if same:
            for k in range(depots):
                same &= depot[first + k] == k
        regular[j] = same


@kernel
def fill(rows: Rows, state: State, j: int) -> int:
    """Gives customer j its cheapest rows; what already stands on rows as cheap stays there.

    Returns the gap: the least that exchanging two rows would cost per unit, FAR if nothing can be
    exchanged, UNSERVED if the rows cannot carry the demand.
    """
    if len(rows.room):
        return fill_limited(rows, state, j)
    first, last, needed = rows.start[j], rows.start[j + 1], rows.demand[j]
    if needed == 0:
        state.flow[first:last] = 0
        return FAR
    cheapest, second, dearest_used, carried = FAR, FAR, -FAR, 0
    for row in range(first, last):
        reduced = rows.cost[row] - state.price[rows.depot[row]]
        if reduced < cheapest:
            second = cheapest
            cheapest = reduced
        elif reduced < second:
            second = reduced
        if state.flow[row]:
            dearest_used = max(dearest_used, reduced)
            carried += state.flow[row]
    if cheapest == FAR:
        return UNSERVED
    if carried != needed or dearest_used != cheapest:
        spread(rows, state, j, cheapest, needed)
    return second - cheapest


@kernel
def spread(rows: Rows, state: State, j: int, level: int, quantity: int) -> None:
    """Puts `quantity` on the rows that cost `level` at the prices, where it stood before as far as possible.

    Clears dearer rows and fills cheaper ones (which are limited, otherwise there are none). The rest
    goes to the depot that has most to spare.
    """
    first, last = rows.start[j], rows.start[j + 1]
    limited = len(rows.room) > 0
    left = quantity
    for row in range(first, last):
        reduced = rows.cost[row] - state.price[rows.depot[row]]
        if reduced > level:
            state.flow[row] = 0
        elif reduced < level:
            state.flow[row] = rows.room[row]
        else:
            kept = min(state.flow[row], left)
            if limited:
                kept = min(kept, rows.room[row])
            state.flow[row] = kept
            left -= kept
    while left > 0:
        chosen, least = first, UNLIMITED
        for row in range(first, last):
            i = rows.depot[row]
            if rows.cost[row] - state.price[i] == level and state.excess[i] < least:
                if limited and state.flow[row] == rows.room[row]:
                    continue
                chosen, least = row, state.excess[i]
        more = left
        if limited:
            more = min(left, rows.room[chosen] - state.flow[chosen])
        state.flow[chosen] += more
        left -= more


@kernel
def fill_limited(rows: Rows, state: State, j: int) -> int:
    """`fill` where rows have limits: cheapest first, each up to its room."""
    first, last, needed = rows.start[j], rows.start[j + 1], rows.demand[j]
    if needed == 0:
        state.flow[first:last] = 0
        return FAR
    level, left = -FAR, needed
    while True:
        following, able = FAR, 0
        for row in range(first, last):
            reduced = rows.cost[row] - state.price[rows.depot[row]]
            if reduced <= level or reduced > following or rows.room[row] == 0:
                continue
            if reduced < following:
                following, able = reduced, 0
            able += min(rows.room[row], left - able)
        if following == FAR:
            return UNSERVED
        level = following
        if able == left:
            break
        left -= able
    spread(rows, state, j, level, left)
    return gap_limited(rows, state, j)


@kernel
def gap_limited(rows: Rows, state: State, j: int) -> int:
    """The least that exchanging two different rows of customer j would cost per unit at the prices."""
    least_free, second_free, free_row = FAR, FAR, -1
    most_used, second_used, used_row = -FAR, -FAR, -1
    for row in range(rows.start[j], rows.start[j + 1]):
        reduced = rows.cost[row] - state.price[rows.depot[row]]
        if state.flow[row] < rows.room[row]:
            if reduced < least_free:
                second_free, least_free, free_row = least_free, reduced, row
            elif reduced < second_free:
                second_free = reduced
        if state.flow[row] > 0:
            if reduced > most_used:
                second_used, most_used, used_row = most_used, reduced, row
            elif reduced > second_used:
                second_used = reduced
    if free_row != used_row:
        return min(FAR, least_free - most_used)
    return min(FAR, min(second_free - most_used, least_free - second_used))
