"""The network simplex against the slow twin, HiGHS, networkx and the exchange; all == on integers."""

from __future__ import annotations

import networkx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.exact import Integers, TooLarge
from engine.network import UNLIMITED, Contradiction, Problem, Proof, exchange, prove, simplex
from tests.network.cases import problems
from tests.network.twin import highs_cost, least_cost_or_none

Answer = tuple[Integers, Integers, Integers]


def answered(problem: Problem, price: Integers | None = None, quantity: Integers | None = None) -> Answer:
    """What the simplex finds, from scratch unless told otherwise."""
    return simplex.solve(problem, np.zeros(problem.depots, np.int64) if price is None else price, quantity)


def cost(problem: Problem, price: Integers | None = None, quantity: Integers | None = None) -> int | None:
    """The least cost, proved; for a contradiction, the cut is recounted and the answer is None."""
    try:
        answer = answered(problem, price, quantity)
    except Contradiction as contradiction:
        check_cut(problem, contradiction)
        return None
    check_conditions(problem, *answer)
    proof: Proof = prove(problem, *answer)
    return proof.cost


def check_conditions(problem: Problem, quantity: Integers, depot_price: Integers, price: Integers) -> None:
    """The integer conditions of optimality, row by row in Python integers."""
    sent, received = [0] * problem.depots, [0] * problem.customers
    assert problem.depots == 0 or depot_price[0] == 0
    for row in range(problem.rows):
        i, j, x = int(problem.depot[row]), int(problem.customer[row]), int(quantity[row])
        low = 0 if problem.at_least is None else int(problem.at_least[row])
        high = UNLIMITED if problem.at_most is None else int(problem.at_most[row])
        reduced = int(problem.cost[row]) - int(depot_price[i]) - int(price[j])
        assert low <= x <= high
        assert x == low or reduced <= 0
        assert x == high or reduced >= 0
        sent[i] += x
        received[j] += x
    assert sent == problem.supply.tolist()
    assert received == problem.demand.tolist()


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
    assert cut.needed - (cut.brought + limited - bound) > 0


@settings(max_examples=1000, deadline=None)
@given(problems())
def test_costs_what_the_twin_costs(problem: Problem) -> None:
    assert cost(problem) == least_cost_or_none(problem)


@settings(max_examples=100, deadline=None)
@given(problems(largest_depots=9, largest_customers=30))
def test_larger_problems_cost_what_the_twin_costs(problem: Problem) -> None:
    assert cost(problem) == least_cost_or_none(problem)


@settings(max_examples=500, deadline=None)
@given(problems(), st.data())
def test_any_start_ends_at_the_same_cost(problem: Problem, data: st.DataObject) -> None:
    """Prices and quantities to start from are only a guess: senseless ones change nothing but the way."""
    figures = st.sampled_from([0, 1, 2, 7, 10**6, 10**13])
    prices = st.sampled_from([0, 1, -3, 10**6, -(10**15), 2**62, -(2**62)])
    price = data.draw(st.lists(prices, min_size=problem.depots, max_size=problem.depots))
    quantity = data.draw(st.lists(figures, min_size=problem.rows, max_size=problem.rows))
    expected = least_cost_or_none(problem)
    assert cost(problem, np.array(price, dtype=np.int64), np.array(quantity, dtype=np.int64)) == expected
    assert cost(problem, np.array(price, dtype=np.int64), None) == expected


@settings(max_examples=300, deadline=None)
@given(problems())
def test_a_finished_answer_is_kept(problem: Problem) -> None:
    """Its quantities, taken from the leaves of the tree inwards, come out the same; its prices stay proof."""
    try:
        quantity, depot_price, _ = answered(problem)
    except Contradiction:
        return
    assert answered(problem, depot_price, quantity)[0].tolist() == quantity.tolist()
    assert cost(problem, depot_price, quantity) == prove(problem, *answered(problem)).cost


@settings(max_examples=300, deadline=None)
@given(problems(largest_depots=6, largest_customers=12))
def test_costs_what_the_exchange_costs(problem: Problem) -> None:
    none = np.zeros(problem.depots, dtype=np.int64)
    try:
        expected: int | None = prove(problem, *exchange.solve(problem, none, None)).cost
    except Contradiction:
        expected = None
    assert cost(problem) == expected


def random_problem(seed: int, depots: int, customers: int, limits: bool) -> Problem:
    """Sparse rows with repeats, small figures with ties; a flow within the limits exists by construction."""
    generator = np.random.default_rng(seed)
    count = generator.integers(1, 12, customers)
    start = np.concatenate([[0], np.cumsum(count)])
    rows = int(start[-1])
    depot = generator.integers(0, depots, rows)
    flow = generator.integers(0, 20, rows) * (generator.random(rows) < 0.4)
    customer = np.repeat(np.arange(customers), count)
    supply, demand = np.zeros(depots, dtype=np.int64), np.zeros(customers, dtype=np.int64)
    np.add.at(supply, depot, flow)
    np.add.at(demand, customer, flow)
    rate = generator.integers(-5, 20, rows)
    if not limits:
        return Problem(supply, demand, start, depot, rate)
    at_least = flow * (generator.random(rows) < 0.1)
    at_most = flow + generator.integers(0, 10, rows) * (generator.random(rows) < 0.7)
    return Problem(supply, demand, start, depot, rate, at_least, at_most)


@pytest.mark.parametrize("limits", [False, True])
@pytest.mark.parametrize("seed", range(20))
def test_costs_what_highs_finds(seed: int, limits: bool) -> None:
    problem = random_problem(seed, depots=25, customers=80, limits=limits)
    assert cost(problem) == highs_cost(problem)


@pytest.mark.parametrize("limits", [False, True])
@pytest.mark.parametrize("seed", range(10))
def test_costs_what_networkx_finds(seed: int, limits: bool) -> None:
    problem = random_problem(seed + 100, depots=12, customers=40, limits=limits)
    low = np.zeros(problem.rows, dtype=np.int64) if problem.at_least is None else problem.at_least
    graph = networkx.MultiDiGraph()
    for i in range(problem.depots):
        moved = int(low[problem.depot == i].sum())
        graph.add_node(("depot", i), demand=moved - int(problem.supply[i]))
    for j in range(problem.customers):
        moved = int(low[problem.customer == j].sum())
        graph.add_node(("customer", j), demand=int(problem.demand[j]) - moved)
    for row in range(problem.rows):
        ends = ("depot", int(problem.depot[row])), ("customer", int(problem.customer[row]))
        room = {} if problem.at_most is None else {"capacity": int(problem.at_most[row] - low[row])}
        graph.add_edge(*ends, weight=int(problem.cost[row]), **room)
    expected = networkx.network_simplex(graph)[0] + int(low @ problem.cost)
    assert cost(problem) == expected


@pytest.mark.parametrize("ones", [1, 7])
def test_assignments_where_almost_every_step_is_degenerate(ones: int) -> None:
    """As many depots as customers, everybody with the same quantity, few different rates."""
    generator = np.random.default_rng(ones)
    rate = generator.integers(0, 6, (60, 60))
    quantity = np.full(60, ones)
    problem = Problem.dense(quantity, quantity, rate)
    assert cost(problem) == highs_cost(problem)


def test_huge_figures_stay_exact() -> None:
    """Costs near the bound, quantities near 2**62: the answer is worked out by hand below."""
    largest = 2**51
    quantity = 2**60
    problem = Problem.dense(
        [quantity, quantity + 1], [quantity + 1, quantity], [[-largest, largest], [largest, 3]]
    )
    # depot 0 sends all to customer 0; one unit is missing there and comes from depot 1
    assert cost(problem) == -largest * quantity + largest + 3 * quantity


def test_costs_beyond_the_bounds_are_refused_and_never_wrap() -> None:
    with pytest.raises(TooLarge, match="too large"):
        answered(Problem.dense([1, 1], [1, 1], [[2**61, 0], [0, 2**61]]))


def test_a_stand_in_depot_may_cost_what_no_other_may() -> None:
    """Too large if every depot were as dear as the dearest, small enough depot by depot."""
    large = 2**53
    rate = np.tile(np.array([[3], [5], [2], [7], [4], [6], [1], [8], [9], [large]]), (1, 12))
    problem = Problem.dense([1] * 9 + [3], [1] * 12, rate)
    assert cost(problem) == sum(range(1, 10)) + 3 * large


def test_nothing_to_send() -> None:
    empty = np.empty(0, dtype=np.int64)
    assert cost(Problem(empty, empty, np.zeros(1, dtype=np.int64), empty, empty)) == 0
    assert cost(Problem.dense([0, 0], [0, 0, 0], [[1, -2, 3], [4, 5, 6]])) == 0
    assert cost(Problem(np.array([0]), np.array([0, 0]), np.array([0, 0, 0]), empty, empty)) == 0


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
        answered(problem)
    cut = caught.value.cut
    assert (cut.depots, cut.customers) == ((0,), (0, 1))
    assert (cut.needed, cut.brought, cut.limited, cut.bound) == (13, 9, 1, 0)


def test_lower_limits_beyond_a_depot_or_a_customer_are_named() -> None:
    at_least = np.array([4, 0, 0, 0])
    at_depot = Problem(
        np.array([3, 6]),
        np.array([5, 4]),
        np.array([0, 2, 4]),
        np.array([0, 1, 0, 1]),
        np.ones(4, int),
        at_least,
    )
    with pytest.raises(Contradiction) as caught:
        answered(at_depot)
    assert (caught.value.cut.depots, caught.value.cut.customers, caught.value.cut.missing) == ((0,), (), 1)
    at_customer = Problem(
        np.array([5, 4]),
        np.array([3, 6]),
        np.array([0, 2, 4]),
        np.array([0, 1, 0, 1]),
        np.ones(4, int),
        at_least,
    )
    with pytest.raises(Contradiction) as caught:
        answered(at_customer)
    assert (caught.value.cut.depots, caught.value.cut.customers, caught.value.cut.missing) == (
        (0, 1),
        (1,),
        1,
    )
