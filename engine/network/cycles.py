"""Cancels cycles of partly filled rows, so that those that are left form a forest.

A forest of partly filled rows grows row by row. A row that would close a cycle sends as much round it as
fits, in the direction that is sooner at an end; the row that is then empty or full leaves the forest
(Ahuja, Magnanti & Orlin 1993, section 11.2, cycle-free solutions).
"""

from __future__ import annotations

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.problem import UNLIMITED, Figures

NOBODY = -1


@kernel
def cancel_cycles(figures: Figures, customer: Integers, quantity: Integers) -> None:
    """Changes `quantity` (rows,) until the rows above 0 and below `at_most` form no cycle.

    Sums stay as they are, limits are kept. Rows on a cycle must all be of one reduced cost for the cost to
    stay as it is, as at a least-cost flow. `customer` is the customer of each row; lower limits must be 0.
    """
    depots = len(figures.supply)
    parent = np.full(depots + len(figures.demand), NOBODY, dtype=np.int64)
    link = np.full(len(parent), NOBODY, dtype=np.int64)
    mark = np.full(len(parent), NOBODY, dtype=np.int64)
    stamp = 0
    for row in range(len(quantity)):
        while 0 < quantity[row] < cap_of(figures, row):
            depot_node, customer_node = figures.depot[row], depots + customer[row]
            # a new stamp each time: the forest may have changed since this row last looked
            stamp += 1
            join = meeting(parent, mark, depot_node, customer_node, stamp)
            if join == NOBODY:
                hang(parent, link, customer_node, depot_node, row)
                break
            # walking up from either end, rows are raised and lowered in turn; the new row is raised
            up, up_by = tightest(figures, parent, link, quantity, depot_node, join, -1)
            down, down_by = tightest(figures, parent, link, quantity, depot_node, join, 1)
            other, other_by = tightest(figures, parent, link, quantity, customer_node, join, -1)
            if other_by < up_by:
                up, up_by = other, other_by
            other, other_by = tightest(figures, parent, link, quantity, customer_node, join, 1)
            if other_by < down_by:
                down, down_by = other, other_by
            if cap_of(figures, row) - quantity[row] < up_by:
                up, up_by = NOBODY, cap_of(figures, row) - quantity[row]
            if quantity[row] < down_by:
                down, down_by = NOBODY, quantity[row]
            leaving, amount = (up, up_by) if up_by < down_by else (down, -down_by)
            quantity[row] += amount
            push(parent, link, quantity, depot_node, join, -amount)
            push(parent, link, quantity, customer_node, join, -amount)
            if leaving != NOBODY:
                parent[leaving] = NOBODY
                link[leaving] = NOBODY


@part
def cap_of(figures: Figures, row: int) -> int:
    """Most that a row may carry."""
    return figures.at_most[row] if len(figures.at_most) else UNLIMITED


@part
def meeting(parent: Integers, mark: Integers, one: int, other: int, stamp: int) -> int:
    """The first node that both ends have above them, NOBODY if they are in different trees."""
    node = one
    while node != NOBODY:
        mark[node] = stamp
        node = parent[node]
    node = other
    while node != NOBODY and mark[node] != stamp:
        node = parent[node]
    return node


@part
def hang(parent: Integers, link: Integers, node: int, below: int, row: int) -> None:
    """Turns the tree of `node` so that `node` is its root, and hangs it below `below` by `row`."""
    while node != NOBODY:
        next_node, next_row = parent[node], link[node]
        parent[node], link[node] = below, row
        below, node, row = node, next_node, next_row


@part
def tightest(
    figures: Figures, parent: Integers, link: Integers, quantity: Integers, node: int, join: int, sign: int
) -> tuple[int, int]:
    """On the way up to `join`, the node whose row allows least; the first row changes by `sign`."""
    tight, least = NOBODY, UNLIMITED
    while node != join:
        row = link[node]
        able = quantity[row] if sign < 0 else cap_of(figures, row) - quantity[row]
        if able < least:
            tight, least = node, able
        sign = -sign
        node = parent[node]
    return tight, least


@part
def push(parent: Integers, link: Integers, quantity: Integers, node: int, join: int, amount: int) -> None:
    """Changes the rows on the way up to `join` by `amount`, down and up in turn."""
    while node != join:
        quantity[link[node]] += amount
        amount = -amount
        node = parent[node]
