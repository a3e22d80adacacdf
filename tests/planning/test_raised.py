"""A haulier's rates by a percentage, worked by hand; planned shipments that leave as they are."""

from datetime import date
from decimal import Decimal

import pytest

import engine
from engine.changes import Add, Alter, Together
from engine.figures import Customer, Depot, Gone, Order, RateKey, RateRow
from engine.planning.differences import ShortDifference, outcome
from engine.planning.gone_shipped import NoRateThatDay, gone_as_shipped
from engine.planning.raised import haulier_rates, raised
from engine.rates import Rates
from engine.week import Week


def small() -> Week:
    """Weir has 50 t at 10 by Pike and 12 by Roach for Ash, who wants 40; Elm wants 30 at 8.05 by Pike."""
    return Week(
        depots={"Weir": Depot("Weir", Decimal(50))},
        customers={
            name: Customer(name, (Order(Decimal(ordered)),), charge_if_short=Decimal(charge))
            for name, ordered, charge in (("Ash", 40, 9), ("Elm", 30, 5))
        },
        rates=Rates.of(
            [
                RateRow("Weir", "Ash", Decimal(10), haulier="Pike"),
                RateRow("Weir", "Ash", Decimal(12), haulier="Roach"),
                RateRow("Weir", "Elm", Decimal("8.05"), haulier="Pike", valid_from=date(2026, 2, 3)),
            ]
        ),
    )


def test_all_rates_of_a_haulier_rise_exactly_and_no_other() -> None:
    week = small()
    change = raised(week, "Pike", Decimal("4.5"))
    assert change.changes == (
        Alter("rate", RateKey("Weir", "Ash", "Pike"), "rate", Decimal("10.45")),
        Alter("rate", RateKey("Weir", "Elm", "Pike"), "rate", Decimal("8.41225")),  # 8.05 x 1.045
    )
    assert haulier_rates(week, "Pike") == 2
    lowered = week.apply(raised(week, "Roach", Decimal(-50)))
    assert [row.rate for row in lowered.rates] == [Decimal(10), Decimal(6), Decimal("8.05")]
    assert raised(week, "Tench", Decimal(5)).changes == ()
    assert raised(week, "Pike", Decimal(0)).changes == ()


def test_a_change_names_who_goes_short_of_more_and_of_less() -> None:
    plan = engine.plan_week(small())
    assert [(one.customer, one.quantity) for one in plan.short] == [("Elm", 20)]
    found = outcome(plan, Alter("customer", "Elm", "charge_if_short", Decimal(99))).difference
    assert found is not None
    assert found.short == 0
    assert found.who_short == (ShortDifference("Ash", Decimal(20)), ShortDifference("Elm", Decimal(-20)))
    assert outcome(plan, Together(())).difference.who_short == ()  # type: ignore[union-attr]


def test_ticked_shipments_are_gone_whole_at_the_rate_of_their_day() -> None:
    plan = engine.plan_week(small())
    day = date(2026, 2, 4)
    ash, elm = RateKey("Weir", "Ash", "Pike"), RateKey("Weir", "Elm", "Pike")
    change = gone_as_shipped(plan, [ash, elm], day)
    assert change.changes == (
        Add(Gone("Load 1", "Weir", "Ash", Decimal(40), Decimal(10), "Pike", day)),
        Add(Gone("Load 2", "Weir", "Elm", Decimal(10), Decimal("8.05"), "Pike", day)),
    )
    after = engine.plan_week(plan.week.apply(change))
    assert after.freight_payable == plan.freight_payable
    assert all(one.gone for one in after.shipments)
    assert gone_as_shipped(after, [ash], day).changes == ()  # nothing of it is left to go
    with pytest.raises(NoRateThatDay, match="Weir to Elm by Pike"):
        gone_as_shipped(plan, [elm], date(2026, 2, 2))
