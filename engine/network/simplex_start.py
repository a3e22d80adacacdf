"""The first spanning tree: from an earlier flow, or from rows sorted by guessed prices, or by customers.

Every step sends as much as it can on one row, and so uses up the depot, meets the customer's need or fills
the row. A used-up depot then hangs below the customer, a served customer below the depot: whatever the order
of the steps, no cycle can arise and the tree is strongly feasible. What no row can bring comes from the root,
what no row takes goes back there, at a cost that no real detour reaches.

An earlier flow is sent again as far as it fits. Without one, where many limits bind, the rows are taken in
the order of their cost beyond guessed prices. Whoever still needs something then takes its cheapest rows,
customers in the order of what it would cost them to get their second choice (the idea of Vogel's method:
Reinfeld & Vogel 1958, from memory).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.simplex_guess import cheapest_first, owners
from engine.network.simplex_rows import INT, INTS, NEVER, ROWS, VOID, Rows, signature
from engine.network.simplex_tree import ARTIFICIAL, NOBODY, NODE, TREE, Tree, as_node, empty_tree

MANY_ROWS = 100
"""Per depot and customer: with more, sorting all rows takes longer than it saves in pivots; and so it does
without limits that bind (measured with none, and with limits on all rows: a third fewer pivots and more)."""


class Hint(NamedTuple):
    """What is known before the start.

    price:    (depots,) guess at the depot prices, the lowest 0
    quantity: (rows,) guess at the quantities above the lower limits, or empty
    """

    price: Integers
    quantity: Integers


def first_tree(rows: Rows, left: Integers, need: Integers, hint: Hint, big: int) -> Tree:
    """A strongly feasible spanning tree; `left` and `need` are used up, `rows.full` is filled in.

    left: (depots,) what each depot has; need: (customers,) what each customer needs; same totals
    big:  cost of a unit to or from the root, more than any way round between two nodes
    """
    depots, customers = len(left), len(need)
    tree = empty_tree(depots, customers)
    kept = int(left.sum()) + 1
    price = hint.price
    if len(hint.quantity):
        again = np.flatnonzero(hint.quantity > 0)
        replay(tree, rows, left, need, again, hint.quantity[again])
    elif 8 * rows.binding > len(rows.cost) and len(rows.cost) < MANY_ROWS * (depots + customers):
        price, order = cheapest_first(rows, left, need, price)
        price = np.minimum(price, big)
        use(tree, rows, left, need, order, owners(rows))
    regret = np.empty(customers, dtype=np.int64)
    find_regret(rows, left, need, price, regret)
    waiting = np.flatnonzero(need)
    fill(tree, rows, left, need, price, waiting[np.argsort(-regret[waiting], kind="stable")], big)
    gate = depots + 1 + customers
    parent, flow = tree.link["parent"], tree.link["flow"]
    parent[gate], flow[gate] = depots, kept - int(left.sum())
    loose = np.flatnonzero(parent[:depots] == NOBODY)
    parent[loose], flow[loose] = gate, left[loose]
    tree.link["cost"][loose] = big + price[loose]
    grow(tree, depots + 1)
    return tree


@part
def link(tree: Tree, rows: Rows, node: int, parent: int, row: int, amount: int) -> None:
    """Hangs `node` below `parent` by `row`, which carries `amount`."""
    tree.link[node].parent, tree.link[node].row = parent, row
    tree.link[node].cost, tree.link[node].flow = rows.cost[row], amount
    if len(rows.room):
        tree.link[node].room = rows.room[row]


@part
def send(tree: Tree, rows: Rows, left: Integers, need: Integers, row: int, j: int) -> None:
    """Sends as much on `row` as depot, customer `j` and row allow, and links who is done."""
    i, customer = rows.depot[row], len(left) + 1 + j
    amount = min(left[i], need[j])
    limited = len(rows.room) > 0
    if limited and rows.room[row] <= amount and rows.room[row] < need[j]:
        amount = rows.room[row]
        rows.full[row] = 1
        rows.filled[j] += 1
    elif amount == need[j]:
        link(tree, rows, customer, i, row, amount)
    else:
        link(tree, rows, i, customer, row, amount)
    left[i] -= amount
    need[j] -= amount


@kernel(signature(VOID, TREE, ROWS, INTS, INTS, INTS, INTS))
def use(tree: Tree, rows: Rows, left: Integers, need: Integers, order: Integers, owner: Integers) -> None:
    """Sends as much as possible on each row in `order`; owner: (rows,) the customer of each row."""
    limited = len(rows.room) > 0
    for row in order:
        needed = left[rows.depot[row]] > 0 and need[owner[row]] > 0
        if needed and not (limited and rows.room[row] == 0):
            send(tree, rows, left, need, row, owner[row])


@kernel(signature(VOID, ROWS, INTS, INTS, INTS, INTS))
def find_regret(rows: Rows, left: Integers, need: Integers, price: Integers, regret: Integers) -> None:
    """How much dearer each customer's second cheapest row is than its cheapest, after depot prices."""
    for j in range(len(need)):
        best = second = NEVER
        if need[j] > 0:
            for row in range(rows.start[j], rows.start[j + 1]):
                i = rows.depot[row]
                if left[i] > 0:
                    net = rows.cost[row] - price[i]
                    second = min(second, max(best, net))
                    best = min(best, net)
        regret[j] = second - best


@kernel(signature(VOID, TREE, ROWS, INTS, INTS, INTS, INTS, INT))
def fill(
    tree: Tree, rows: Rows, left: Integers, need: Integers, price: Integers, order: Integers, big: int
) -> None:
    """Gives each customer in `order` its cheapest rows, after depot prices, and the rest from the root."""
    root = len(left)
    limited = len(rows.room) > 0
    for j in order:
        while need[j] > 0:
            best, chosen = NEVER, rows.start[j]
            for row in range(rows.start[j], rows.start[j + 1]):
                i = rows.depot[row]
                if left[i] > 0:
                    net = rows.cost[row] - price[i]
                    if net < best and not (limited and (rows.full[row] or rows.room[row] == 0)):
                        best, chosen = net, row
            if best < NEVER:
                send(tree, rows, left, need, chosen, j)
                continue
            customer = root + 1 + j
            tree.link[customer].parent, tree.link[customer].row = root, ARTIFICIAL
            tree.link[customer].cost, tree.link[customer].flow = big, need[j]
            need[j] = 0


@kernel(signature(VOID, TREE, ROWS, INTS, INTS, INTS, INTS))
def replay(
    tree: Tree, rows: Rows, left: Integers, need: Integers, again: Integers, quantity: Integers
) -> None:
    """Sends again what an earlier flow sent on the rows `again`, as far as it still fits.

    Rows that were full come first. The others are taken from the leaves of their forest inwards, since only
    in that order sending as much as possible on each row gives the same quantities again.

    again: rows in ascending order; quantity: what was sent on each of them
    """
    depots = len(left)
    limited = len(rows.room) > 0
    owner = np.empty(len(again), dtype=np.int64)
    waiting = np.zeros(len(again), dtype=np.bool_)
    degree = np.zeros(depots + len(need), dtype=np.int64)
    key = np.zeros(depots + len(need), dtype=np.int64)  # exclusive or of the rows that wait at a node
    j = 0
    for n in range(len(again)):
        row, i = again[n], rows.depot[again[n]]
        while rows.start[j + 1] <= row:
            j += 1
        owner[n] = j
        full = limited and rows.room[row] <= quantity[n]
        if full and rows.room[row] <= left[i] and rows.room[row] < need[j]:
            if rows.room[row] > 0:
                send(tree, rows, left, need, row, j)
        elif not limited or rows.room[row] > 0:
            waiting[n] = True
            for node in (i, depots + j):
                degree[node] += 1
                key[node] ^= n
    stack = np.empty(len(degree), dtype=np.int64)
    height = 0
    for node in range(len(degree)):
        if degree[node] == 1:
            stack[height] = node
            height += 1
    for spare in range(len(again)):
        while height > 0 or waiting[spare]:
            n = spare  # where no leaf is left there is a cycle, which any row breaks
            if height > 0:
                height -= 1
                if degree[stack[height]] != 1:
                    continue
                n = key[stack[height]]
            waiting[n] = False
            i, j = rows.depot[again[n]], owner[n]
            if left[i] > 0 and need[j] > 0:
                send(tree, rows, left, need, again[n], j)
            for node in (i, depots + j):
                key[node] ^= n
                degree[node] -= 1
                if degree[node] == 1:
                    stack[height] = node
                    height += 1


@kernel(signature(VOID, TREE, NODE))
def grow(tree: Tree, first: int) -> None:
    """Fills in thread, last nodes, sizes and depot prices from the parents."""
    nodes, root = len(tree.link), as_node(first - 1)
    child = np.full(nodes, NOBODY)
    sibling = np.full(nodes, NOBODY)
    for depot in range(root):
        customer = tree.link[depot].parent
        if child[customer] == NOBODY:
            above = tree.link[customer].parent
            sibling[customer], child[above] = child[above], customer
        sibling[depot], child[customer] = child[customer], depot
    for node in range(nodes):
        tree.link[node].size = 2 if node < first else 1
    node, before = root, NOBODY
    while True:
        parent = tree.link[node].parent
        if node < root:
            price_there = tree.link[parent].cost - tree.price[tree.link[parent].parent]
            tree.price[node] = tree.link[node].cost - price_there
        tree.thread[node].before = before
        if before != NOBODY:
            tree.thread[before].next = node
        before = node
        if child[node] != NOBODY:
            node = child[node]
            continue
        while True:
            tree.thread[node].last = before
            if node == root:
                return
            parent = tree.link[node].parent
            tree.link[parent].size += tree.link[node].size & ~1
            if sibling[node] != NOBODY:
                break
            node = parent
        node = sibling[node]
