"""Chains add up: the moves to the value of a unit, the legs to what planning anew costs."""

from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Alter, Change, SetHold
from engine.figures import Customer, Depot, Order, RateKey, RateRow, Rules
from engine.planning.planner import plan_week
from engine.reasons.chains import chain
from engine.reasons.telling import sentences
from engine.reasons.values import values
from engine.week import Week
from tests.reasons.weeks import gone_from, planned, weeks_with_gone, weeks_with_limits

D = Decimal


def found_today(week: Week, kind: str, name: str) -> Decimal:
    return week.depots[name].available if kind == "depot" else week.customers[name].ordered


@settings(max_examples=200, deadline=None)
@given(weeks_with_limits() | weeks_with_gone(), st.data())
def test_legs_add_up_to_what_planning_anew_costs(week: Week, data: st.DataObject) -> None:
    plan = planned(week)
    if plan is None:
        return
    figure = D(data.draw(st.integers(0, 25)))
    kind = data.draw(st.sampled_from(["customer", "depot", "hold"]))
    change: Change
    if kind == "hold":
        rows = list(week.rates)
        row = rows[data.draw(st.integers(0, len(rows) - 1))]
        change = SetHold(RateKey(row.depot, row.customer, row.haulier), min(figure, D(12)), "asked")
    else:
        name = data.draw(st.sampled_from(plan.model.depots if kind == "depot" else plan.model.customers))
        change = Alter(kind, name, "available" if kind == "depot" else "ordered", figure)  # type: ignore[arg-type]
    found = chain(plan, change)
    if kind != "hold" and gone_from(week, kind, name) > min(figure, found_today(week, kind, name)):
        return
    after = planned(week.apply(change))
    for leg in found.legs:
        assert sum(move.change * move.cost for move in leg.moves) == leg.cost
    for text in sentences(found, "t", "EUR"):
        assert "None" not in text
    if found.ends_early:
        if kind == "depot" and figure < (week.depots[change.key].must_move or 0):  # type: ignore[union-attr,index]
            return
        assert after is None or kind == "hold"
        return
    if after is not None:
        assert after.total_cost - plan.total_cost == found.cost
        assert found.quantity == abs(found.asked)


@settings(max_examples=100, deadline=None)
@given(weeks_with_limits())
def test_the_first_leg_costs_the_value_of_a_unit(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    found = values(plan)
    for one in found.customers:
        ordered = week.customers[one.name].ordered
        legs = chain(plan, Alter("customer", one.name, "ordered", ordered + 1)).legs
        assert (legs[0].cost if legs else None) == one.one_more
        if not any(c.may_decline for c in week.customers.values()) and legs:
            assert legs[0].short == one.one_more_short
    for one in found.depots:
        available = week.depots[one.name].available
        for figure, value in ((available + 1, one.one_more), (available - 1, one.one_less)):
            legs = chain(plan, Alter("depot", one.name, "available", figure)).legs
            assert (legs[0].cost if legs else None) == value


def displacing() -> Week:
    """Harbour serves Elm (only Harbour can) and Ash; Quarry has stock left and reaches Ash."""
    return Week.of(
        (Depot("Harbour", D(30)), Depot("Quarry", D(40))),
        (Customer("Elm", (Order(D(10)),)), Customer("Ash", (Order(D(20)),))),
        (
            RateRow("Harbour", "Elm", D("5.00")),
            RateRow("Harbour", "Ash", D("4.00")),
            RateRow("Quarry", "Ash", D("7.00")),
        ),
        Rules(charge_if_short=D(50)),
    )


def test_a_chain_in_words() -> None:
    """By hand: 5.00 to Elm, less 4.00 at Ash, plus 7.00 from Quarry: +8 per t."""
    week = displacing()
    found = chain(plan_week(week), Alter("customer", "Elm", "ordered", D(20)))
    assert sentences(found, "t", "EUR") == (
        "10 t more to Elm from Harbour: Harbour gives up 10 t at Ash, which Quarry takes; "
        "Quarry keeps 10 t less; +8 EUR per t.",
    )
    assert found.cost == 80


def test_other_chains_in_words() -> None:
    plan = plan_week(displacing())
    told = [
        sentences(chain(plan, change), "t", "EUR")
        for change in (
            Alter("customer", "Ash", "ordered", D(15)),
            Alter("depot", "Harbour", "available", D(25)),
            Alter("depot", "Quarry", "available", D(45)),
            SetHold(RateKey("Quarry", "Ash"), D(5)),
            Alter("customer", "Elm", "ordered", D(90)),
        )
    ]
    assert told == [
        ("5 t less to Ash from Harbour: Harbour keeps 5 t more; -4 EUR per t.",),
        (
            "5 t less at Harbour: Harbour gives up 5 t at Ash, which Quarry takes; "
            "Quarry keeps 5 t less; +3 EUR per t.",
        ),
        ("5 t more at Quarry: Quarry keeps 5 t more; 0 EUR per t.",),
        (
            "5 t more from Quarry to Ash, in place of Harbour: "
            "Quarry keeps 5 t less and Harbour keeps 5 t more; +3 EUR per t.",
        ),
        (
            "20 t more to Elm from Harbour: Harbour gives up 20 t at Ash, which Quarry takes; "
            "Quarry keeps 20 t less; +8 EUR per t.",
            "Elm goes short of 60 t more; +50 EUR per t, and 1 t more goes short.",
        ),
    ]


def test_other_changes_have_no_chain() -> None:
    plan = plan_week(displacing())
    with pytest.raises(ValueError, match="another ordered or available quantity"):
        chain(plan, Alter("customer", "Nobody", "ordered", D(3)))
    with pytest.raises(ValueError, match="no rate row"):
        chain(plan, SetHold(RateKey("Quarry", "Elm"), D(3)))


def test_a_chain_that_leaves_somebody_short_or_goods_that_must_move_says_so() -> None:
    """Quarry's 10 must move and go to Elm; put on Northgate instead, they stay."""
    week = Week.of(
        (Depot("Quarry", D(10), must_move=D(10)), Depot("Northgate", D(10))),
        (Customer("Elm", (Order(D(10)),)),),
        (RateRow("Quarry", "Elm", D(9)), RateRow("Northgate", "Elm", D(4))),
    )
    (told,) = sentences(chain(plan_week(week), SetHold(RateKey("Northgate", "Elm"), D(3))), "t", "EUR")
    assert told == (
        "3 t more from Northgate to Elm, in place of Quarry: "
        "Northgate keeps 3 t less and Quarry keeps 3 t more; -5 EUR per t, and 1 t more stays that must move."
    )


def test_even_shares_end_a_chain_where_somebody_would_go_short() -> None:
    week = Week.of(
        (Depot("Quarry", D(12)),),
        (Customer("Elm", (Order(D(5)),)), Customer("Ash", (Order(D(5)),))),
        (RateRow("Quarry", "Elm", D(3)), RateRow("Quarry", "Ash", D(3))),
        Rules(when_short="even share"),
    )
    plan = plan_week(week)
    found = chain(plan, Alter("customer", "Elm", "ordered", D(9)))
    assert [(leg.quantity, leg.cost) for leg in found.legs] == [(2, 3)]
    assert "shared evenly" in found.ends_early
    elm = values(plan).customers[0]
    assert (elm.one_more, elm.one_less) == (3, -3)
    full = plan_week(week.apply(Alter("depot", "Quarry", "available", D(10))))
    assert values(full).customers[0].one_more is None
    assert values(full).depots[0].one_less is None
