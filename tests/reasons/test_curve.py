"""Curves against planning the week anew at every whole figure, and one worked by hand."""

from dataclasses import replace
from decimal import Decimal
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Alter
from engine.figures import Customer, Depot, Order, RateRow
from engine.planning.planner import plan_week
from engine.reasons.curve import Curve, CurvePoint, curve
from engine.week import Week
from tests.reasons.weeks import gone_from, planned, weeks_with_gone, weeks_with_limits

D = Decimal


def cost_at(found: Curve, figure: Decimal) -> Decimal | None:
    """The total cost that the curve says at a figure, None outside its range."""
    for before, after in pairwise(found.points):
        if before.figure <= figure <= after.figure and before.next_unit is not None:
            return before.total_cost + before.next_unit * (figure - before.figure)
    return next((p.total_cost for p in found.points if p.figure == figure), None)


def assert_shape(points: tuple[CurvePoint, ...]) -> None:
    """Corners rise in figure; the value of the next unit falls nowhere where the aims stay as they are."""
    for before, after in pairwise(points):
        assert before.figure < after.figure
        assert before.next_unit is not None
        assert after.total_cost - before.total_cost == before.next_unit * (after.figure - before.figure)
        assert before.total_cost == before.freight_cost + before.short_cost + before.unsent_cost
    assert not points or points[-1].next_unit is None


@settings(max_examples=120, deadline=None)
@given(weeks_with_limits() | weeks_with_gone(), st.data())
def test_a_curve_is_what_planning_anew_costs_at_every_figure(week: Week, data: st.DataObject) -> None:
    plan = planned(week)
    if plan is None:
        return
    what = data.draw(st.sampled_from(["depot", "customer"]))
    name = data.draw(st.sampled_from(plan.model.depots if what == "depot" else plan.model.customers))
    low = data.draw(st.integers(0, 20))
    high = low + data.draw(st.integers(0, 15))
    found = curve(plan, name, D(low), D(high))
    assert_shape(found.points)
    gone = gone_from(week, what, name)
    if gone > found.today:
        assert found.withheld
        return
    field = "available" if what == "depot" else "ordered"
    for figure in range(low, high + 1):
        said = cost_at(found, D(figure))
        if figure < gone:
            assert said is None
            continue
        if what == "depot" and figure < (week.depots[name].must_move or 0):
            assert said is None
            continue
        after = planned(week.apply(Alter(what, name, field, D(figure))))
        assert said == (None if after is None else after.total_cost), figure
        for point in found.points:
            if after is not None and point.figure == figure:
                assert point.short >= 0


def stepped() -> Week:
    """Quarry 10 at 4, Northgate 5 at 7; Elm pays a charge of 20 for what is short."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Northgate", D(5))),
        (Customer("Elm", (Order(D(8)),), charge_if_short=D(20)),),
        (RateRow("Quarry", "Elm", D(4)), RateRow("Northgate", "Elm", D(7))),
    )


def test_a_curve_worked_by_hand() -> None:
    """Elm's order costs 4 a unit up to 10 (Quarry), 7 up to 15 (Northgate), then 20 for going short."""
    found = curve(plan_week(stepped()), "Elm", D(0), D(18))
    assert [(p.figure, p.total_cost, p.next_unit, p.next_short) for p in found.points] == [
        (0, 0, 4, 0),
        (8, 32, 4, 0),
        (10, 40, 7, 0),
        (15, 75, 20, 1),
        (18, 135, None, None),
    ]
    assert [p.short_cost for p in found.points] == [0, 0, 0, 0, 60]
    assert [p.freight_cost for p in found.points] == [0, 32, 40, 75, 75]
    assert not found.ends_early


def test_a_range_beside_today_and_one_that_ends_early() -> None:
    beside = curve(plan_week(stepped()), "Elm", D(12), D(14))
    assert [(p.figure, p.total_cost, p.next_unit) for p in beside.points] == [(12, 54, 7), (14, 68, None)]
    must = replace(stepped().depots["Quarry"], must_move=D(4))
    week = Week.of(
        (must, stepped().depots["Northgate"]), tuple(stepped().customers.values()), stepped().rates
    )
    early = curve(plan_week(week), "Quarry", D(0), D(12))
    assert early.points[0].figure == 4
    assert early.ends_early


def test_a_curve_refuses_what_is_no_range_and_nobody() -> None:
    plan = plan_week(stepped())
    with pytest.raises(ValueError, match="range"):
        curve(plan, "Elm", D(5), D(4))
    with pytest.raises(ValueError, match="no depot or customer"):
        curve(plan, "Nobody", D(0), D(4))
