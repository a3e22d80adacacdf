"""Starting from an earlier flow never changes what the answer costs, whatever was changed."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.exact import TooLarge
from engine.network import Contradiction, Flow, Problem, exchange, least_cost, prove, simplex
from engine.network.restart import carry_over
from tests.network.cases import problems
from tests.network.test_exchange import check_cut
from tests.network.twin import least_cost_or_none


@settings(max_examples=400, deadline=None)
@given(problems(), problems(), st.sampled_from(["cost", "quantities", "limits", "all"]), st.integers(0, 99))
def test_a_start_does_not_change_the_cost(one: Problem, other: Problem, what: str, seed: int) -> None:
    try:
        start = least_cost(one)
    except Contradiction:
        return
    generator = np.random.default_rng(seed)
    problem = one
    if what == "cost":
        problem = replace(one, cost=one.cost[::-1].copy())
    elif what == "quantities":
        demand = generator.permutation(one.demand)
        problem = replace(one, supply=generator.permutation(one.supply), demand=demand)
    elif what == "limits":
        problem = replace(one, at_least=None, at_most=generator.integers(0, 5, one.rows))
    else:
        problem = other
    check(problem, start)


def check(problem: Problem, start: Flow) -> None:
    """Both kernels, from `start`, cost what the slow twin costs."""
    expected = least_cost_or_none(problem)
    try:
        assert least_cost(problem, start).cost == expected
    except Contradiction:
        assert expected is None
    if start.problem.rows == problem.rows and start.problem.depots == problem.depots:
        for solve in (exchange.solve, simplex.solve):
            try:
                answer = solve(problem, start.depot_price, start.quantity)
                assert prove(problem, *answer).cost == expected
            except Contradiction:
                assert expected is None


@settings(max_examples=400, deadline=None)
@given(problems(), st.integers(1, 3), st.integers(0, 99))
def test_changed_orders_are_evened_out_along_chains(one: Problem, changed: int, seed: int) -> None:
    """`least_cost` takes this way only where customers are many, so small cases are sent along it here."""
    try:
        start = least_cost(one)
    except Contradiction:
        return
    generator = np.random.default_rng(seed)
    supply, demand = one.supply.copy(), one.demand.copy()
    if not len(supply) or not len(demand):
        return
    for j in generator.integers(0, len(demand), changed):
        more = int(generator.integers(-demand[j], 9))
        i = generator.integers(0, len(supply))
        more = max(more, -int(supply[i]))
        demand[j] += more
        supply[i] += more
    problem = one.with_quantities(supply, demand)
    expected = least_cost_or_none(problem)
    try:
        answer = exchange.resume(problem, one, start.quantity, start.depot_price)
    except Contradiction as contradiction:
        assert expected is None
        check_cut(problem, contradiction)
        return
    assert answer is not None
    assert prove(problem, *answer).cost == expected


@settings(max_examples=300, deadline=None)
@given(problems())
def test_both_kernels_cost_the_same(problem: Problem) -> None:
    costs = []
    nothing = np.zeros(problem.depots, dtype=np.int64)
    for solve in (exchange.solve, simplex.solve):
        try:
            costs.append(prove(problem, *solve(problem, nothing, None)).cost)
        except Contradiction as contradiction:
            check_cut(problem, contradiction)
            costs.append(None)
    assert costs[0] == costs[1]


def test_quantities_are_found_again_when_lanes_come_and_go() -> None:
    """Hand-worked: customer 0 loses the row of depot 1, customer 1 gains one of depot 0 in front."""
    new = np.zeros(4, dtype=np.int64)
    carry_over(
        np.array([0, 3, 5]),
        np.array([0, 1, 2, 1, 1]),
        np.array([10, 20, 30, 40, 50]),
        np.array([0, 2, 4]),
        np.array([0, 2, 0, 1]),
        new,
    )
    assert new.tolist() == [10, 30, 0, 40]


@pytest.mark.parametrize(("depots", "method"), [(12, "exchange"), (40, "exchange"), (300, "simplex")])
def test_one_changed_order_on_a_larger_week(depots: int, method: str) -> None:
    generator = np.random.default_rng(3)
    demand = generator.integers(1, 50, 1000)
    supply = generator.multinomial(int(demand.sum()), np.full(depots, 1 / depots))
    before = least_cost(Problem.dense(supply, demand, generator.integers(1, 500, (depots, 1000))))
    supply, demand = supply.copy(), demand.copy()
    demand[17] += 5
    supply[2] += 5
    problem = replace(before.problem, supply=supply, demand=demand)
    again = least_cost(problem, before)
    assert again.method == method
    assert again.cost == least_cost(problem).cost


def test_where_the_exchange_could_leave_the_integers_the_simplex_goes_on() -> None:
    """One depot's rates are so large that fifteen times as much does not fit; twice as much does."""
    dear = 2 * 10**16
    cost = np.arange(15)[:, None] + np.arange(4)[None, :]
    cost[7] = dear
    problem = Problem.dense([1] * 15, [3, 4, 4, 4], cost)
    with pytest.raises(TooLarge):
        exchange.solve(problem, np.zeros(15, dtype=np.int64), None)
    flow = least_cost(problem)
    assert flow.method == "simplex"
    assert flow.cost == dear + sum(i for i in range(15) if i != 7) + 2 * 3 + 4 + 2 * 4 + 3 * 4 - 6 - 3
