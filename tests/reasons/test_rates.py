"""Thresholds of rates against brute force: alter the rate and plan again."""

from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Alter
from engine.figures import RateKey
from engine.planning.plan import Plan
from engine.planning.planner import plan_week
from engine.reasons.rates import RateInterval, rate_intervals
from engine.week import Week
from tests.reasons.weeks import planned, weeks_with_limits

D = Decimal
LITTLE = D("0.001")
FAR = D(5000)


def cost_of(plan: Plan, at: Plan) -> int:
    """What the quantities of `plan` cost at the figures of `at`, in money and in aims together."""
    return sum(
        q * c for q, c in zip(plan.flow.quantity.tolist(), at.model.problem.cost.tolist(), strict=True)
    )


def stays(plan: Plan, key: RateKey, rate: Decimal) -> bool:
    """Whether the plan's quantities are still the best at this rate."""
    after = plan_week(plan.week.apply(Alter("rate", key, "rate", rate)))
    return cost_of(plan, after) == after.flow.cost


def assert_true_interval(plan: Plan, one: RateInterval) -> None:
    """The plan stays at both ends, and not beyond them."""
    if one.stays_from is None:
        assert stays(plan, one.key, one.rate - FAR), one
    else:
        assert one.stays_from <= one.rate
        assert stays(plan, one.key, one.stays_from), one
        assert not stays(plan, one.key, one.stays_from - LITTLE), one
    if one.stays_to is None:
        assert stays(plan, one.key, one.rate + FAR), one
    else:
        assert one.stays_to >= one.rate
        assert stays(plan, one.key, one.stays_to), one
        assert not stays(plan, one.key, one.stays_to + LITTLE), one


@settings(max_examples=150, deadline=None)
@given(weeks_with_limits())
def test_within_its_interval_a_rate_leaves_the_plan_as_it_is(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    for one in rate_intervals(plan):
        assert_true_interval(plan, one)
        assert (one.pays_below is None) == (one.quantity > 0 or one.stays_from is None)
