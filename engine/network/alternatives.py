"""Which rows could carry less or more without changing the cost: the lanes that are interchangeable.

A row may change at no cost if it lies on a cycle of tied rows (r = 0) along which goods can go round, and
which does not merely go back on the same row.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.flow import Flow
from engine.network.ties import reduced_costs


def exchangeable(flow: Flow) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """(rows,) whether a row could carry less, and whether it could carry more, at the same total cost.

    Exact whatever prices the flow has. One search per tied row, which ends as soon as a way round is found.
    """
    problem, quantity = flow.problem, flow.quantity
    tied = reduced_costs(flow) == 0
    # a customer with a single tied row has nothing to exchange
    several = np.bincount(problem.customer[tied], minlength=problem.customers) > 1
    rows = np.flatnonzero(tied & several[problem.customer])
    depot, customer = problem.depot[rows], problem.customer[rows]
    floor = 0 if problem.at_least is None else problem.at_least[rows]
    gives = quantity[rows] > floor
    takes = np.ones(len(rows), dtype=bool)
    if problem.at_most is not None:
        takes = quantity[rows] < problem.at_most[rows]
    # rows as arcs between nodes, depots first: a row that gives leads from its customer to its depot
    ends = np.concatenate([problem.depots + customer[gives], depot[takes]])
    heads = np.concatenate([depot[gives], problem.depots + customer[takes]])
    own = np.concatenate([np.flatnonzero(gives), np.flatnonzero(takes)])
    order = np.argsort(ends, kind="stable")
    first = np.searchsorted(ends[order], np.arange(problem.depots + problem.customers + 1)).astype(np.int64)
    answer = np.zeros(len(ends), dtype=np.bool_)
    find_cycles(first, ends[order], heads[order], own[order], answer)
    on_cycle = np.zeros(len(ends), dtype=np.bool_)
    on_cycle[order] = answer
    less, more = np.zeros(problem.rows, dtype=np.bool_), np.zeros(problem.rows, dtype=np.bool_)
    count = int(np.count_nonzero(gives))
    less[rows[own[:count]]] = on_cycle[:count]
    more[rows[own[count:]]] = on_cycle[count:]
    return less, more


@kernel
def find_cycles(
    first: Integers, end: Integers, head: Integers, own: Integers, answer: NDArray[np.bool_]
) -> None:
    """Notes for each arc whether a way leads from its head back to its end, not along its own row.

    first: (nodes + 1,) the arcs that begin at each node; end, head, own: (arcs,) nodes and row of each
    """
    seen = np.full(len(first) - 1, -1, dtype=np.int64)
    line = np.empty(len(seen), dtype=np.int64)
    for arc in range(len(end)):
        length, place = 1, 0
        line[0] = head[arc]
        seen[head[arc]] = arc
        while place < length and seen[end[arc]] != arc:
            node = line[place]
            place += 1
            for onward in range(first[node], first[node + 1]):
                there = head[onward]
                if own[onward] != own[arc] and seen[there] != arc:
                    seen[there] = arc
                    line[length] = there
                    length += 1
        answer[arc] = seen[end[arc]] == arc
