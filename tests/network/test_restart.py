"""Starting from an earlier flow never changes what the answer costs, whatever was changed."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

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


@pytest.mark.parametrize("depots", [12, 300])
def test_one_changed_order_on_a_larger_week(depots: int) -> None:
    generator = np.random.default_rng(3)
    demand = generator.integers(1, 50, 1000)
    supply = generator.multinomial(int(demand.sum()), np.full(depots, 1 / depots))
    before = least_cost(Problem.dense(supply, demand, generator.integers(1, 500, (depots, 1000))))
    supply, demand = supply.copy(), demand.copy()
    demand[17] += 5
    supply[2] += 5
    problem = replace(before.problem, supply=supply, demand=demand)
    again = least_cost(problem, before)
    assert again.method == ("exchange" if depots == 12 else "simplex")
    assert again.cost == least_cost(problem).cost
