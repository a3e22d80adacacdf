"""Stopped at any moment, the plan is valid and its bound holds."""

import threading

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.loads import LoadProblem, NoPlan, Progress, least_cost_loads
from engine.loads.proof import check
from tests.loads.twin import best_by_enumeration
from tests.loads.weeks import road_week, weeks


@settings(deadline=None)
@given(weeks(), st.integers(0, 60))
def test_stopped_at_any_question_it_is_valid_and_the_bound_holds(week: LoadProblem, questions: int) -> None:
    best = best_by_enumeration(week)
    asked = 0

    def stop() -> bool:
        nonlocal asked
        asked += 1
        return asked > questions

    try:
        plan = least_cost_loads(week, should_stop=stop)
    except NoPlan:
        assert best is None
        return
    assert best is not None
    assert check(week, plan.quantity)[0] == plan.cost
    values = tuple(aim.value for aim in plan.aims)
    assert (*values, plan.cost) >= best
    for place, aim in enumerate(plan.aims):
        if values[:place] == best[:place]:
            assert aim.lower_bound <= best[place]
    if values == best[:-1]:
        assert plan.lower_bound <= best[-1]
    assert plan.lower_bound <= plan.cost
    if plan.ended == "proved":
        assert (*values, plan.cost) == best


def test_an_event_stops_it_and_progress_only_gets_better() -> None:
    stop, told = threading.Event(), list[Progress]()

    def tell(progress: Progress) -> None:
        told.append(progress)
        if len(told) == 4:
            stop.set()

    plan = least_cost_loads(road_week(6, 60, slack=0.01), progress=tell, should_stop=stop)
    assert plan.ended in ("stopped", "proved")
    costs, bounds = [one.cost for one in told], [one.lower_bound for one in told]
    assert costs == sorted(costs, reverse=True)
    assert bounds == sorted(bounds)
    assert all(check(one.best.problem, one.best.quantity)[0] == one.cost for one in told)
    assert plan.cost <= costs[-1]
    assert plan.lower_bound >= bounds[-1]


def test_a_keyboard_interrupt_keeps_the_best() -> None:
    told = 0

    def interrupt(progress: Progress) -> None:
        nonlocal told
        told += 1
        if told == 3:
            raise KeyboardInterrupt

    plan = least_cost_loads(road_week(6, 60, slack=0.01), progress=interrupt)
    assert plan.ended == "stopped"
    assert plan.lower_bound < plan.cost == check(plan.problem, plan.quantity)[0]


@pytest.mark.parametrize("customers", [12, 30])
def test_an_earlier_plan_is_used(customers: int) -> None:
    week = road_week(4, customers)
    before = least_cost_loads(week, time_limit=20)
    again = least_cost_loads(week, start=before, should_stop=lambda: True)
    assert again.cost <= before.cost
