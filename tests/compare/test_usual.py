"""The usual plan: rules of thumb against hand-worked examples whose sources are named, and its duties."""

import json
from decimal import Decimal
from pathlib import Path

import pytest
from geographiclib.geodesic import Geodesic
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.compare.distances import distances
from engine.compare.service import saving
from engine.compare.usual import NoRule, Rule, rules_possible, usual_plan
from engine.figures import Customer, Depot, Gone, Hold, Order, RateKey, RateRow, Rules
from engine.planning.model import model_of
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal
PUBLISHED = Path(__file__).parents[1] / "published" / "worked_examples.json"
EXAMPLES = {one["id"]: one for one in json.loads(PUBLISHED.read_text(), parse_float=Decimal)}

LEAST_COST_STARTS = {"ta-grain-3x4": 475, "ty-wheat-3x3": 4550, "in-743-3x4": 814}
"""What the least-cost method comes to by hand in the books that `worked_examples.json` names for each (Taha,
*Operations Research*; Taylor, *Introduction to Management Science*; the third as it says there); the starts
themselves stand in its notes, from memory."""


def week_of(example: dict[str, object]) -> Week:
    supply, demand, cost = (example[name] for name in ("supply", "demand", "cost"))
    depots = tuple(Depot(f"D{i}", D(s)) for i, s in enumerate(supply))  # type: ignore[arg-type]
    customers = tuple(Customer(f"C{j}", (Order(D(d)),)) for j, d in enumerate(demand))  # type: ignore[arg-type]
    rows = tuple(
        RateRow(f"D{i}", f"C{j}", D(c))
        for i, line in enumerate(cost)  # type: ignore[arg-type]
        for j, c in enumerate(line)
    )
    return Week.of(depots, customers, rows)


@pytest.mark.parametrize("example", LEAST_COST_STARTS)
def test_cheapest_lane_first_is_the_least_cost_method_of_the_books(example: str) -> None:
    found = usual_plan(week_of(EXAMPLES[example]), Rule.CHEAPEST)
    assert found.costs.freight_cost == LEAST_COST_STARTS[example]
    assert not found.costs.short


def placed(**rates: str) -> Week:
    """Two depots on the equator a degree apart, customers at 0.2 and 0.8 degrees; rates by lane."""
    return Week.of(
        (
            Depot("West", D(10), latitude=D(0), longitude=D(0)),
            Depot("East", D(20), latitude=D(0), longitude=D(1)),
        ),
        (
            Customer("Near", (Order(D(12)),), latitude=D(0), longitude=D("0.2")),
            Customer("Far", (Order(D(8)),), latitude=D(0), longitude=D("0.8")),
        ),
        tuple(RateRow(*lane.split("_"), D(rate)) for lane, rate in rates.items()),
        Rules(unit="t"),
    )


def lanes(found: object) -> dict[tuple[str, str], Decimal]:
    return {(s.depot, s.customer): s.quantity for s in found.shipments}  # type: ignore[attr-defined]


def test_nearest_depot_first_by_hand() -> None:
    week = placed(West_Near="5", West_Far="1", East_Near="6", East_Far="9")
    usual = usual_plan(week, Rule.NEAREST)
    # West and East are 0.2 degrees from Near and Far: each takes its own, what West lacks East brings
    assert lanes(usual.costs) == {
        ("West", "Near"): D(10), ("East", "Near"): D(2), ("East", "Far"): D(8),
    }  # fmt: skip
    assert usual.costs.freight_cost == 10 * 5 + 2 * 6 + 8 * 9
    plan = plan_week(week)  # Far is cheap from West: 8 from there, Near takes 2 from West and 10 from East
    assert plan.freight_cost == 8 * 1 + 2 * 5 + 10 * 6
    found = saving(plan, usual.costs)
    assert found.equal
    assert (found.freight, found.per_unit) == (D(134 - 78), D("2.8"))
    assert sum(one.saving for one in found.lanes) == found.freight
    assert {(one.depot, one.customer): one.saving for one in found.lanes} == {
        ("West", "Near"): D(40), ("East", "Near"): D(-48), ("West", "Far"): D(-8), ("East", "Far"): D(72),
    }  # fmt: skip


def test_kilometres_given_outdo_the_straight_line() -> None:
    week = placed(West_Near="5", East_Near="5")
    week = Week.of(
        tuple(week.depots.values()),
        tuple(week.customers.values()),
        (RateRow("West", "Near", D(5), km=D("70.5")), RateRow("East", "Near", D(5), km=D(30))),
    )
    assert lanes(usual_plan(week, Rule.NEAREST).costs) == {("East", "Near"): D(12)}
    found = distances(week, model_of(week))
    assert (found.given, found.straight, found.unknown) == (2, 0, 0)


def test_equal_service_by_hand_where_the_rule_leaves_somebody_short() -> None:
    """Cheapest first gives West to Near at 1, and Far, which only West reaches, goes short."""
    week = placed(West_Near="1", West_Far="2", East_Near="4")
    usual = usual_plan(week, Rule.CHEAPEST)
    assert lanes(usual.costs) == {("West", "Near"): D(10), ("East", "Near"): D(2)}
    assert usual.costs.freight_cost == 18
    plan = plan_week(week)
    assert plan.freight_cost == 2 * 1 + 8 * 2 + 10 * 4
    found = saving(plan, usual.costs)
    assert not found.equal
    assert found.differs == ("The usual plan delivers 8 t less: Far 8.",)
    # the cheapest way to bring Near its 12 is the usual one: nothing is saved at equal service
    assert found.freight == 0


def test_distances_are_those_of_the_sphere() -> None:
    """Against geodesics of the ellipsoid (Karney, geographiclib): at most 0.56 % off."""
    pairs = [(51.5, -0.1, 48.85, 2.35), (-33.9, 18.4, -46.5, 168.3), (0.0, 179.5, 0.0, -179.5)]
    for north, east, other_north, other_east in pairs:
        week = Week.of(
            (Depot("A", D(1), latitude=D(str(north)), longitude=D(str(east))),),
            (Customer("B", (Order(D(1)),), latitude=D(str(other_north)), longitude=D(str(other_east))),),
            (RateRow("A", "B", D(1)),),
        )
        line = Geodesic.WGS84.Inverse(north, east, other_north, other_east)["s12"] / 1000
        assert distances(week, model_of(week)).km[0] == pytest.approx(line, rel=0.0056)


def test_shares_of_last_week_by_hand() -> None:
    week = placed(West_Near="5", East_Near="1", West_Far="1", East_Far="1")
    last = {
        RateKey("West", "Near"): D(3), RateKey("East", "Near"): D(1), RateKey("East", "Far"): D(5),
    }  # fmt: skip
    usual = usual_plan(week, Rule.SHARES, last)
    assert lanes(usual.costs) == {("West", "Near"): D(9), ("East", "Near"): D(3), ("East", "Far"): D(8)}
    assert usual.remarks == ()


def test_a_plan_as_sent_is_completed_where_figures_changed() -> None:
    week = placed(West_Near="5", East_Near="1", East_Far="1")
    sent = {
        RateKey("West", "Near", "Somebody"): D(14),  # a haulier who quotes nothing now; and more than ordered
        RateKey("West", "Far"): D(5),  # no rate any more
        RateKey("East", "Far"): D(3),
    }
    usual = usual_plan(week, Rule.ACTUAL, sent)
    assert lanes(usual.costs) == {("West", "Near"): D(10), ("East", "Near"): D(2), ("East", "Far"): D(8)}
    assert usual.remarks == (
        "5 t went in that plan on lanes that have no open rate this week.",
        "4 t of it do not fit this week's stock, orders, limits or holds.",
        "The other 7 t were sent nearest depot first.",
    )


def test_what_is_gone_and_held_stays() -> None:
    week = placed(West_Near="1", East_Near="2", West_Far="3", East_Far="4")
    week = Week.of(
        tuple(week.depots.values()),
        tuple(week.customers.values()),
        week.rates,
        week.rules,
        {RateKey("East", "Near"): Hold(D(5), "promised")},
        (Gone("L1", "West", "Far", D(6), D("3.5")),),
    )
    usual = usual_plan(week, Rule.CHEAPEST)
    assert [(s.depot, s.customer, s.quantity, s.gone, s.held) for s in usual.costs.shipments] == [
        ("West", "Far", D(6), "L1", False),
        ("West", "Near", D(4), "", False),
        ("East", "Near", D(5), "", True),
        ("East", "Far", D(2), "", False),
    ]
    assert [(s.customer, s.quantity) for s in usual.costs.short] == [("Near", D(3))]


def test_without_distances_nobody_is_nearest() -> None:
    week = week_of(EXAMPLES["ta-grain-3x4"])
    assert rules_possible(week) == (Rule.CHEAPEST,)
    with pytest.raises(NoRule, match="coordinates"):
        usual_plan(week, Rule.NEAREST)
    with pytest.raises(NoRule, match="Last week"):
        usual_plan(week, Rule.SHARES)


@settings(deadline=None)
@given(weeks(), st.sampled_from([Rule.CHEAPEST, Rule.SHARES, Rule.ACTUAL]), st.data())
def test_a_usual_plan_keeps_the_week_and_never_beats_the_plan(
    week: Week, rule: Rule, data: st.DataObject
) -> None:
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    keys = [RateKey(row.depot, row.customer, row.haulier) for row in week.rates]
    sent = {key: D(data.draw(st.integers(0, 15))) for key in keys}
    usual = usual_plan(week, rule, sent).costs
    for key, hold in week.holds.items():
        assert sum(s.quantity for s in usual.shipments if s.key == key) == hold.quantity
    for row in week.rates:
        went = sum(s.quantity for s in usual.shipments if s.key == (row.depot, row.customer, row.haulier, 1))
        assert not (row.closed and went)
        assert row.at_most is None or went <= row.at_most
    for name, depot in week.depots.items():
        left = sum(u.quantity for u in usual.unsent if u.depot == name)
        assert sum(s.quantity for s in usual.shipments if s.depot == name) + left == depot.available
    for name, customer in week.customers.items():
        missing = sum(s.quantity for s in usual.short if s.customer == name)
        assert sum(s.quantity for s in usual.shipments if s.customer == name) + missing == customer.ordered
    found = saving(plan, usual)
    # whatever the service, the plan held against it is the cheapest that gives it
    assert found.freight + found.charges >= 0
    assert sum(one.saving for one in found.lanes) == found.freight
