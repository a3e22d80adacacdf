"""Which row enters the tree next, and the loop that pivots until no row is left that would save anything.

Rows that may enter are picked from a short list of candidates (Mulvey 1978, from memory): of each customer
the row that is cheapest against the present prices, found in one streaming pass over the customer's rows.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.simplex_rows import INT, INTS, NEVER, ROWS, VOID, Rows, signature, types
from engine.network.simplex_tree import ARTIFICIAL, NOBODY, TREE, Tree, pivot

CANDIDATES = 16
"""Length of the list of candidates: between 8 and 32 no difference could be measured, 4 and 64 are slower."""


class Candidates(NamedTuple):
    """Rows that may enter the tree.

    row:   (CANDIDATES,) the row
    node:  (CANDIDATES,) its customer's node
    found: (2,) how many there are; the customer to look at next
    """

    row: Integers
    node: Integers
    found: Integers


CANDIDATE_LIST: Any = types.NamedUniTuple(INTS, 3, Candidates)


@kernel(signature(INT, TREE, ROWS, INT, INT))
def best_with_limits(tree: Tree, rows: Rows, first: int, j: int) -> int:
    """The row that saves most of a customer that has full rows, or -1; a full row saves by carrying less."""
    customer_price = tree.cost[first + j] - tree.price[tree.parent[first + j]]
    most, chosen = 0, -1
    for row in range(rows.start[j], rows.start[j + 1]):
        saving = customer_price + tree.price[rows.depot[row]] - rows.cost[row]
        if rows.full[row]:
            saving = -saving
        if saving > most:
            most, chosen = saving, row
    return chosen


@kernel(signature(VOID, TREE, ROWS, INT, CANDIDATE_LIST))
def look_further(tree: Tree, rows: Rows, first: int, candidates: Candidates) -> None:
    """Goes from customer to customer until the list is full or everybody was looked at."""
    customers = len(rows.filled)
    cost, depot, price = rows.cost, rows.depot, tree.price
    count, j = candidates.found[0], candidates.found[1]
    looked = 0
    while count < CANDIDATES and looked < customers:
        node, chosen = first + j, -1
        parent = tree.parent[node]
        begin, end = rows.start[j], rows.start[j + 1]
        if parent == NOBODY:
            pass
        elif rows.filled[j]:
            chosen = best_with_limits(tree, rows, first, j)
        else:
            # With no choice to remember, the smallest is found several rows at a time.
            customer_price = tree.cost[node] - price[parent]
            least = customer_price
            costs = cost[begin:end]
            if rows.every:
                for i in range(len(costs)):
                    least = min(least, costs[i] - price[i])
            else:
                depots = depot[begin:end]
                for n in range(len(costs)):
                    least = min(least, costs[n] - price[depots[n]])
            if least < customer_price:
                chosen = begin
                while cost[chosen] - price[depot[chosen]] != least:
                    chosen += 1
        if chosen >= 0:
            candidates.row[count], candidates.node[count] = chosen, node
            count += 1
        j = j + 1 if j + 1 < customers else 0
        looked += 1
    candidates.found[0], candidates.found[1] = count, j


@kernel(signature(INT, TREE, ROWS, INT))
def improve(tree: Tree, rows: Rows, first: int) -> int:
    """Pivots until no row is left that would save anything; how many pivots that took."""
    row_of = np.empty(CANDIDATES, dtype=np.int64)
    node_of = np.empty(CANDIDATES, dtype=np.int64)
    candidates = Candidates(row_of, node_of, np.zeros(2, dtype=np.int64))
    limited = len(rows.room) > 0
    pivots = 0
    while True:
        look_further(tree, rows, first, candidates)
        count = candidates.found[0]
        if count == 0:
            return pivots
        enough = 1
        while True:
            most, chosen, place = 0, -1, 0
            while place < count:
                row, node = row_of[place], node_of[place]
                price_there = tree.cost[node] - tree.price[tree.parent[node]]
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
            # Rows that save much less than the first of this list did wait until the list is full again.
            if most < enough:
                break
            enough = max(enough, most // 4)
            row, node = row_of[chosen], node_of[chosen]
            count -= 1
            row_of[chosen], node_of[chosen] = row_of[count], node_of[count]
            pivot(tree, rows, first, row, node, most if limited and rows.full[row] else -most)
            pivots += 1
        candidates.found[0] = count


@kernel(signature(VOID, TREE, ROWS, INT, INTS, INTS))
def read_off(tree: Tree, rows: Rows, first: int, quantity: Integers, customer_price: Integers) -> None:
    """Quantities above the lower limits, and the customers' prices that go with the depots'."""
    for row in range(len(rows.full)):
        if rows.full[row]:
            quantity[row] = rows.room[row]
    for node in range(len(tree.parent) - 1):
        if tree.row[node] != ARTIFICIAL:
            quantity[tree.row[node]] = tree.flow[node]
    for j in range(len(customer_price)):
        parent = tree.parent[first + j]
        if parent != NOBODY:
            customer_price[j] = tree.cost[first + j] - tree.price[parent]
            continue
        # A customer that needs nothing more: any price will do that makes no row attractive.
        least = NEVER
        for row in range(rows.start[j], rows.start[j + 1]):
            if rows.cost[row] < NEVER:
                least = min(least, rows.cost[row] - tree.price[rows.depot[row]])
        customer_price[j] = least if least < NEVER else 0
