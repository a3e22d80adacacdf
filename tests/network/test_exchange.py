"""The depot exchange against a slow twin, HiGHS and networkx; every comparison is == on integers."""

from __future__ import annotations

import networkx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.exact import TooLarge, total
from engine.network import Contradiction, Flow, Problem, least_cost, prove
from tests.network.cases import problems
from tests.network.twin import highs_cost, least_cost_or_none


def solved(problem: Problem) -> Flow | None:
    """The flow, proved once more; for a contradiction, the cut is checked and the answer is None."""
    try:
        flow = least_cost(problem)
    except Contradiction as contradiction:
        check_cut(problem, contradiction)
        return None
    prove(problem, flow.quantity, flow.depot_price, flow.customer_price)
    return flow


def check_cut(problem: Problem, contradiction: Contradiction) -> None:
    """Recounts the cut from the problem: no flow can bring these customers what they need."""
    cut = contradiction.cut
    depots, customers = set(cut.depots), set(cut.customers)
    limited = bound = 0
    for row in range(problem.rows):
        inside, needing = int(problem.depot[row]) in depots, int(problem.customer[row]) in customers
        if needing and not inside:
            assert problem.at_most is not None
            limited += int(problem.at_most[row])
        if inside and not needing and problem.at_least is not None:
            bound += int(problem.at_least[row])
    assert cut.needed == sum(int(problem.demand[j]) for j in customers)
    assert cut.brought == sum(int(problem.supply[i]) for i in depots)
    assert (cut.limited, cut.bound) == (limited, bound)
    assert cut.missing == cut.needed - (cut.brought + limited - bound) > 0


@settings(max_examples=1500, deadline=None)
@given(problems())
def test_costs_what_the_twin_costs(problem: Problem) -> None:
    flow = solved(problem)
    assert (None if flow is None else flow.cost) == least_cost_or_none(problem)


@settings(max_examples=150, deadline=None)
@given(problems(largest_depots=8, largest_customers=40))
def test_larger_problems_cost_what_the_twin_costs(problem: Problem) -> None:
    flow = solved(problem)
    assert (None if flow is None else flow.cost) == least_cost_or_none(problem)


@pytest.mark.parametrize("seed", range(40))
def test_costs_what_highs_finds(seed: int) -> None:
    problem = random_problem(seed, depots=6, customers=60)
    flow = solved(problem)
    assert (None if flow is None else flow.cost) == highs_cost(problem)


@pytest.mark.parametrize("seed", range(20))
def test_costs_what_networkx_finds(seed: int) -> None:
    problem = random_problem(seed, depots=5, customers=30, limits=False)
    graph = networkx.DiGraph()
    for i, quantity in enumerate(problem.supply.tolist()):
        graph.add_node(("depot", i), demand=-quantity)
    for j, quantity in enumerate(problem.demand.tolist()):
        graph.add_node(("customer", j), demand=quantity)
    lanes: dict[tuple[int, int], int] = {}
    for row in range(problem.rows):
        lane = (int(problem.depot[row]), int(problem.customer[row]))
        lanes[lane] = min(lanes.get(lane, 10**9), int(problem.cost[row]))
    for (i, j), cost in lanes.items():
        graph.add_edge(("depot", i), ("customer", j), weight=cost)
    flow = solved(problem)
    if flow is None:
        with pytest.raises(networkx.NetworkXUnfeasible):
            networkx.min_cost_flow_cost(graph)
    else:
        assert flow.cost == networkx.min_cost_flow_cost(graph)


def random_problem(seed: int, depots: int, customers: int, limits: bool = True) -> Problem:
    """Sparse rows with repeats, small figures with ties, half of them with limits."""
    generator = np.random.default_rng(seed)
    count = generator.integers(1, 2 * depots, customers)
    start = np.concatenate([[0], np.cumsum(count)])
    rows = int(start[-1])
    depot = generator.integers(0, depots, rows)
    demand = generator.integers(0, 30, customers)
    weight = generator.multinomial(int(demand.sum()), np.full(depots, 1 / depots))
    at_least = at_most = None
    if limits and seed % 2:
        at_least = (generator.random(rows) < 0.05).astype(np.int64)
        at_most = generator.integers(1, 40, rows)
    return Problem(weight, demand, start, depot, generator.integers(-5, 20, rows), at_least, at_most)


@pytest.mark.parametrize(("depots", "customers"), [(3, 500), (12, 2000), (30, 900)])
def test_samples_and_narrow_searches_end_at_the_same_cost(depots: int, customers: int) -> None:
    """Large enough for several samples; the proof alone shows that the cost is the least."""
    generator = np.random.default_rng(depots)
    demand = generator.integers(0, 50, customers)
    supply = generator.multinomial(int(demand.sum()), np.full(depots, 1 / depots))
    for high in (3, 1000, 10**6):
        problem = Problem.dense(supply, demand, generator.integers(0, high, (depots, customers)))
        assert least_cost(problem).proof.exact


def with_stand_ins(seed: int, depots: int, customers: int, limited: bool) -> Problem:
    """As planning poses a week: a stand-in depot at every customer, two stay-rows a depot."""
    generator = np.random.default_rng(seed)
    rate = generator.integers(500, 90000, (customers, depots))
    largest = 1 + 2 * (depots + 1) * 90000
    start, depot, cost, at_most = [0], [], [], []
    for j in range(customers):
        for i in np.flatnonzero(generator.random(depots) < 0.7):
            depot.append(int(i))
            cost.append(int(rate[j, i]))
            at_most.append(int(generator.integers(0, 60)) if limited else 2**63 - 1)
        depot.append(depots)
        cost.append(largest * int(generator.integers(1, 4)))
        at_most.append(2**63 - 1)
        start.append(len(depot))
    for i in range(depots):
        depot += [i, i]
        cost += [int(generator.integers(-5, 50)), largest]
        at_most += [30, 2**63 - 1]
    depot.append(depots)
    cost.append(0)
    at_most.append(2**63 - 1)
    start.append(len(depot))
    demand = generator.integers(0, 80, customers)
    supply = generator.integers(0, 2 * int(demand.sum()) // depots, depots)
    stays, missing = int(supply.sum()), int(demand.sum())
    return Problem(
        np.append(supply, missing),
        np.append(demand, stays),
        np.array(start),
        np.array(depot),
        np.array(cost),
        None,
        np.array(at_most),
    )


@pytest.mark.parametrize("seed", range(12))
@pytest.mark.parametrize("limited", [False, True])
def test_weeks_with_stand_ins_cost_what_highs_finds(seed: int, limited: bool) -> None:
    problem = with_stand_ins(seed, depots=6, customers=50, limited=limited)
    assert least_cost(problem).cost == highs_cost(problem)


def test_larger_weeks_with_stand_ins_are_proved() -> None:
    for limited in (False, True):
        assert least_cost(with_stand_ins(1, depots=40, customers=1500, limited=limited)).proof.exact


def test_nothing_to_send() -> None:
    empty = np.empty(0, dtype=np.int64)
    assert least_cost(Problem(empty, empty, np.zeros(1, dtype=np.int64), empty, empty)).cost == 0
    flow = least_cost(Problem.dense([0, 0], [0, 0, 0], [[1, -2, 3], [4, 5, 6]]))
    assert flow.cost == 0
    assert flow.quantity.tolist() == [0] * 6


def test_customer_without_rows_is_a_contradiction() -> None:
    problem = Problem(np.array([5]), np.array([3, 2]), np.array([0, 1, 1]), np.array([0]), np.array([7]))
    with pytest.raises(Contradiction) as caught:
        least_cost(problem)
    assert (caught.value.cut.customers, caught.value.cut.missing) == ((1,), 2)


def test_a_cut_names_depots_and_customers() -> None:
    """Hand-worked: customers 0 and 1 need 13; only depot 0 reaches them, it has 9, and 1 more may come."""
    problem = Problem(
        supply=np.array([9, 11]),
        demand=np.array([6, 7, 7]),
        start=np.array([0, 1, 3, 5]),
        depot=np.array([0, 0, 1, 0, 1]),
        cost=np.array([1, 1, 1, 1, 1]),
        at_most=np.array([99, 99, 1, 99, 99]),
    )
    with pytest.raises(Contradiction, match="3 too few") as caught:
        least_cost(problem)
    cut = caught.value.cut
    assert (cut.depots, cut.customers) == ((0,), (0, 1))
    assert (cut.needed, cut.brought, cut.limited, cut.bound) == (13, 9, 1, 0)


def test_costs_beyond_the_bounds_are_refused_and_never_wrap() -> None:
    with pytest.raises(TooLarge, match="too large"):
        least_cost(Problem.dense([1, 1], [1, 1], [[2**61, 0], [0, 2**61]]))
    largest = 2**57 // 3
    half = [2**60, 2**60]
    flow = least_cost(Problem.dense(half, half, [[largest, -largest], [-largest, largest]]))
    assert flow.cost == -(2**61) * largest
    assert total(flow.quantity) == 2**61


@settings(max_examples=300, deadline=None)
@given(problems(), st.integers(0, 2**32))
def test_order_of_customers_does_not_matter(problem: Problem, seed: int) -> None:
    order = np.random.default_rng(seed).permutation(problem.customers)
    rows = [np.arange(problem.start[j], problem.start[j + 1]) for j in order]
    row = np.concatenate(rows)
    start = np.concatenate([[0], np.cumsum([len(part) for part in rows])])
    shuffled = Problem(
        problem.supply,
        problem.demand[order],
        start,
        problem.depot[row],
        problem.cost[row],
        None if problem.at_least is None else problem.at_least[row],
        None if problem.at_most is None else problem.at_most[row],
    )
    one, other = solved(problem), solved(shuffled)
    assert (one and one.cost) == (other and other.cost)
