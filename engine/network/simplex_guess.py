"""Guesses at the prices before the first tree is built, and the order in which the rows are then used.

A customer's price is guessed as what its dearest row would cost if it could choose its rows freely; a
depot's likewise, as what its dearest row would cost if it could choose its customers freely. Taken in turn,
these are steps of coordinate ascent on the dual problem (Bertsekas 1991, from memory). Nothing depends
on their quality but the number of pivots: measured, one round halves it.
"""

from __future__ import annotations

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.simplex_rows import INTS, VOID, Rows, signature

ROUNDS = 1
"""How often depots' prices are guessed; a second round saved less than it took (measured)."""


def cheapest_first(rows: Rows, left: Integers, need: Integers, price: Integers) -> tuple[Integers, Integers]:
    """Depot prices, the lowest 0, and all rows in the order of what they cost beyond both prices.

    left: (depots,) what each depot has; need: (customers,) what each customer needs
    price: (depots,) prices to start from
    """
    customer = owners(rows)
    room = np.minimum(left[rows.depot], need[customer])
    cost = rows.cost
    if len(rows.room):
        room = np.minimum(room, rows.room)
        open_rows = rows.room > 0
        cost = np.where(open_rows, cost, cost[open_rows].max(initial=0))
    for _ in range(ROUNDS):
        beyond = cost - price[rows.depot]
        customer_price = np.zeros(len(need), dtype=np.int64)
        find_dearest(_ascending(beyond), beyond, customer, room, need.copy(), customer_price)
        beyond = cost - customer_price[customer]
        price = np.zeros(len(left), dtype=np.int64)
        find_dearest(_ascending(beyond), beyond, rows.depot, room, left.copy(), price)
    beyond = cost - price[rows.depot]
    customer_price = np.zeros(len(need), dtype=np.int64)
    find_dearest(_ascending(beyond), beyond, customer, room, need.copy(), customer_price)
    beyond -= customer_price[customer]
    return price - price.min(initial=0), _ascending(beyond)


def owners(rows: Rows) -> Integers:
    """(rows,) the customer of each row."""
    return np.repeat(np.arange(len(rows.filled)), np.diff(rows.start))


def _ascending(figures: Integers) -> Integers:
    """Positions of `figures` in ascending order, almost: sorted as one number with their positions.

    That is several times faster than sorting positions; where both do not fit into 63 bits, low digits of
    the figures are left out.
    """
    if len(figures) == 0:
        return np.empty(0, dtype=np.int64)
    lowest = int(figures.min())
    bits = len(figures).bit_length()
    spare = max(0, (int(figures.max()) - lowest).bit_length() + bits - 63)
    keys = (((figures - lowest) >> spare) << bits) | np.arange(len(figures))
    keys.sort()
    keys &= (1 << bits) - 1
    return keys


@kernel(signature(VOID, INTS, INTS, INTS, INTS, INTS, INTS))
def find_dearest(
    order: Integers, beyond: Integers, owner: Integers, room: Integers, goal: Integers, price: Integers
) -> None:
    """What the dearest row costs when each owner uses its rows in `order` until its goal is reached."""
    for row in order:
        whose = owner[row]
        if goal[whose] > 0 and room[row] > 0:
            goal[whose] -= room[row]
            price[whose] = beyond[row]
