"""How full vehicles are, in words and by depot, and what would fill or save the badly filled ones."""

from decimal import Decimal

import pytest

from engine.figures import Customer, Depot, Gone, Order, RateRow, Rules
from engine.planning.fills import badly_filled, fill_of, loads_total, vehicles
from engine.planning.planner import plan_week
from engine.week import Week

D = Decimal


@pytest.mark.parametrize(
    ("quantity", "size", "words"),
    [
        ("90.5", "25", "3 full + 1 at 62 %"),
        ("75", "25", "3 full"),
        ("12", "25", "1 at 48 %"),
        ("24.99", "25", "1 at 99 %"),  # never rounded up to a full load
        ("25.01", "25", "1 full + 1 at 1 %"),
        ("75.6", "25.2", "3 full"),
    ],
)
def test_loads_in_words(quantity: str, size: str, words: str) -> None:
    fill = fill_of(D(quantity), D(size))
    assert fill is not None
    assert fill.words() == words


def test_without_a_load_size_nothing_is_said() -> None:
    assert fill_of(D(10), None) is None


def test_vehicles_and_badly_filled_loads() -> None:
    """Elm: 62 t by the load of 25 (240 each): 12 t in the last, which pays 240 x 13/25 = 124.80 for nothing.
    Ash: 30 t at 2 a tonne: 5 t in the last load, 10 saved, nothing paid for empty room.
    Birch: 26 t at 10 with a minimum of 200 a load: the last tonne costs 200, 190 of it for nothing.
    """
    week = Week.of(
        (Depot("Quarry", D(200), loads_a_day=D(2)), Depot("Harbour", D(50))),
        tuple(Customer(name, (Order(D(q)),)) for name, q in (("Elm", 72), ("Ash", 30), ("Birch", 26))),
        (
            RateRow("Quarry", "Elm", D(240), per="load"),
            RateRow("Quarry", "Ash", D(2)),
            RateRow("Quarry", "Birch", D(10), trip_minimum=D(200)),
        ),
        Rules(load_size=D(25)),
        gone=(Gone("L1", "Quarry", "Elm", D(10), D(9)),),
    )
    plan = plan_week(week, time_limit=None)
    quarry, harbour = vehicles(plan)
    assert (quarry.loads, quarry.full, quarry.gone, quarry.most, quarry.left) == (7, 4, 1, 10, 2)
    assert quarry.fill == D(118) / D(175)
    assert (harbour.loads, harbour.most, harbour.fill) == (0, None, None)
    assert loads_total(plan) == 7
    found = badly_filled(plan)
    assert [(one.shipment.customer, one.missing, one.saved, one.idle) for one in found] == [
        ("Birch", 24, 200, 190),
        ("Elm", 13, 240, D("124.8")),
        ("Ash", 20, 10, 0),
    ]
    assert found[1].words("t") == "13 t more would fill it. An order 12 t smaller would save 240."


def test_what_a_customer_is_short_of_or_gets_elsewhere_is_said() -> None:
    week = Week.of(
        (Depot("Quarry", D(30)), Depot("Harbour", D(20))),
        (Customer("Elm", (Order(D(60)),)),),
        (RateRow("Quarry", "Elm", D(240), per="load"), RateRow("Harbour", "Elm", D(1))),
        Rules(load_size=D(25)),
    )
    (one, other) = badly_filled(plan_week(week, time_limit=None), below=D("0.9"))
    assert one.words("t") == (
        "20 t more would fill it: Elm goes short of 10 t; 20 t come to it from Harbour. "
        "An order 5 t smaller would save 240."
    )
    assert other.shipment.depot == "Harbour"
