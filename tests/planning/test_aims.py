"""Plans of small random weeks against HiGHS (scipy.optimize.linprog), one linear programme an aim."""

from dataclasses import replace
from decimal import Decimal

from hypothesis import given, settings

from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import best_outcome, outcome_of, weeks


@settings(max_examples=1500, deadline=None)
@given(weeks())
def test_the_aims_are_reached_in_order_at_the_cost_that_highs_finds(week: Week) -> None:
    expected = best_outcome(week)
    try:
        plan = plan_week(week)
    except NotPlannable:
        assert expected is None
        return
    assert expected is not None
    assert outcome_of(week, plan) == expected
    assert plan.proof.exact
    assert plan.proof.gap == 0
    assert plan.proof.lower_bound == plan.total_cost
    assert plan.total_cost == plan.freight_cost + plan.short_cost + plan.unsent_cost
    _figures_hold(week, plan)


@settings(max_examples=400, deadline=None)
@given(weeks())
def test_shared_weeks_are_planned_and_proved(week: Week) -> None:
    shared = replace(week, rules=replace(week.rules, when_short="even share", unit="pallets"))
    expected = best_outcome(week)
    try:
        plan = plan_week(shared)
    except NotPlannable:
        assert expected is None
        return
    assert expected is not None
    assert plan.proof.gap == 0
    assert plan.proof.lower_bound == plan.total_cost
    short = sum((s.quantity for s in plan.short if not week.customers[s.customer].may_decline), Decimal(0))
    assert short == sum(expected.missing)
    _figures_hold(week, plan)


def _figures_hold(week: Week, plan) -> None:  # type: ignore[no-untyped-def]
    """Sums at depots and customers, limits and holds, from the week's own figures."""
    for name, customer in week.customers.items():
        got = sum(s.quantity for s in plan.shipments if s.customer == name)
        short = sum(s.quantity for s in plan.short if s.customer == name)
        assert got + short == customer.ordered
    for name, depot in week.depots.items():
        sent = sum(s.quantity for s in plan.shipments if s.depot == name)
        unsent = sum(s.quantity for s in plan.unsent if s.depot == name)
        assert sent + unsent == depot.available
    by_key = {s.key: s for s in plan.shipments}
    for key, hold in week.holds.items():
        assert (by_key[key].quantity if key in by_key else 0) == hold.quantity
    for s in plan.shipments:
        row = week.rates.row(week.rates.find(s.key))
        assert not row.closed
        assert row.at_most is None or s.quantity <= row.at_most
        assert s.cost == s.quantity * row.rate
