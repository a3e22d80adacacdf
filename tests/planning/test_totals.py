"""The dearest lanes of a plan, counted by hand."""

from decimal import Decimal

import engine
from engine.figures import Customer, Depot, Order, RateRow
from engine.planning.totals import dearest_lanes
from engine.week import Week

D = Decimal


def week(*rates: tuple[str, int, int]) -> Week:
    """One depot; each customer takes so much at such a rate."""
    return Week.of(
        (Depot("Quay", D(1000)),),
        tuple(Customer(name, (Order(D(ordered)),)) for name, ordered, _ in rates),
        tuple(RateRow("Quay", name, rate=D(rate)) for name, _, rate in rates),
    )


def test_the_fewest_lanes_that_come_to_half_of_the_freight() -> None:
    """50, 30, 40 and 20 in all 140: 50 alone is less than 70, 50 and 40 are more."""
    plan = engine.plan_week(week(("Ash", 10, 5), ("Elm", 30, 1), ("Oak", 10, 4), ("Fir", 20, 1)))
    assert dearest_lanes(plan) == {("Quay", "Ash"), ("Quay", "Oak")}


def test_exactly_half_is_enough_and_nothing_needs_no_lane() -> None:
    assert dearest_lanes(engine.plan_week(week(("Ash", 10, 2), ("Elm", 20, 1)))) in (
        {("Quay", "Ash")},
        {("Quay", "Elm")},
    )
    assert dearest_lanes(engine.plan_week(week(("Ash", 0, 2)))) == frozenset()
