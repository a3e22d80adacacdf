"""Values of a unit against brute force: change the figure by one and plan again."""

from dataclasses import replace
from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Alter
from engine.figures import Customer, Depot, Order, RateRow
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.reasons.values import UnitValue, values
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal


def short_of(plan: Plan) -> Decimal:
    return sum((s.quantity for s in plan.short), D(0))


def changed_by(week: Week, plan: Plan, change: Alter) -> tuple[Decimal, Decimal] | None:
    """What planning the changed week anew says the change costs, and does to what goes short."""
    try:
        after = plan_week(week.apply(change))
    except NotPlannable:
        return None
    return after.total_cost - plan.total_cost, short_of(after) - short_of(plan)


@settings(max_examples=600, deadline=None)
@given(weeks())
def test_values_are_what_planning_the_changed_week_costs(week: Week) -> None:
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    found = values(plan)
    declining = any(c.may_decline for c in week.customers.values())
    for value in found.customers:
        ordered = week.customers[value.name].ordered
        sides = [(value.one_more, value.one_more_short, ordered + 1)]
        if ordered > 0:
            sides.append((value.one_less, value.one_less_short, ordered - 1))
        else:
            assert value.one_less is None
        for cost, short, figure in sides:
            expected = changed_by(week, plan, Alter("customer", value.name, "ordered", figure))
            assert_same(cost, short, expected, declining)
    for value in found.depots:
        depot = week.depots[value.name]
        expected = changed_by(week, plan, Alter("depot", value.name, "available", depot.available + 1))
        assert_same(value.one_more, value.one_more_short, expected, declining)
        if depot.available == (depot.must_move or 0):
            assert value.one_less is None
            continue
        expected = changed_by(week, plan, Alter("depot", value.name, "available", depot.available - 1))
        assert_same(value.one_less, value.one_less_short, expected, declining)


def assert_same(
    cost: Decimal | None, short: Decimal | None, expected: tuple[Decimal, Decimal] | None, declining: bool
) -> None:
    if expected is None:
        assert cost is None
        return
    assert cost == expected[0]
    if not declining:  # who may decline can tie with being served, and then either is right
        assert short == expected[1]


def named(found: tuple[UnitValue, ...]) -> dict[str, UnitValue]:
    return {value.name: value for value in found}


def test_one_more_and_one_less_worked_by_hand() -> None:
    """Quarry 10 at 4, Northgate 20 at 7 for Elm's 10: one more comes from Northgate at 7, one less saves 4.

    One tonne more at Quarry would replace nothing (Elm has its 10): it stays, 0. One less there brings 7
    from Northgate and saves 4: 3.
    """
    week = Week.of(
        (Depot("Quarry", D(10)), Depot("Northgate", D(20))),
        (Customer("Elm", (Order(D(10)),)),),
        (RateRow("Quarry", "Elm", D(4)), RateRow("Northgate", "Elm", D(7))),
    )
    found = values(plan_week(week))
    elm, quarry = found.customers[0], named(found.depots)["Quarry"]
    assert (elm.one_more, elm.one_less) == (7, -4)
    assert (quarry.one_more, quarry.one_less) == (0, 3)
    assert (elm.one_more_short, elm.one_less_short) == (0, 0)


def test_one_more_where_stock_is_short_says_that_somebody_goes_short() -> None:
    """5 for 10 ordered at a charge of 2: one more ordered is one more short, 2; one more stock delivers one
    more at 3 and saves the charge of 2: 1 dearer, 1 less short."""
    week = Week.of(
        (Depot("Quarry", D(5)),),
        (Customer("Elm", (Order(D(10)),), charge_if_short=D(2)),),
        (RateRow("Quarry", "Elm", D(3)),),
    )
    found = values(plan_week(week))
    elm, quarry = found.customers[0], found.depots[0]
    assert (elm.one_more, elm.one_more_short) == (2, 1)
    assert (elm.one_less, elm.one_less_short) == (-2, -1)
    assert (quarry.one_more, quarry.one_more_short) == (1, -1)
    assert (quarry.one_less, quarry.one_less_short) == (-1, 1)


def test_values_are_withheld_where_shares_would_move() -> None:
    week = Week.of(
        (Depot("Quarry", D(5)),),
        (Customer("Elm", (Order(D(10)),)), Customer("Ash", (Order(D(10)),))),
        (RateRow("Quarry", "Elm", D(3)), RateRow("Quarry", "Ash", D(3))),
    )
    shared = replace(week, rules=replace(week.rules, when_short="even share"))
    found = values(plan_week(shared))
    assert found.withheld
    assert all(value.one_more is None for value in (*found.depots, *found.customers))
