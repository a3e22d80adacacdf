"""How far values hold, against brute force: change the figure by so much, and by one more."""

from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Alter
from engine.planning.plan import Plan
from engine.reasons.values import UnitValue, values
from engine.week import Week
from tests.reasons.weeks import gone_from, planned, weeks_with_gone, weeks_with_limits

D = Decimal
FAR = D(300)


def cost_after(plan: Plan, what: str, name: str, figure: Decimal) -> tuple[Decimal, Decimal] | None:
    field = "ordered" if what == "customer" else "available"
    after = planned(plan.week.apply(Alter(what, name, field, figure)))  # type: ignore[arg-type]
    return None if after is None else (aims_of(after), after.total_cost)


def aims_of(plan: Plan) -> Decimal:
    """What the aims above money come to, at this plan's weights."""
    return D(plan.flow.cost) - D(
        sum(q * m for q, m in zip(plan.flow.quantity.tolist(), plan.model.money.tolist(), strict=True))
    )


def assert_holds(plan: Plan, what: str, one: UnitValue, figure: Decimal, least: Decimal) -> None:
    for sign, value, holds in (
        (1, one.one_more, one.one_more_holds_for),
        (-1, one.one_less, one.one_less_holds_for),
    ):
        if value is None:
            assert holds is None
            continue
        reach = FAR if holds is None else holds
        at_reach = cost_after(plan, what, one.name, figure + sign * reach)
        assert at_reach is not None
        assert at_reach[1] - plan.total_cost == value * reach
        if holds is None:
            continue
        assert holds > 0
        if figure + sign * holds == least:
            continue
        beyond = cost_after(plan, what, one.name, figure + sign * (holds + 1))
        at_one = cost_after(plan, what, one.name, figure + sign)
        assert at_one is not None
        if beyond is not None:
            slope = beyond[1] - at_reach[1], beyond[0] - at_reach[0]
            assert slope != (value, at_one[0] - aims_of(plan)), (one, slope)


@settings(max_examples=150, deadline=None)
@given(weeks_with_limits())
def test_a_value_holds_exactly_so_far(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    assert_all_hold(plan)


@settings(max_examples=60, deadline=None)
@given(weeks_with_gone())
def test_a_value_holds_exactly_so_far_where_some_has_gone(week: Week) -> None:
    plan = planned(week)
    if plan is not None:
        assert_all_hold(plan)


def assert_all_hold(plan: Plan) -> None:
    week, found = plan.week, values(plan, holds=True)
    for one in found.customers:
        gone = gone_from(week, "customer", one.name)
        ordered = week.customers[one.name].ordered
        assert gone <= ordered or one.one_more is None
        assert_holds(plan, "customer", one, ordered, gone)
    for one in found.depots:
        depot, gone = week.depots[one.name], gone_from(week, "depot", one.name)
        assert gone <= depot.available or one.one_more is None
        assert_holds(plan, "depot", one, depot.available, max(depot.must_move or D(0), gone))
