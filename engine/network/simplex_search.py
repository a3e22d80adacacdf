"""Which row enters the tree next, and the loop that pivots until no row is left that would save anything.

Rows that may enter are picked from a short list of candidates (Mulvey 1978, from memory): of each customer
the row that is cheapest against the present prices, found in one streaming pass over the customer's rows.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.simplex_rows import INT, INTS, NEVER, ROWS, VOID, Rows, signature, types
from engine.network.simplex_tree import ARTIFICIAL, NOBODY, TREE, Tree, as_node, as_place, pivot

FEWEST, MOST = 16, 128
"""Length of the list of candidates: a longer list needs fewer pivots and more reading. Pivots are dear where
there are many depots, reading is dear where each customer has many rows: in between, depots / rows per
customer (measured on 20 to 2,500 depots and 5 to 1,000 rows; half or twice as much is nearly as fast)."""


class Candidates(NamedTuple):
    """Rows that may enter the tree.

    row:   the row
    node:  its customer's node
    found: (2,) how many there are; the customer to look at next
    """

    row: Integers
    node: Integers
    found: Integers


CANDIDATE_LIST: Any = types.NamedUniTuple(INTS, 3, Candidates)


@part
def cheapest_of_all(cost: Integers, price: Integers, customer_price: int) -> int:
    """The depot whose row costs least after depot prices, if less than `customer_price`, or else -1.

    Without a choice to remember, the smallest is found several rows at a time.
    """
    least, chosen = customer_price, -1
    for i in range(len(cost)):
        least = min(least, cost[i] - price[i])
    if least < customer_price:
        chosen = 0
        while cost[chosen] - price[chosen] != least:
            chosen += 1
    return chosen


@part
def most_saving(rows: Rows, price: Integers, j: int, customer_price: int) -> int:
    """Customer j's row that saves most by carrying more or, where it is full, less; -1 if none does."""
    most, chosen = 0, -1
    some_full = rows.filled[j] > 0
    for row in range(as_place(rows.start[j]), as_place(rows.start[j + 1])):
        saving = customer_price + price[as_place(rows.depot[row])] - rows.cost[row]
        if some_full and rows.full[row]:
            saving = -saving
        if saving > most:
            most, chosen = saving, row
    return chosen


@part
def look_further(tree: Tree, rows: Rows, first: int, candidates: Candidates) -> None:
    """Goes from customer to customer until the list is full or everybody was looked at."""
    customers = len(rows.filled)
    count, j = candidates.found[0], candidates.found[1]
    looked = 0
    while count < len(candidates.row) and looked < customers:
        node = as_node(first + j)
        parent = tree.link[node].parent
        if parent != NOBODY:
            customer_price = tree.link[node].cost - tree.price[parent]
            if rows.every and rows.filled[j] == 0:
                costs = rows.cost[rows.start[j] : rows.start[j + 1]]
                chosen = cheapest_of_all(costs, tree.price, customer_price)
                if chosen >= 0:
                    chosen += rows.start[j]
            else:
                chosen = most_saving(rows, tree.price, j, customer_price)
            if chosen >= 0:
                candidates.row[count], candidates.node[count] = chosen, node
                count += 1
        j = j + 1 if j + 1 < customers else 0
        looked += 1
    candidates.found[0], candidates.found[1] = count, j


@kernel(signature(INT, TREE, ROWS, INT))
def improve(tree: Tree, rows: Rows, first: int) -> int:
    """Pivots until no row is left that would save anything; how many pivots that took."""
    length = min(max(FEWEST, (first - 1) * len(rows.filled) // (1 + len(rows.cost))), MOST)
    row_of = np.empty(length, dtype=np.int64)
    node_of = np.empty(length, dtype=np.int64)
    candidates = Candidates(row_of, node_of, np.zeros(2, dtype=np.int64))
    limited = len(rows.room) > 0
    pivots = 0
    while True:
        look_further(tree, rows, first, candidates)
        count = candidates.found[0]
        if count == 0:
            return pivots
        while count > 0:
            most, chosen, place = 0, -1, 0
            while place < count:
                row, node = row_of[place], as_node(node_of[place])
                price_there = tree.link[node].cost - tree.price[tree.link[node].parent]
                saving = price_there + tree.price[rows.depot[row]] - rows.cost[row]
                if limited and rows.full[row]:
                    saving = -saving
                if saving <= 0:
                    count -= 1
                    row_of[place], node_of[place] = row_of[count], node_of[count]
                    continue
                if saving > most:
                    most, chosen = saving, place
                place += 1
            if chosen < 0:
                break
            row, node = row_of[chosen], as_node(node_of[chosen])
            count -= 1
            row_of[chosen], node_of[chosen] = row_of[count], node_of[count]
            pivot(tree, rows, as_node(first), row, node, most if limited and rows.full[row] else -most)
            pivots += 1
        candidates.found[0] = count


@kernel(signature(VOID, TREE, ROWS, INT, INTS, INTS))
def read_off(tree: Tree, rows: Rows, first: int, quantity: Integers, customer_price: Integers) -> None:
    """Quantities above the lower limits, and the customers' prices that go with the depots'."""
    for row in range(len(rows.full)):
        if rows.full[row]:
            quantity[row] = rows.room[row]
    for node in range(len(tree.link) - 1):
        if tree.link[node].row != ARTIFICIAL:
            quantity[tree.link[node].row] = tree.link[node].flow
    for j in range(len(customer_price)):
        parent = tree.link[first + j].parent
        if parent != NOBODY:
            customer_price[j] = tree.link[first + j].cost - tree.price[parent]
            continue
        # A customer that needs nothing more: any price will do that makes no row attractive.
        least = NEVER
        for row in range(rows.start[j], rows.start[j + 1]):
            if rows.cost[row] < NEVER:
                least = min(least, rows.cost[row] - tree.price[rows.depot[row]])
        customer_price[j] = least if least < NEVER else 0
