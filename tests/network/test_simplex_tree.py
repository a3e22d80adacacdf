"""After every single pivot the tree is what a slow reading of its parents says, and strongly feasible."""

from __future__ import annotations

import numba
import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.network import Contradiction, Problem
from engine.network.problem import UNLIMITED
from engine.network.simplex_rows import NEVER, Rows, above_lower_limits
from engine.network.simplex_start import Hint, first_tree
from engine.network.simplex_tree import ARTIFICIAL, NOBODY, Tree, as_node, pivot
from tests.network.cases import problems


@numba.njit
def one_pivot(tree: Tree, rows: Rows, first: int, row: int, node: int, reduced: int) -> None:
    """Parts of kernels cannot be called from outside, so this is one."""
    pivot(tree, rows, as_node(first), row, as_node(node), reduced)


def check_tree(problem: Problem, tree: Tree, rows: Rows, left: list[int], need: list[int]) -> None:
    """Recomputes everything from the parents; the rules are in the docstring of `Tree`."""
    first, nodes = problem.depots + 1, len(tree.link)
    root, gate = problem.depots, nodes - 1
    children: dict[int, list[int]] = {node: [] for node in range(nodes)}
    members = [node for node in range(nodes) if node == root or tree.link["parent"][node] != NOBODY]
    for node in members:
        if node != root:
            children[int(tree.link["parent"][node])].append(node)
    threaded = {node for node in members if node < first or any(child < root for child in children[node])}

    def below(node: int) -> list[int]:
        return [node] + [deeper for child in children[node] for deeper in below(child)]

    assert sorted(below(root)) == sorted(members)
    order = [root]
    while tree.thread["next"][order[-1]] != NOBODY:
        order.append(int(tree.thread["next"][order[-1]]))
        assert tree.thread["before"][order[-1]] == order[-2]
    assert sorted(order) == sorted(threaded)
    for node in members:
        part = [deeper for deeper in below(node) if deeper in threaded]
        depots = [deeper for deeper in part if deeper < first]
        assert tree.link["size"][node] == 2 * len(depots) + (node >= first)
        if node in threaded:
            place = order.index(node)
            assert sorted(order[place : place + len(part)]) == sorted(part)
            assert tree.thread["last"][node] == order[place + len(part) - 1]
        else:
            assert tree.thread["last"][node] == node
        if node < root:
            above = int(tree.link["parent"][node])
            price_there = tree.link["cost"][above] - tree.price[tree.link["parent"][above]]
            assert tree.price[node] == tree.link["cost"][node] - price_there
    sent = dict.fromkeys(range(problem.depots), 0)
    received = dict.fromkeys(range(problem.customers), 0)
    for node in members:
        if node == root:
            continue
        # strongly feasible: a little more can be sent to the root from everywhere
        flow, row = int(tree.link["flow"][node]), int(tree.link["row"][node])
        assert 0 <= flow <= tree.link["room"][node]
        assert flow > 0 if node >= first else flow < tree.link["room"][node]
        customer = node if node >= first else int(tree.link["parent"][node])
        depot = int(tree.link["parent"][node]) if node >= first else node
        if depot != root:
            sent[depot] += flow
        if customer != gate:
            received[customer - first] += flow
        if row != ARTIFICIAL:
            assert (rows.depot[row], tree.link["cost"][node]) == (depot, rows.cost[row])
            assert rows.start[customer - first] <= row < rows.start[customer - first + 1]
            assert len(rows.full) == 0 or rows.full[row] == 0
    filled = dict.fromkeys(range(problem.customers), 0)
    for row in np.flatnonzero(rows.full).tolist():
        sent[int(rows.depot[row])] += int(rows.room[row])
        received[int(problem.customer[row])] += int(rows.room[row])
        filled[int(problem.customer[row])] += 1
    assert list(sent.values()) == left
    assert list(received.values()) == need
    assert list(filled.values()) == rows.filled.tolist()


@settings(max_examples=400, deadline=None)
@given(problems(largest_depots=7, largest_customers=8), st.data())
def test_every_pivot_keeps_the_tree(problem: Problem, data: st.DataObject) -> None:
    try:
        rows, left, need = above_lower_limits(problem)
    except Contradiction:
        return
    all_left, all_need = left.tolist(), need.tolist()
    guess = np.array(
        data.draw(st.lists(st.integers(0, 20), min_size=problem.depots, max_size=problem.depots))
    )
    earlier = np.empty(0, dtype=np.int64)
    if data.draw(st.booleans()):
        figures = st.sampled_from([0, 0, 1, 5, UNLIMITED])
        earlier = np.array(
            data.draw(st.lists(figures, min_size=problem.rows, max_size=problem.rows)), dtype=np.int64
        )
    tree = first_tree(rows, left, need, Hint(guess.astype(np.int64), earlier), 10**16)
    first = problem.depots + 1
    check_tree(problem, tree, rows, all_left, all_need)
    for _ in range(300):
        eligible = []
        for row in range(problem.rows):
            node = first + int(problem.customer[row])
            if tree.link["parent"][node] == NOBODY or rows.cost[row] == NEVER:
                continue
            price_there = int(tree.link["cost"][node]) - int(tree.price[tree.link["parent"][node]])
            reduced = int(rows.cost[row]) - int(tree.price[rows.depot[row]]) - price_there
            full = len(rows.full) > 0 and rows.full[row]
            if reduced > 0 if full else reduced < 0:
                eligible.append((row, node, reduced))
        if not eligible:
            return
        one_pivot(tree, rows, first, *data.draw(st.sampled_from(eligible)))
        check_tree(problem, tree, rows, all_left, all_need)
    raise AssertionError("300 pivots on a problem this small: the simplex repeats itself")
