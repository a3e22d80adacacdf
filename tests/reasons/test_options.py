"""Options, near lanes and lanes without a quote, against planning the changed week anew."""

from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Add, Alter, SetHold
from engine.figures import RateKey, RateRow
from engine.planning.plan import Plan
from engine.reasons.options import nearest_to_paying, options, unquoted
from engine.reasons.why import why
from engine.week import Week
from tests.reasons.weeks import planned, weeks_with_limits

D = Decimal
LITTLE = D("0.001")


def carried(plan: Plan, key: RateKey) -> Decimal:
    return sum((s.quantity for s in plan.shipments if s.key == key), D(0))


@settings(max_examples=120, deadline=None)
@given(weeks_with_limits())
def test_a_lane_just_below_where_it_pays_carries_what_was_said(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    for near in nearest_to_paying(plan):
        one = near.interval
        assert one.pays_below is not None
        after = planned(week.apply(Alter("rate", one.key, "rate", one.pays_below - LITTLE)))
        assert after is not None
        assert carried(after, one.key) == near.carries > 0


@settings(max_examples=120, deadline=None)
@given(weeks_with_limits())
def test_a_lane_without_a_quote_pays_below_what_was_said(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    for lane in (lane for name in plan.model.depots for lane in unquoted(plan, depot=name)):
        for rate, expected in ((lane.pays_below - LITTLE, lane.carries), (lane.pays_below + LITTLE, D(0))):
            row = RateRow(lane.depot, lane.customer, rate, haulier="New", surcharge=week.rules.fuel_surcharge)
            after = planned(week.apply(Add(row)))
            assert after is not None
            assert carried(after, RateKey(lane.depot, lane.customer, "New")) == expected


@settings(max_examples=120, deadline=None)
@given(weeks_with_limits())
def test_an_option_costs_what_planning_with_it_held_costs(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    for within in (D(0), D(3)):
        for option in options(plan, within):
            assert option.extra <= within
            assert option.cost == option.extra * option.quantity
            assert not option.extra or option.cost <= within
            if option.key in week.holds:
                continue
            after = planned(week.apply(SetHold(option.key, option.now + option.quantity, "tried")))
            assert after is not None
            assert after.total_cost - plan.total_cost == option.cost


@settings(max_examples=80, deadline=None)
@given(weeks_with_limits())
def test_an_alternative_costs_what_planning_with_one_more_on_it_costs(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    for customer in plan.model.customers:
        for one in why(plan, customer).alternatives:
            assert one.quantity == carried(plan, one.key)
            if one.key in week.holds or one.standing in ("full", "shut"):
                assert one.leg is None
                continue
            after = planned(week.apply(SetHold(one.key, one.quantity + 1, "tried")))
            if one.leg is None:
                assert after is None or after.total_cost is not None
                continue
            assert after is not None
            assert after.total_cost - plan.total_cost == one.dearer == one.leg.cost
            assert one.displaced is not None
