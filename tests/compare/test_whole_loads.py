"""Weeks of whole loads are compared too: usual plans pay whole loads, bridges count openings apart."""

from dataclasses import replace
from decimal import Decimal

from engine.compare.bridge import Side, bridge
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.compare.variants import measured
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.planner import plan_week
from engine.week import Week

D = Decimal


def week(ordered: int = 25, name: str = "A") -> Week:
    """By the load of 10: 100 from Quarry, 120 from Upland, which is 30 to open; Quarry has 10."""
    return Week.of(
        (Depot("Quarry", D(10)), Depot("Upland", D(90), opening_charge=D(30))),
        (Customer("Elm", (Order(D(ordered)),)),),
        (RateRow("Quarry", "Elm", D(100), per="load"), RateRow("Upland", "Elm", D(120), per="load")),
        Rules(week=name, load_size=D(10)),
    )


def test_the_usual_plan_pays_whole_loads_and_openings() -> None:
    usual = usual_plan(week(), Rule.CHEAPEST).costs
    # 10 from Quarry is a load, 15 from Upland are two: 100 + 2 x 120, and Upland is opened
    assert [(s.depot, s.quantity, s.loads, s.payable) for s in usual.shipments] == [
        ("Quarry", D(10), 1, D(100)),
        ("Upland", D(15), 2, D(240)),
    ]
    assert (usual.freight_cost, usual.opening_cost) == (D(340), D(30))
    plan = plan_week(week())
    found = saving(plan, usual)
    assert (found.equal, found.freight, found.charges) == (True, D(0), D(0))
    assert any("not minded" in said for said in usual_plan(week(), Rule.CHEAPEST).remarks)
    assert measured(plan).loads == 3


def test_a_bridge_of_whole_loads_by_hand() -> None:
    first, second = week(8), week(25, "B")
    second = replace(second, rules=replace(second.rules, fuel_surcharge=D(10)))
    found = bridge(Side("A", first, plan_week(first)), Side("B", second, plan_week(second)))
    # 8 is one load of Quarry, 100; 25 are three, 340, and 30 to open Upland; ten percent more is 374
    assert [(s.key, s.freight, s.charges) for s in found.steps] == [
        ("volume", D(240), D(30)),
        ("surcharge", D(34), D(0)),
    ]
    assert found.remarks == ()
    assert (found.first_charges, found.second_charges) == (0, 30)
