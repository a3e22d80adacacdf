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
pivots repeats (Ahuja, Magnanti & Orlin 1993, chapter 11).
"""

from __future__ import annotations

from typing import Any, NamedTuple, cast

import numba
import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import part
from engine.network.problem import UNLIMITED
from engine.network.simplex_rows import Rows, types

ARTIFICIAL = -1
"""In `Tree.link`: the link to the root that stands for no rate row."""

LARGEST_PRICE = 2**58
"""No difference of two depot prices may exceed this, nor the root's own price."""

as_node: Any = np.uint32
as_place: Any = np.uint64
"""Unsigned, so that a kernel need not look whether an index counts from the end of an array."""

NOBODY: Any = as_node(2**32 - 1)
"""In `Tree.link` and `Tree.thread`: no such node."""

LINK = np.dtype(
    [("parent", "u4"), ("size", "i4"), ("flow", "i8"), ("room", "i8"), ("row", "i8"), ("cost", "i8")]
)
THREAD = np.dtype([("next", "u4"), ("before", "u4"), ("last", "u4"), ("unused", "u4")])
"""What a walk needs of one node stands side by side in memory: a pivot is a few such walks."""


class Tree(NamedTuple):
    """One entry per node.

    link: parent  NOBODY at the root and for customers that need nothing
          size    twice the number of depots (root included) at or below the node, plus 1 for customers: of
                  two nodes of which one is above the other, the upper one has the larger size
          flow    quantity on the link to the parent
          room    most that it can carry
          row     its rate row, or ARTIFICIAL
          cost    its cost of one unit
    thread: next    next node of the thread, NOBODY at its end
            before  node before this one in the thread
            last    last node of the thread that lies below this one; the node itself if none does
    price: of depots; what stands at customers has no meaning
    """

    link: NDArray[Any]
    thread: NDArray[Any]
    price: Integers


def empty_tree(depots: int, customers: int) -> Tree:
    """A tree of unlinked nodes: depots, root, customers, gate."""
    nodes = depots + customers + 2
    tree = Tree(np.zeros(nodes, LINK), np.zeros(nodes, THREAD), np.zeros(nodes, np.int64))
    tree.link["parent"] = NOBODY
    tree.link["room"] = UNLIMITED
    tree.link["row"] = ARTIFICIAL
    tree.thread["next"] = NOBODY
    tree.thread["before"] = NOBODY
    tree.thread["last"] = np.arange(nodes)
    return tree


NODE: Any = types.uint32
TREE: Any = cast(Any, numba.typeof)(empty_tree(0, 0))


@part
def replace_last(tree: Tree, node: int, old: int, new: int) -> None:
    """From `node` upwards, whoever had `old` as its last node has `new`."""
    while node != NOBODY and tree.thread[node].last == old:
        tree.thread[node].last = new
        node = tree.link[node].parent


@part
def follow(thread: NDArray[Any], node: int, follower: int) -> None:
    """In the thread `follower`, or nobody, comes next after `node`."""
    thread[node].next = follower
    if follower != NOBODY:
        thread[follower].before = node


@part
def enter_thread(tree: Tree, customer: int) -> None:
    """A customer that is about to get a depot below it takes its place after its parent."""
    upper = tree.link[customer].parent
    follow(tree.thread, customer, tree.thread[upper].next)
    follow(tree.thread, upper, customer)
    replace_last(tree, upper, upper, customer)


@part
def leave_thread(tree: Tree, customer: int) -> None:
    """A customer that has lost its last depot goes out of the thread."""
    earlier = tree.thread[customer].before
    follow(tree.thread, earlier, tree.thread[customer].next)
    replace_last(tree, tree.link[customer].parent, customer, earlier)


@part
def change_flow(link: NDArray[Any], node: int, end: int, push: int) -> None:
    """Adds `push` on the link of `node`, takes it off on the next, and so on up to `end`."""
    while node != end:
        link[node].flow += push
        push = -push
        node = link[node].parent


@part
def change_size(link: NDArray[Any], node: int, end: int, growth: int) -> None:
    """Adds `growth` to the size of `node` and all above it, up to but not including `end`."""
    while node != end:
        link[node].size += growth
        node = link[node].parent


@part
def raise_prices(tree: Tree, node: int, end: int, rise: int) -> None:
    """Adds `rise` to the prices of the stretch of the thread from `node` to `end`.

    From both ends at once: how long a walk takes is decided by the wait for each next node.
    """
    while node != end:
        tree.price[node] += rise
        node = tree.thread[node].next
        if node == end:
            break
        tree.price[end] += rise
        end = tree.thread[end].before
    tree.price[node] += rise


@part
def turn(tree: Tree, low: int, high: int, stop: int) -> int:
    """Turns the links between `low` and `stop` round, so that `low` becomes the top below `high`.

    Returns the last node of the part's new thread. `low` is left without the figures of its link.
    """
    link, thread = tree.link, tree.thread
    row, cost, flow, room = ARTIFICIAL, 0, 0, 0
    whole, below = link[stop].size & ~1, 0
    node, upper = low, high
    tail: int = NOBODY
    child_before = child_last = child_after = NOBODY
    while True:
        old_parent, old_size = link[node].parent, link[node].size
        old_row, old_cost, old_flow, old_room = (
            link[node].row, link[node].cost, link[node].flow, link[node].room
        )  # fmt: skip
        old_before, old_last = thread[node].before, thread[node].last
        link[node].parent = upper
        link[node].row, link[node].cost, link[node].flow, link[node].room = row, cost, flow, room
        link[node].size = whole - below + (old_size & 1)
        # A node keeps what lay below it apart from the part through which the walk came: the stretch of the
        # thread before that part, and the stretch after it.
        old_after = child_after if old_last == child_last else thread[old_last].next
        if node == low:
            tail = old_last
        else:
            follow(thread, tail, node)
            tail = child_before
            if child_last != old_last:
                follow(thread, tail, child_after)
                tail = old_last
        if node == stop:
            break
        child_before, child_last, child_after = old_before, old_last, old_after
        row, cost, flow, room = old_row, old_cost, old_flow, old_room
        below = old_size & ~1
        upper, node = node, old_parent
    while node != high:
        thread[node].last = tail
        node = link[node].parent
    return tail


@part
def rehang(tree: Tree, first: int, stop: int, low: int, high: int, join: int, rise: int) -> None:
    """Cuts the tree above `stop`, turns the part below so that `low` is its top, and hangs it on `high`.

    join: top of the cycle; above it no size changes
    rise: by how much the price of the depots in the moved part grows
    """
    if low >= first and tree.thread[low].last == low:
        enter_thread(tree, low)
    if high >= first and tree.thread[high].last == high:
        enter_thread(tree, high)
    top, moved = tree.link[stop].parent, tree.link[stop].size & ~1
    part_before, part_last = tree.thread[stop].before, tree.thread[stop].last
    part_after = tree.thread[part_last].next
    tail = turn(tree, low, high, stop)
    tree.thread[tail].next = NOBODY
    follow(tree.thread, part_before, part_after)
    replace_last(tree, top, part_last, part_before)
    change_size(tree.link, top, join, -moved)
    change_size(tree.link, high, join, moved)
    # Only differences of prices count, so the smaller of the two parts is changed; but the root's own price
    # is kept within bounds, so that no price can leave int64 however many pivots there are.
    root = as_node(first - 1)
    if moved > first and abs(tree.price[root] - rise) <= LARGEST_PRICE:
        raise_prices(tree, root, tree.thread[root].last, -rise)
    else:
        raise_prices(tree, low, tail, rise)
    follow(tree.thread, tail, tree.thread[high].next)
    follow(tree.thread, high, low)
    replace_last(tree, high, high, tail)
    if top >= first and tree.thread[top].last == top:
        leave_thread(tree, top)
    if stop >= first and tree.thread[stop].last == stop:
        leave_thread(tree, stop)


@part
def note_limits(
    full: NDArray[np.int8], filled: NDArray[np.int32], row: int, j: int, leaving: int, leaving_j: int
) -> None:
    """Writes down which rows are full: `row` of customer j goes into the tree, `leaving` fills up.

    leaving: a row of customer leaving_j; the same as `row` if that goes straight to its other limit;
             ARTIFICIAL if the row that leaves is emptied
    """
    if leaving == row:
        full[row] = 1 - full[row]
        filled[j] += 1 if full[row] else -1
    elif full[row]:
        full[row] = 0
        filled[j] -= 1
    if leaving != row and leaving != ARTIFICIAL:
        full[leaving] = 1
        filled[leaving_j] += 1


@part
def find_stop(
    tree: Tree, first: int, depot: int, customer: int, filling: bool, row_room: int
) -> tuple[int, int, int, bool]:
    """How much can be sent round the cycle, the node whose link stops it, the cycle's top, the stop's side.

    Among the links that stop it, the last one in the direction of the flow, counted from the top of the
    cycle, keeps the tree strongly feasible: ties go to the side that is walked last. The entering row
    itself, with its own room, lies between the two sides; the answer is NOBODY if it stops the cycle.
    """
    depot_push, customer_push = (row_room, UNLIMITED) if filling else (UNLIMITED, row_room)
    depot_stop = customer_stop = NOBODY
    while depot != customer:
        if tree.link[depot].size < tree.link[customer].size:
            able = (
                tree.link[depot].flow
                if (depot < first) == filling
                else tree.link[depot].room - tree.link[depot].flow
            )
            if able < depot_push or (able == depot_push and not filling):
                depot_push, depot_stop = able, depot
            depot = tree.link[depot].parent
        else:
            able = tree.link[customer].flow
            if (customer < first) == filling:
                able = tree.link[customer].room - able
            if able < customer_push or (able == customer_push and filling):
                customer_push, customer_stop = able, customer
            customer = tree.link[customer].parent
    depot_side = depot_push < customer_push or (depot_push == customer_push and not filling)
    if depot_side:
        return depot_push, depot_stop, depot, depot_side
    return customer_push, customer_stop, depot, depot_side


@part
def pivot(tree: Tree, rows: Rows, first: int, row: int, customer: int, reduced: int) -> None:
    """Brings `row` into the tree (or to its other limit), and takes the row out that stops it.

    first:    number of the node after the last depot and root, where customers begin
    customer: node that the row sends to
    reduced:  the row's cost minus both prices: below 0 to fill the row, above 0 to empty a full one
    """
    depot = as_node(rows.depot[row])
    limited = len(rows.room) > 0
    row_room = rows.room[row] if limited else UNLIMITED
    filling = reduced < 0
    push, stop, join, depot_side = find_stop(tree, first, depot, customer, filling, row_room)
    low, high, rise = (depot, customer, reduced) if depot_side else (customer, depot, -reduced)
    if push > 0:
        signed = push if filling else -push
        change_flow(tree.link, depot, join, -signed)
        change_flow(tree.link, customer, join, -signed)
    if limited:
        leaving, owner = row, customer
        if stop != NOBODY:
            emptied = ((stop < first) == depot_side) == filling
            leaving = ARTIFICIAL if emptied else tree.link[stop].row
            owner = stop if stop >= first else tree.link[stop].parent
        note_limits(rows.full, rows.filled, row, customer - first, leaving, owner - first)
    if stop != NOBODY:
        if stop == low and low >= first and tree.thread[low].last == low:
            tree.link[low].parent = high
        else:
            rehang(tree, first, stop, low, high, join, rise)
        tree.link[low].row, tree.link[low].cost, tree.link[low].room = row, rows.cost[row], row_room
        tree.link[low].flow = push if filling else row_room - push
