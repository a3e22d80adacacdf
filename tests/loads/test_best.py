"""Small weeks of every kind: the plan is the best there is, by two other ways to find it."""

from hypothesis import given, settings

from engine.loads import LoadFlow, LoadProblem, NoPlan, least_cost_loads
from engine.loads.proof import check
from tests.loads.twin import best_by_cp_sat, best_by_enumeration
from tests.loads.weeks import weeks


def solved(week: LoadProblem) -> LoadFlow | None:
    try:
        return least_cost_loads(week, time_limit=60)
    except NoPlan:
        return None


def agrees(week: LoadProblem, best: tuple[int, ...] | None) -> None:
    """The plan is valid, the best, and proved so."""
    found = solved(week)
    assert (found is None) == (best is None)
    if found is None or best is None:
        return
    assert (*(aim.value for aim in found.aims), found.cost) == best
    assert check(week, found.quantity)[0] == found.cost
    assert found.proved
    assert found.lower_bound == found.cost
    assert found.ended == "proved"


@settings(deadline=None)
@given(weeks())
def test_enumeration_finds_nothing_better(week: LoadProblem) -> None:
    agrees(week, best_by_enumeration(week))


@settings(deadline=None)
@given(weeks(depots=3, customers=5, most=20))
def test_a_second_integer_solver_agrees(week: LoadProblem) -> None:
    agrees(week, best_by_cp_sat(week))
