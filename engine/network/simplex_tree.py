"""The spanning tree of the network simplex, in flat arrays, and one pivot on it.

Nodes are numbered depots first, then the root, then the customers, then the gate through which unsent
goods return to the root. Flow on a row runs from depot to customer, so the node alone tells its
direction: a customer receives from its parent, a depot sends to its parent.

Most customers hang on one depot and have nothing below them. They stay outside the thread (the order in
which a walk down the tree meets its nodes): only depots and customers with a depot below are in it, at
most twice as many nodes as there are depots, however many customers there are. The price of a customer
is not stored either: it follows from its parent's, and so a pivot never visits such customers.

The tree is kept strongly feasible (Cunningham 1976): from every node a little more could be sent to the
root. The rule by which `pivot` chooses the row that leaves keeps it so, and then no sequence of
pivots repeats (Ahuja, Magnanti & Orlin 1993, sections 11.6 and 11.13).
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.problem import UNLIMITED
from engine.network.simplex_rows import INT, INTS, ROWS, VOID, Rows, signature, types

ARTIFICIAL = -1
"""In `Tree.row`: the link to the root that stands for no rate row."""

LARGEST_PRICE = 2**58
"""No difference of two depot prices may exceed this, nor the root's own price."""

NOBODY = -1
"""In `Tree.parent` and the thread: no such node."""


Nodes = NDArray[np.int32]
NODES: Any = types.int32[::1]


class Tree(NamedTuple):
    """One entry per node. `row`, `cost`, `flow` and `room` describe the link to the parent.

    parent: int32, NOBODY at the root and for customers that need nothing
    row:    rate row of the link, or ARTIFICIAL
    cost:   of one unit on the link
    flow:   quantity on the link
    room:   most that the link can carry
    next:   int32, next node of the thread, NOBODY at its end
    before: int32, node before this one in the thread
    last:   int32, last node of the thread that lies below this one; the node itself if none does
    size:   int32, twice the number of depots (root included) at or below the node, plus 1 for customers:
            of two nodes of which one is above the other, the upper one has the larger size
    price:  depot prices; what stands at customers has no meaning
    """

    parent: Nodes
    row: Integers
    cost: Integers
    flow: Integers
    room: Integers
    next: Nodes
    before: Nodes
    last: Nodes
    size: Nodes
    price: Integers


TREE: Any = types.NamedTuple([NODES] + [INTS] * 4 + [NODES] * 4 + [INTS], Tree)


def empty_tree(depots: int, customers: int) -> Tree:
    """A tree of unlinked nodes: depots, root, customers, gate."""
    nodes = depots + customers + 2
    return Tree(
        parent=np.full(nodes, NOBODY, dtype=np.int32),
        row=np.full(nodes, ARTIFICIAL, dtype=np.int64),
        cost=np.zeros(nodes, dtype=np.int64),
        flow=np.zeros(nodes, dtype=np.int64),
        room=np.full(nodes, UNLIMITED, dtype=np.int64),
        next=np.full(nodes, NOBODY, dtype=np.int32),
        before=np.full(nodes, NOBODY, dtype=np.int32),
        last=np.arange(nodes, dtype=np.int32),
        size=np.zeros(nodes, dtype=np.int32),
        price=np.zeros(nodes, dtype=np.int64),
    )


@kernel(signature(VOID, NODES, NODES, INT, INT, INT))
def replace_last(last: Nodes, parent: Nodes, node: int, old: int, new: int) -> None:
    """From `node` upwards, whoever had `old` as its last node has `new`."""
    while node != NOBODY and last[node] == old:
        last[node] = new
        node = parent[node]


@kernel(signature(VOID, NODES, NODES, INT, INT))
def follow(after: Nodes, before: Nodes, node: int, follower: int) -> None:
    """In the thread `follower`, or nobody, comes next after `node`."""
    after[node] = follower
    if follower != NOBODY:
        before[follower] = node


@kernel(signature(VOID, TREE, INT))
def enter_thread(tree: Tree, customer: int) -> None:
    """A customer that is about to get a depot below it takes its place after its parent."""
    upper = tree.parent[customer]
    follow(tree.next, tree.before, customer, tree.next[upper])
    follow(tree.next, tree.before, upper, customer)
    replace_last(tree.last, tree.parent, upper, upper, customer)


@kernel(signature(VOID, TREE, INT))
def leave_thread(tree: Tree, customer: int) -> None:
    """A customer that has lost its last depot goes out of the thread."""
    earlier = tree.before[customer]
    follow(tree.next, tree.before, earlier, tree.next[customer])
    replace_last(tree.last, tree.parent, tree.parent[customer], customer, earlier)


@kernel(signature(VOID, INTS, NODES, INT, INT, INT))
def change_flow(flow: Integers, parent: Nodes, node: int, end: int, push: int) -> None:
    """Adds `push` on the link of `node`, takes it off on the next, and so on up to `end`."""
    while node != end:
        flow[node] += push
        push = -push
        node = parent[node]


@kernel(signature(VOID, NODES, NODES, INT, INT, INT))
def change_size(size: Nodes, parent: Nodes, node: int, end: int, growth: int) -> None:
    """Adds `growth` to the size of `node` and all above it, up to but not including `end`."""
    while node != end:
        size[node] += growth
        node = parent[node]


@kernel(signature(VOID, INTS, NODES, INT, INT))
def raise_prices(price: Integers, after: Nodes, node: int, rise: int) -> None:
    """Adds `rise` to the prices of `node` and all that follow in the thread."""
    while node != NOBODY:
        price[node] += rise
        node = after[node]


@kernel(signature(INT, TREE, INT, INT, INT))
def turn(tree: Tree, low: int, high: int, stop: int) -> int:
    """Turns the links between `low` and `stop` round, so that `low` becomes the top below `high`.

    Returns the last node of the part's new thread. `low` is left without the figures of its link.
    """
    parent, after, before, last, size = tree.parent, tree.next, tree.before, tree.last, tree.size
    row, cost, flow, room = ARTIFICIAL, 0, 0, 0
    whole, below = size[stop] & ~1, 0
    node, upper = low, high
    tail = child_before = child_last = child_after = NOBODY
    while True:
        old_parent, old_before, old_last, old_size = parent[node], before[node], last[node], size[node]
        old_row, old_cost = tree.row[node], tree.cost[node]
        old_flow, old_room = tree.flow[node], tree.room[node]
        parent[node] = upper
        tree.row[node], tree.cost[node], tree.flow[node], tree.room[node] = row, cost, flow, room
        size[node] = whole - below + (old_size & 1)
        # A node keeps what lay below it apart from the part through which the walk came: the stretch of the
        # thread before that part, and the stretch after it.
        old_after = child_after if old_last == child_last else after[old_last]
        if node == low:
            tail = old_last
        else:
            follow(after, before, tail, node)
            tail = child_before
            if child_last != old_last:
                follow(after, before, tail, child_after)
                tail = old_last
        if node == stop:
            break
        child_before, child_last, child_after = old_before, old_last, old_after
        row, cost, flow, room = old_row, old_cost, old_flow, old_room
        below = old_size & ~1
        upper, node = node, old_parent
    while node != high:
        last[node] = tail
        node = parent[node]
    return tail


@kernel(signature(VOID, TREE, INT, INT, INT, INT, INT, INT))
def rehang(tree: Tree, first: int, stop: int, low: int, high: int, join: int, rise: int) -> None:
    """Cuts the tree above `stop`, turns the part below so that `low` is its top, and hangs it on `high`.

    join: top of the cycle; above it no size changes
    rise: by how much the price of the depots in the moved part grows
    """
    parent, after, before, last, size = tree.parent, tree.next, tree.before, tree.last, tree.size
    if stop == low and low >= first and last[low] == low:
        parent[low] = high
        return
    if low >= first and last[low] == low:
        enter_thread(tree, low)
    if high >= first and last[high] == high:
        enter_thread(tree, high)
    top, moved = parent[stop], size[stop] & ~1
    part_before, part_last = before[stop], last[stop]
    part_after = after[part_last]
    tail = turn(tree, low, high, stop)
    after[tail] = NOBODY
    follow(after, before, part_before, part_after)
    replace_last(last, parent, top, part_last, part_before)
    change_size(size, parent, top, join, -moved)
    change_size(size, parent, high, join, moved)
    # Only differences of prices count, so the smaller of the two parts is changed; but the root's own price
    # is kept within bounds, so that no price can leave int64 however many pivots there are.
    root = first - 1
    if moved > first and abs(tree.price[root] - rise) <= LARGEST_PRICE:
        raise_prices(tree.price, after, root, -rise)
    else:
        raise_prices(tree.price, after, low, rise)
    follow(after, before, tail, after[high])
    follow(after, before, high, low)
    replace_last(last, parent, high, high, tail)
    if top >= first and last[top] == top:
        leave_thread(tree, top)
    if stop >= first and last[stop] == stop:
        leave_thread(tree, stop)


@kernel(signature(VOID, ROWS, INT, INT, INT, INT))
def note_limits(rows: Rows, row: int, j: int, leaving: int, leaving_j: int) -> None:
    """Writes down which rows are full: `row` of customer j goes into the tree, `leaving` fills up.

    leaving: a row of customer leaving_j; the same as `row` if that goes straight to its other limit;
             ARTIFICIAL if the row that leaves is emptied
    """
    if leaving == row:
        rows.full[row] = 1 - rows.full[row]
        rows.filled[j] += 1 if rows.full[row] else -1
        return
    if rows.full[row]:
        rows.full[row] = 0
        rows.filled[j] -= 1
    if leaving != ARTIFICIAL:
        rows.full[leaving] = 1
        rows.filled[leaving_j] += 1


@kernel(signature(VOID, TREE, ROWS, INT, INT, INT, INT))
def pivot(tree: Tree, rows: Rows, first: int, row: int, customer: int, reduced: int) -> None:
    """Brings `row` into the tree (or to its other limit), and takes the row out that stops it.

    first:    number of the node after the last depot and root, where customers begin
    customer: node that the row sends to
    reduced:  the row's cost minus both prices: below 0 to fill the row, above 0 to empty a full one
    """
    parent, flow, room, size = tree.parent, tree.flow, tree.room, tree.size
    depot = rows.depot[row]
    limited = len(rows.room) > 0
    row_room = rows.room[row] if limited else UNLIMITED
    filling = reduced < 0
    # Among the rows that stop the cycle, the last one in the direction of the flow, counted from the top
    # of the cycle, keeps the tree strongly feasible: ties go to the side that is walked last.
    depot_push, depot_stop = (row_room, NOBODY) if filling else (UNLIMITED, NOBODY)
    customer_push, customer_stop = (UNLIMITED, NOBODY) if filling else (row_room, NOBODY)
    left, right = depot, customer
    while left != right:
        if size[left] < size[right]:
            able = flow[left] if (left < first) == filling else room[left] - flow[left]
            if able < depot_push or (able == depot_push and not filling):
                depot_push, depot_stop = able, left
            left = parent[left]
        else:
            able = flow[right] if (right >= first) == filling else room[right] - flow[right]
            if able < customer_push or (able == customer_push and filling):
                customer_push, customer_stop = able, right
            right = parent[right]
    join = left
    if customer_push < depot_push or (customer_push == depot_push and filling):
        push, stop, low, high, rise = customer_push, customer_stop, customer, depot, -reduced
    else:
        push, stop, low, high, rise = depot_push, depot_stop, depot, customer, reduced
    if push > 0:
        signed = push if filling else -push
        change_flow(flow, parent, depot, join, -signed)
        change_flow(flow, parent, customer, join, -signed)
    if limited:
        leaving, owner = row, customer
        if stop != NOBODY:
            emptied = ((stop < first) == (low == depot)) == filling
            leaving = ARTIFICIAL if emptied else tree.row[stop]
            owner = stop if stop >= first else parent[stop]
        note_limits(rows, row, customer - first, leaving, owner - first)
    if stop == NOBODY:
        return
    rehang(tree, first, stop, low, high, join, rise)
    tree.row[low], tree.cost[low], tree.room[low] = row, rows.cost[row], row_room
    flow[low] = push if filling else row_room - push
