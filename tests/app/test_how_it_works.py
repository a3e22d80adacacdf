"""*How it works*: its example is what the engine says, worked out by hand here."""

from decimal import Decimal
from pathlib import Path

from streamlit.testing.v1 import AppTest

from app.parts.small_example import BY_HAND, ORDERS, STOCK, small_example

MAIN = str(Path(__file__).parents[2] / "app" / "main.py")
D = Decimal


def test_the_example_worked_by_hand() -> None:
    """Weir 70: Oak 45 at 10, Ash 25 at 8. Lock 45 of 50: Ash 15 at 9, Elm 30 at 7. 450+200+135+210."""
    example = small_example()
    sent = {(one.key.depot, one.key.customer): one.quantity for one in example.plan.shipments}
    assert sent == {
        ("Weir", "Oak"): D(45),
        ("Weir", "Ash"): D(25),
        ("Lock", "Ash"): D(15),
        ("Lock", "Elm"): D(30),
    }
    assert example.plan.total_cost == example.plan.proof.lower_bound == D(995)
    assert example.by_hand == D(30 * 7 + 40 * 8 + 30 * 10 + 15 * 14)
    assert example.one_more_for_oak == D(10 - 8 + 9)
    assert example.one_more_at_weir == D(8 - 9)


def test_what_is_done_by_hand_serves_every_order() -> None:
    for name, stock in STOCK.items():
        assert sum(sent for depot, _, sent in BY_HAND if depot == name) <= stock
    for name, ordered in ORDERS.items():
        assert sum(sent for _, customer, sent in BY_HAND if customer == name) == ordered


def test_the_page_opens_without_a_week() -> None:
    page = AppTest.from_file(MAIN, default_timeout=60).run()
    page.switch_page("pages/how_it_works.py").run()
    assert not page.exception
    assert "How it works" in [one.value for one in page.title]
    text = " ".join(one.value for one in page.markdown)
    assert "**995 EUR**" in text
    assert "**11 EUR**" in text
