"""The closure against solving again with one unit more or less, and against published two-sided values."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from hypothesis import given, settings

from engine.network import Contradiction, Flow, Problem, least_cost
from engine.network.closure import NO_WAY, close
from tests.network.cases import problems
from tests.network.twin import least_cost_or_none


def changed(flow: Flow, i: int, j: int, by: int) -> int | None:
    """Cost after minus before, solved again by the slow twin with both ends changed by `by`."""
    supply, demand = flow.problem.supply.copy(), flow.problem.demand.copy()
    if supply[i] + by < 0 or demand[j] + by < 0:
        return None
    supply[i] += by
    demand[j] += by
    cost = least_cost_or_none(replace(flow.problem, supply=supply, demand=demand))
    return None if cost is None else cost - flow.cost


@settings(max_examples=300, deadline=None)
@given(problems(largest_depots=4, largest_customers=5))
def test_one_more_and_one_less_are_what_solving_again_gives(problem: Problem) -> None:
    try:
        flow = least_cost(problem)
    except Contradiction:
        return
    closure = close(flow)
    for j in range(problem.customers):
        more, more_row = closure.one_more(j)
        less, less_row = closure.one_less(j)
        for i in range(problem.depots):
            expected = changed(flow, i, j, 1)
            assert (None if more[i] == NO_WAY else int(more[i])) == expected
            if expected is not None:
                chain = closure.chain(int(problem.depot[more_row[i]]), i)
                assert chain is not None
                assert sum(step.cost for step in chain) + problem.cost[more_row[i]] == expected
            expected = changed(flow, i, j, -1)
            if expected is not None or (problem.supply[i] and problem.demand[j]):
                assert (None if less[i] == NO_WAY else int(less[i])) == expected
            if expected is not None:
                chain = closure.chain(i, int(problem.depot[less_row[i]]))
                assert chain is not None
                assert sum(step.cost for step in chain) - problem.cost[less_row[i]] == expected


@settings(max_examples=300, deadline=None)
@given(problems())
def test_chains_link_up_and_can_be_carried_out(problem: Problem) -> None:
    try:
        flow = least_cost(problem)
    except Contradiction:
        return
    closure = close(flow)
    for i in range(problem.depots):
        for k in range(problem.depots):
            chain = closure.chain(i, k)
            if chain is None:
                assert closure.cost[i, k] == NO_WAY
                continue
            assert sum(step.cost for step in chain) == closure.cost[i, k]
            here = i
            for step in chain:
                assert (step.from_depot, problem.depot[step.less_on]) == (here, here)
                assert (step.to_depot, problem.depot[step.more_on]) == (step.to_depot, step.to_depot)
                assert problem.customer[step.less_on] == problem.customer[step.more_on] == step.customer
                assert step.cost == problem.cost[step.more_on] - problem.cost[step.less_on]
                least = 0 if problem.at_least is None else problem.at_least[step.less_on]
                assert flow.quantity[step.less_on] > least
                if problem.at_most is not None:
                    assert flow.quantity[step.more_on] < problem.at_most[step.more_on]
                here = step.to_depot
            assert here == k


def test_a_chain_by_hand() -> None:
    """Two depots, two customers: one more ordered at 0 from depot 1's stock displaces a unit at customer 1.

    Rates 1 and 5 at customer 0, 4 and 6 at customer 1; depot 0 brings everything it has to both.
    """
    problem = Problem.dense([7, 5], [5, 7], [[1, 4], [5, 6]])
    closure = close(least_cost(problem))
    assert closure.direct.tolist()[0][1] == 2
    more, row = closure.one_more(0)
    assert more.tolist() == [1, 3]
    assert row.tolist() == [0, 0]
    chain = closure.chain(0, 1)
    assert chain is not None
    assert [(step.customer, step.cost) for step in chain] == [(1, 2)]


def test_no_detour_is_cheaper_than_the_closure() -> None:
    generator = np.random.default_rng(5)
    demand = generator.integers(1, 9, 400)
    supply = generator.multinomial(int(demand.sum()), np.full(60, 1 / 60))
    closure = close(least_cost(Problem.dense(supply, demand, generator.integers(1, 99, (60, 400)))))
    through = closure.cost[:, :, None] + closure.cost[None, :, :]
    assert (closure.cost[:, None, :] <= through).all()
