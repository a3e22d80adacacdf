"""The nearest of all least-cost flows against every least-cost flow of small problems, one by one."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import product

import networkx
import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.network import Contradiction, Problem, least_cost, prove
from engine.network.alternatives import exchangeable
from engine.network.cycles import cancel_cycles
from engine.network.ties import nearest
from tests.network.cases import problems


@st.composite
def tiny(draw: st.DrawFn) -> Problem:
    """Three depots, three customers, quantities up to 3, many ties: few enough flows to list them all."""
    depots, customers = draw(st.integers(1, 3)), draw(st.integers(1, 3))
    demand = draw(st.lists(st.integers(0, 3), min_size=customers, max_size=customers))
    cuts = sorted(draw(st.lists(st.integers(0, sum(demand)), min_size=depots - 1, max_size=depots - 1)))
    supply = [b - a for a, b in zip([0, *cuts], [*cuts, sum(demand)], strict=True)]
    cost = draw(st.lists(st.integers(0, 1), min_size=depots * customers, max_size=depots * customers))
    problem = Problem.dense(supply, demand, np.array(cost).reshape(depots, customers))
    if draw(st.booleans()):
        limits = draw(st.lists(st.integers(1, 3), min_size=problem.rows, max_size=problem.rows))
        problem = Problem(
            problem.supply, problem.demand, problem.start, problem.depot, problem.cost, None, np.array(limits)
        )
    return problem


def every_flow(problem: Problem) -> Iterator[tuple[int, ...]]:
    """All flows within the limits, customer by customer."""

    def at(j: int) -> list[tuple[int, ...]]:
        rows = range(int(problem.start[j]), int(problem.start[j + 1]))
        most = [3 if problem.at_most is None else int(problem.at_most[row]) for row in rows]
        return [x for x in product(*(range(m + 1) for m in most)) if sum(x) == problem.demand[j]]

    for parts in product(*(at(j) for j in range(problem.customers))):
        flow = tuple(x for part in parts for x in part)
        if (np.bincount(problem.depot, flow, problem.depots) == problem.supply).all():
            yield flow


@settings(max_examples=300, deadline=None)
@given(tiny(), st.lists(st.integers(0, 4), min_size=9, max_size=9))
def test_no_least_cost_flow_is_nearer(problem: Problem, earlier: list[int]) -> None:
    try:
        flow = least_cost(problem)
    except Contradiction:
        return
    near = np.array(earlier[: problem.rows])
    chosen = nearest(flow, near)
    best = [x for x in every_flow(problem) if int(np.dot(x, problem.cost)) == flow.cost]
    least = min(int(np.abs(np.array(x) - near).sum()) for x in best)
    assert int(np.abs(chosen.quantity - near).sum()) == least
    assert chosen.cost == flow.cost
    less, more = exchangeable(flow)
    assert less.tolist() == [any(x[row] < flow.quantity[row] for x in best) for row in range(problem.rows)]
    assert more.tolist() == [any(x[row] > flow.quantity[row] for x in best) for row in range(problem.rows)]


@settings(max_examples=400, deadline=None)
@given(problems(), st.booleans(), st.integers(0, 99))
def test_partly_filled_rows_form_no_cycle(problem: Problem, earlier: bool, seed: int) -> None:
    try:
        flow = least_cost(problem)
    except Contradiction:
        return
    near = np.random.default_rng(seed).permutation(flow.quantity) if earlier else None
    chosen = nearest(flow, near)
    assert prove(problem, chosen.quantity, chosen.depot_price, chosen.customer_price).cost == flow.cost
    graph = networkx.MultiGraph()
    for row, quantity in enumerate(chosen.quantity.tolist()):
        low = 0 if problem.at_least is None else problem.at_least[row]
        high = 2**63 if problem.at_most is None else problem.at_most[row]
        if low < quantity < high and (near is None or quantity != near[row]):
            graph.add_edge(("depot", problem.depot[row]), ("customer", problem.customer[row]))
    assert graph.number_of_edges() == 0 or networkx.is_forest(graph)


def test_an_earlier_plan_that_costs_as_little_is_kept() -> None:
    """Hand-worked: both ways of serving cost 2; the plan of last week is the dearer-looking diagonal."""
    flow = least_cost(Problem.dense([1, 1], [1, 1], [[1, 1], [1, 1]]))
    for near in ([1, 0, 0, 1], [0, 1, 1, 0]):
        assert nearest(flow, np.array(near)).quantity.tolist() == near


def test_a_row_that_closes_two_cycles_looks_again_each_time() -> None:
    """The first cycle changes the forest; marks that were left in it then led round for ever."""
    limits = np.array([35, 4, 19, 5, 8, 20])
    problem = Problem(
        supply=np.array([2, 7, 30]),
        demand=np.array([17, 9, 13]),
        start=np.array([0, 1, 3, 6]),
        depot=np.array([2, 0, 2, 0, 1, 2]),
        cost=np.zeros(6, dtype=np.int64),
        at_most=limits,
    )
    quantity = np.array([17, 1, 8, 1, 7, 5])
    cancel_cycles(problem.figures, problem.customer, quantity)
    assert np.bincount(problem.depot, quantity).tolist() == [2, 7, 30]
    assert np.bincount(problem.customer, quantity).tolist() == [17, 9, 13]
    assert (quantity >= 0).all()
    assert (quantity <= limits).all()
    partly = networkx.Graph()
    for row in np.flatnonzero((quantity > 0) & (quantity < limits)):
        partly.add_edge(int(problem.depot[row]), f"customer {problem.customer[row]}")
    assert networkx.is_forest(partly)
