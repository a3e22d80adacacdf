"""A week whose loads bind nothing is planned like a network: all figures cross the door right."""

from dataclasses import replace
from types import MappingProxyType

from hypothesis import HealthCheck, given, settings

import engine
import sample_data
from engine.changes import Alter
from engine.figures import Customer, Depot, Haulier, Order, RateRow, Rules
from engine.planning.differences import outcome
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
        return plan_week(week, time_limit=None)
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


def test_a_price_that_is_not_proved_says_between_what_it_lies() -> None:
    """With both plans cut short, the least costs differ by something between the bounds."""
    week = engine.read_week(sample_data.path(sample_data.LOADS_WEEK)).week
    plan = plan_week(week, time_limit=0)
    found = outcome(plan, Alter("customer", "Alder", "ordered", D(300)), time_limit=0)
    assert found.plan is not None
    assert found.bounds is not None
    assert found.bounds.at_least == found.plan.proof.lower_bound - plan.total_cost
    assert found.bounds.at_most == found.plan.total_cost - plan.proof.lower_bound
    assert found.bounds.at_least <= found.plan.total_cost - plan.total_cost <= found.bounds.at_most


def test_a_price_that_is_proved_is_one_figure() -> None:
    week = Week.of(
        (Depot("Quarry", D(200)),),
        (Customer("Elm", (Order(D(62)),)),),
        (RateRow("Quarry", "Elm", D(240), per="load"),),
        Rules(load_size=D(25)),
    )
    found = outcome(plan_week(week), Alter("customer", "Elm", "ordered", D(76)))
    assert found.difference is not None
    assert (found.bounds, found.difference.freight_payable) == (None, 240)
