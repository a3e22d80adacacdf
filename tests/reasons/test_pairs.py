"""One more at both ends, against planning both changes anew."""

from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Alter
from engine.figures import Customer, Depot, Order, RateRow
from engine.planning.planner import plan_week
from engine.reasons.pairs import pairs
from engine.reasons.values import values
from engine.week import Week
from tests.reasons.weeks import planned, weeks_with_limits

D = Decimal


@settings(max_examples=100, deadline=None)
@given(weeks_with_limits())
def test_pairs_are_all_that_cost_less_together_and_are_news(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    found = {(pair.depot, pair.customer): pair.cost for pair in pairs(plan, most=1000)}
    value_of = values(plan)
    more = {v.name: v for v in (*value_of.depots, *value_of.customers)}
    for depot in week.depots.values():
        for customer in week.customers.values():
            both = week.apply(Alter("depot", depot.name, "available", depot.available + 1)).apply(
                Alter("customer", customer.name, "ordered", customer.ordered + 1)
            )
            after = planned(both)
            assert after is not None
            change = after.total_cost - plan.total_cost
            said = found.get((depot.name, customer.name))
            one, other = more[depot.name], more[customer.name]
            if said is not None:
                assert said == change < 0
            elif change < 0 and other.one_more is not None and one.one_more is not None:
                short = sum(s.quantity for s in after.short) - sum(s.quantity for s in plan.short)
                same_aims = short == 0 and not any(c.may_decline for c in week.customers.values())
                nothing_moves = one.one_more_short == other.one_more_short == 0
                if same_aims and nothing_moves and not any(d.must_move for d in week.depots.values()):
                    assert change == one.one_more + other.one_more


def test_more_costs_less_worked_by_hand() -> None:
    """Elm's eleventh tonne comes from Northgate at 20, since Quarry has no more; Northgate serves Ash at 1.

    Now 10*1 + 1*20 + 9*1 = 39. With one more at Quarry and one more for Ash: 11*1 + 10*1 = 21, 18 less.
    """
    week = Week.of(
        (Depot("Quarry", D(10)), Depot("Northgate", D(10))),
        (Customer("Elm", (Order(D(11)),)), Customer("Ash", (Order(D(9)),))),
        (
            RateRow("Quarry", "Elm", D(1)),
            RateRow("Quarry", "Ash", D(50)),
            RateRow("Northgate", "Elm", D(20)),
            RateRow("Northgate", "Ash", D(1)),
        ),
    )
    found = pairs(plan_week(week))
    assert [(pair.depot, pair.customer, pair.cost) for pair in found] == [("Quarry", "Ash", -18)]
