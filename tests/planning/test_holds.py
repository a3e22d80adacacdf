"""Holds: their price, many at once, and a quantity for a whole lane."""

from decimal import Decimal

import pytest

from engine.changes import SetHold
from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow
from engine.planning.holds import NoSingleRow, all_lifted, held_as_planned, hold_on_lane, priced_holds
from engine.planning.lanes import lanes
from engine.planning.planner import plan_week
from engine.week import Week

D = Decimal


def week() -> Week:
    """Quarry 10 at 4 (Teal) or 5 (Vole) and Harbour 20 at 7 for Elm's 15."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Harbour", D(20))),
        (Customer("Elm", (Order(D(15)),)), Customer("Ash", (Order(D(1)),))),
        (
            RateRow("Quarry", "Elm", D(5), haulier="Vole"),
            RateRow("Quarry", "Elm", D(4), haulier="Teal"),
            RateRow("Harbour", "Elm", D(7)),
            RateRow("Harbour", "Ash", D(7), closed=True),
        ),
    )


def test_a_hold_costs_what_lifting_it_would_save() -> None:
    """Held at 8 from Harbour instead of 5: 3 times (7 - 4) = 9."""
    held = week().apply(SetHold(RateKey("Harbour", "Elm"), D(8), "promised"))
    (priced,) = priced_holds(plan_week(held))
    assert (priced.freight, priced.charges) == (9, 0)
    assert priced.hold == Hold(D(8), "promised")


def test_a_whole_list_is_held_and_lifted_as_one_act() -> None:
    plan = plan_week(week())
    change = held_as_planned(lanes(plan, depot="Quarry"), "list handed out")
    assert change is not None
    held = week().apply(change)
    assert held.holds == {RateKey("Quarry", "Elm", "Teal"): Hold(D(10), "list handed out")}
    lift = all_lifted(held.holds)
    assert lift is not None
    assert held.apply(lift) == week()
    assert held_as_planned(lanes(plan_week(held), depot="Quarry")) is None


def test_a_quantity_for_a_lane_goes_on_the_row_in_use_or_the_cheapest() -> None:
    plan = plan_week(week())
    assert hold_on_lane(plan, "Quarry", "Elm", D(3)).key.haulier == "Teal"
    with pytest.raises(NoSingleRow, match="No open rate leads from Harbour to Ash"):
        hold_on_lane(plan, "Harbour", "Ash", D(1))
    both = plan_week(week().apply(SetHold(RateKey("Quarry", "Elm", "Vole"), D(2))))
    with pytest.raises(NoSingleRow, match="Several rates share the lane"):
        hold_on_lane(both, "Quarry", "Elm", D(5))
