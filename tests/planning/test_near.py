"""Among plans of equal cost, the one nearest an earlier plan."""

from decimal import Decimal

from hypothesis import given, settings

from engine.changes import Alter
from engine.figures import Customer, Depot, Order, RateKey, RateRow
from engine.planning.differences import difference
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal


def tied_week() -> Week:
    """Two depots, two customers, every rate 5: any way to send 10 and 10 costs 100."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Harbour", D(10))),
        (Customer("Elm", (Order(D(10)),)), Customer("Ash", (Order(D(10)),))),
        tuple(RateRow(d, c, D(5)) for d in ("Quarry", "Harbour") for c in ("Elm", "Ash")),
    )


def test_a_plan_of_equal_cost_stays_as_it_was() -> None:
    crossed = {RateKey("Quarry", "Ash"): D(10), RateKey("Harbour", "Elm"): D(10)}
    straight = {RateKey("Quarry", "Elm"): D(10), RateKey("Harbour", "Ash"): D(10)}
    for earlier in (crossed, straight):
        plan = plan_week(tied_week(), near=earlier)
        assert {s.key: s.quantity for s in plan.shipments} == earlier
    again = plan_week(tied_week(), near=plan_week(tied_week(), near=crossed))
    assert {s.key: s.quantity for s in again.shipments} == crossed


def test_only_what_must_move_moves() -> None:
    """Ash orders 4 less: 4 fewer go to Ash from the depot that served it, the rest stays."""
    crossed = plan_week(tied_week(), near={RateKey("Quarry", "Ash"): D(10), RateKey("Harbour", "Elm"): D(10)})
    plan = plan_week(tied_week().apply(Alter("customer", "Ash", "ordered", D(6))), near=crossed)
    assert [(row.key, row.more) for row in difference(crossed, plan).rows] == [(RateKey("Quarry", "Ash"), -4)]


def test_without_an_earlier_plan_nothing_is_split_needlessly() -> None:
    assert len(plan_week(tied_week()).shipments) == 2


@settings(max_examples=300, deadline=None)
@given(weeks())
def test_nearness_costs_nothing_and_a_plan_is_nearest_to_itself(week: Week) -> None:
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    again = plan_week(week, near=plan)
    assert again.total_cost == plan.total_cost
    assert difference(plan, again).rows == ()
