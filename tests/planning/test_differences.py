"""What a change would cost and move, worked by hand."""

from decimal import Decimal

from engine.changes import Alter, SetHold
from engine.figures import Customer, Depot, Order, RateKey, RateRow
from engine.planning.differences import outcome
from engine.planning.planner import plan_week
from engine.week import Week

D = Decimal


def week() -> Week:
    """Quarry 10 at 4 and Harbour 20 at 7 for Elm's 15: 10 from Quarry and 5 from Harbour, 75."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Harbour", D(20))),
        (Customer("Elm", (Order(D(15)),)),),
        (RateRow("Quarry", "Elm", D(4)), RateRow("Harbour", "Elm", D(7), haulier="Vole")),
    )


def test_a_hold_shows_its_price_and_whom_it_moves() -> None:
    """Holding Harbour at 8 takes 3 from Quarry: 3 * (7 - 4) = 9 dearer."""
    plan = plan_week(week())
    found = outcome(plan, SetHold(RateKey("Harbour", "Elm", "Vole"), D(8), "promised"))
    assert found.plan is not None
    assert found.difference is not None
    assert found.difference.freight_payable == 9
    assert [row.words("t") for row in found.difference.rows] == [
        "3 t less from Quarry to Elm",
        "3 t more from Harbour to Elm by Vole",
    ]
    assert found.difference.to_ring == ("Quarry", "Elm", "Harbour", "Vole")
    assert not plan.week.holds


def test_a_doubled_order_shows_its_price_before_it_is_accepted() -> None:
    """15 more: Harbour has 15 left, at 7: 105 dearer, nobody short."""
    found = outcome(plan_week(week()), Alter("customer", "Elm", "ordered", D(30)))
    assert found.difference is not None
    assert (found.difference.freight_payable, found.difference.short) == (105, 0)


def test_what_cannot_be_done_says_why() -> None:
    found = outcome(plan_week(week()), SetHold(RateKey("Harbour", "Elm", "Vole"), D(16)))
    assert found.plan is None
    assert "Elm has 15 t ordered, but 16 t are forced" in found.findings[0].message
    assert outcome(plan_week(week()), SetHold(RateKey("Harbour", "Ash"), D(1))).plan is None
