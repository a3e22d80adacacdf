"""A week whose loads bind nothing is planned like a network: all figures cross the door right."""

from dataclasses import replace
from types import MappingProxyType

from hypothesis import HealthCheck, given, settings

from engine.figures import Haulier
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import D, weeks

WIDE = D(10_000)


def with_a_limit_that_binds_nothing(week: Week) -> Week:
    """The same week, planned by the search for whole loads since a haulier has a limit."""
    name = next(iter(week.rates.flat.haulier_names))
    return replace(week, hauliers=MappingProxyType({name: Haulier(name, at_most=WIDE)}))


def planned(week: Week) -> Plan | None:
    try:
        return plan_week(week, time_limit=20)
    except NotPlannable:
        return None


def short_by_priority(plan: Plan) -> dict[str, object]:
    sums: dict[str, object] = {}
    for one in plan.short:
        customer = plan.week.customers[one.customer]
        rank = "declines" if customer.may_decline else customer.priority or "C"
        sums[rank] = sums.get(rank, D(0)) + one.quantity  # type: ignore[operator]
    sums.pop("declines", None)
    return sums


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(weeks())
def test_the_search_agrees_with_the_exact_core(week: Week) -> None:
    """The core is checked against linear programming, aim by aim, in test_aims."""
    network, whole = planned(week), planned(with_a_limit_that_binds_nothing(week))
    assert (network is None) == (whole is None)
    if network is None or whole is None:
        return
    assert whole.whole is not None
    assert short_by_priority(whole) == short_by_priority(network)
    assert sum(u.must_move for u in whole.unsent) == sum(u.must_move for u in network.unsent)
    assert whole.total_cost == network.total_cost
    assert whole.proof.lower_bound <= whole.total_cost
    assert whole.whole.divisible_cost == network.total_cost
