"""The customers at given depot prices: their cheapest rows, filled, and how far these are from changing.

Lower limits are taken out beforehand, so that a row carries between 0 and its room.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.problem import UNLIMITED

FAR = 2**61
"""Stands for no way at all; every real price or path stays within plus or minus 2**60."""

LISTED, ASCENDING, COMPLETE, LIMITED = 0, 1, 2, 4
"""Kinds of customers: rows in any order; in the order of depots, each at most once; one for each depot.

To which LIMITED is added where the room of some row is less than the customer's demand.
"""


SEVERAL = -1
"""In `State.home`: more than one row may carry something, or none."""


class Rows(NamedTuple):
    """A problem without lower limits, as the depot exchange reads it.

    supply: (depots,)
    demand: (customers,)
    start:  (customers + 1,) the rows of customer j
    depot:  (rows,)
    cost:   (rows,)
    room:   (rows,) most that each row carries; empty if nothing is limited
    kind:   (customers,) how the rows of the customer stand, see LISTED
    """

    supply: Integers
    demand: Integers
    start: Integers
    depot: Integers
    cost: Integers
    room: Integers
    kind: NDArray[np.uint8]


class State(NamedTuple):
    """What the depot exchange changes.

    flow:     (rows,) at every customer the cheapest at `price`, never above `room`
    price:    (depots,)
    excess:   (depots,) what the customers take from each depot, less its supply
    home:     (customers,) the only row that carries something, or SEVERAL
    handover: (depots, depots) least cost of handing one unit over from depot i to depot k at one customer
    via:      (depots, depots) the row of depot i that gives the unit up
    """

    flow: Integers
    price: Integers
    excess: Integers
    home: Integers
    handover: Integers
    via: Integers


@kernel
def classify(rows: Rows) -> None:
    """Fills `Rows.kind`."""
    start, depot, room = rows.start, rows.depot, rows.room
    depots = len(rows.supply)
    for j in range(len(rows.demand)):
        first, last = start[j], start[j + 1]
        ascending = True
        for row in range(first + 1, last):
            ascending &= depot[row - 1] < depot[row]
        kind = LISTED
        if ascending:
            kind = COMPLETE if last - first == depots else ASCENDING
        if len(room):
            limited = False
            for row in range(first, last):
                limited |= room[row] < rows.demand[j]
            if limited:
                kind |= LIMITED
        rows.kind[j] = kind


@part
def depot_of(rows: Rows, row: int, j: int) -> int:
    """The depot of a row of customer j, known without reading it where the rows are complete."""
    return int(row - rows.start[j] if rows.kind[j] == COMPLETE else rows.depot[row])


@part
def assign(rows: Rows, state: State, chosen: Integers, known: int, gap: Integers) -> int:
    """Gives the `chosen` customers their cheapest rows, adds that to `excess` and notes their gaps.

    known: every so many-th customer has flow already; where it suits the prices it stays
    gap:   receives what exchanging two rows of the customer would cost per unit at least, FAR for never
    Returns the customer whose rows cannot carry what it needs, or -1.
    """
    start, depot, cost = rows.start, rows.depot, rows.cost
    price, flow, excess, home = state.price, state.flow, state.excess, state.home
    for n in range(len(chosen)):
        j = chosen[n]
        first, last, needed = start[j], start[j + 1], rows.demand[j]
        fresh = j % known != 0
        if rows.kind[j] & LIMITED:
            home[j] = SEVERAL
            if not fill_limited(rows, state, j):
                return int(j)
            gap[n] = gap_limited(rows, state, j)
            continue
        cheapest, second = FAR, FAR
        if rows.kind[j] == COMPLETE:
            here = cost[first:last]
            for k in range(len(price)):
                reduced = here[k] - price[k]
                second = min(second, max(cheapest, reduced))
                cheapest = min(cheapest, reduced)
        else:
            for row in range(first, last):
                reduced = cost[row] - price[depot[row]]
                second = min(second, max(cheapest, reduced))
                cheapest = min(cheapest, reduced)
        gap[n] = second - cheapest
        if needed == 0:
            gap[n] = FAR
            home[j] = SEVERAL
            for row in range(first, last):
                flow[row] = 0
        elif first == last:
            return int(j)
        elif second > cheapest and (fresh or home[j] == SEVERAL):
            at = first
            while cost[at] - price[depot[at]] != cheapest:
                at += 1
            if not fresh and (flow[at] != needed or sum_of(flow[first:last]) != needed):
                spread(rows, state, j, cheapest, needed)
                continue
            flow[at] = needed
            excess[depot[at]] += needed
            home[j] = at
        elif not fresh and home[j] != SEVERAL and cost[home[j]] - price[depot[home[j]]] == cheapest:
            excess[depot[home[j]]] += needed
        else:
            home[j] = SEVERAL
            spread(rows, state, j, cheapest, needed)
    return -1


@part
def sum_of(flow: Integers) -> int:
    """The sum of a customer's quantities."""
    sent = 0
    for quantity in flow:
        sent += quantity
    return sent


@part
def measure(rows: Rows, state: State, chosen: Integers, gap: Integers) -> None:
    """Notes the gaps of the `chosen` customers at prices that have changed; their flow suits them already."""
    start, depot, cost, price = rows.start, rows.depot, rows.cost, state.price
    for n in range(len(chosen)):
        j = chosen[n]
        first, last = start[j], start[j + 1]
        if rows.demand[j] == 0:
            continue
        if rows.kind[j] & LIMITED:
            gap[n] = gap_limited(rows, state, j)
            continue
        cheapest, second = FAR, FAR
        if rows.kind[j] == COMPLETE:
            here = cost[first:last]
            for k in range(len(price)):
                reduced = here[k] - price[k]
                second = min(second, max(cheapest, reduced))
                cheapest = min(cheapest, reduced)
        else:
            for row in range(first, last):
                reduced = cost[row] - price[depot[row]]
                second = min(second, max(cheapest, reduced))
                cheapest = min(cheapest, reduced)
        gap[n] = second - cheapest


@part
def spread(rows: Rows, state: State, j: int, level: int, quantity: int) -> None:
    """Puts `quantity` on the rows that cost `level` at the prices, where it stood before as far as possible.

    Clears dearer rows and fills cheaper ones (which are limited, otherwise there are none). The rest
    goes to the depots that have most to spare. Adds all to `excess`.
    """
    first, last = rows.start[j], rows.start[j + 1]
    limited = rows.kind[j] & LIMITED
    flow, excess = state.flow, state.excess
    left = quantity
    for row in range(first, last):
        i = rows.depot[row]
        reduced = rows.cost[row] - state.price[i]
        kept = 0
        if reduced < level:
            kept = rows.room[row]
        elif reduced == level:
            kept = min(flow[row], left)
            if limited:
                kept = min(kept, rows.room[row])
            left -= kept
        flow[row] = kept
        excess[i] += kept
    while left > 0:
        chosen, least = first, UNLIMITED
        for row in range(first, last):
            i = rows.depot[row]
            if rows.cost[row] - state.price[i] == level and excess[i] < least:
                if limited and flow[row] == rows.room[row]:
                    continue
                chosen, least = row, excess[i]
        more = left
        if limited:
            more = min(left, rows.room[chosen] - flow[chosen])
        flow[chosen] += more
        excess[rows.depot[chosen]] += more
        left -= more


@part
def fill_limited(rows: Rows, state: State, j: int) -> bool:
    """Fills a limited customer's rows, cheapest first, each up to its room; False if that is not enough."""
    level, left = -FAR, rows.demand[j]
    while True:
        following, able = FAR, 0
        for row in range(rows.start[j], rows.start[j + 1]):
            reduced = rows.cost[row] - state.price[rows.depot[row]]
            if reduced <= level or reduced > following or rows.room[row] == 0:
                continue
            if reduced < following:
                following, able = reduced, 0
            able += min(rows.room[row], left - able)
        if following == FAR:
            return False
        level = following
        if able == left:
            break
        left -= able
    spread(rows, state, j, level, left)
    return True


@part
def gap_limited(rows: Rows, state: State, j: int) -> int:
    """The least that exchanging two different rows of a limited customer would cost per unit."""
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


@kernel
def take_over(rows: Rows, state: State, before: Integers, changed: Integers, known: int) -> int:
    """Fills the flow with that of an earlier problem, and serves the `changed` customers anew at its prices.

    before: (rows,) the earlier flow, which suits `state.price`
    known:  1, as every customer has flow; given, since a number written here would compile `assign` again
    `excess` comes as what the depots had too much before that, and is brought up to date.
    Returns the customer whose rows cannot carry what it needs, or -1.
    """
    copy_flow(rows, state, before)
    for j in changed:
        state.home[j] = SEVERAL
        for row in range(rows.start[j], rows.start[j + 1]):
            state.excess[rows.depot[row]] -= before[row]
    return assign(rows, state, changed, known, np.empty(len(changed), dtype=np.int64))


@part
def copy_flow(rows: Rows, state: State, before: Integers) -> None:
    """Fills `flow` and `home`; written so that it runs in vectors."""
    for j in range(len(rows.demand)):
        first, last = rows.start[j], rows.start[j + 1]
        old, new = before[first:last], state.flow[first:last]
        used, place = 0, 0
        for n in range(len(old)):
            carries = old[n] != 0
            new[n] = old[n]
            used += carries
            place |= n if carries else 0
        home = SEVERAL
        if used == 1 and not rows.kind[j] & LIMITED:
            home = first + place
        state.home[j] = home


@kernel
def price_customers(rows: Rows, state: State, customer_price: Integers) -> None:
    """What one more unit costs each customer at the depot prices, within what its rows allow."""
    start, depot, cost, price, flow = rows.start, rows.depot, rows.cost, state.price, state.flow
    for j in range(len(customer_price)):
        first, last = start[j], start[j + 1]
        cheapest_free, dearest_used = FAR, -FAR
        home = state.home[j]
        if home >= 0:
            cheapest_free = cost[home] - price[depot_of(rows, home, j)]
        elif rows.kind[j] == COMPLETE:
            here = cost[first:last]
            for k in range(len(price)):
                cheapest_free = min(cheapest_free, here[k] - price[k])
        else:
            limited = rows.kind[j] & LIMITED
            for row in range(first, last):
                reduced = cost[row] - price[depot[row]]
                if limited and flow[row] > 0:
                    dearest_used = max(dearest_used, reduced)
                if not limited or flow[row] < rows.room[row]:
                    cheapest_free = min(cheapest_free, reduced)
        if cheapest_free != FAR:
            customer_price[j] = cheapest_free
        elif dearest_used != -FAR:
            customer_price[j] = dearest_used
        else:
            customer_price[j] = 0
