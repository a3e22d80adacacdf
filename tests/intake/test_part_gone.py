"""A Gone sheet uploaded alone: new loads come in, a load told otherwise is replaced, the rest stays."""

from decimal import Decimal

from engine.figures import Customer, Depot, Gone, Order, RateRow
from engine.intake.part import read_part
from engine.week import Week

D = Decimal
HEAD = "Load,Depot,Customer,Haulier,Gone,Rate\n"


def week() -> Week:
    return Week.of(
        (Depot("Quarry", D(40)),),
        (Customer("Ash", (Order(D(10)),)), Customer("Birch", (Order(D(10)),))),
        (RateRow("Quarry", "Ash", D(9), haulier="Teal"), RateRow("Quarry", "Birch", D(8), haulier="Teal")),
        gone=tuple(Gone(n, "Quarry", "Ash", D(q), D(9), "Teal") for n, q in (("L1", 4), ("L2", 1))),
    )


def test_what_has_gone_is_part_of_a_week() -> None:
    sheet = HEAD + "L1,quarry,Ash,Teal,5,9\nL3,Quarry,Birch,Teal,2,8\n"
    part = read_part(("gone.csv", sheet.encode()), week())
    after = week().apply(part.change)
    assert {name: load.quantity for name, load in after.gone.items()} == {"L1": 5, "L2": 1, "L3": 2}
    assert after.gone["L1"].depot == "Quarry"
    assert part.differences == (
        "Load L1 has gone otherwise than it said: 5 t from Quarry to Ash by Teal.",
        "Load L3 has gone: 2 t from Quarry to Birch.",
        "1 load that has gone is not in the upload and stays.",
    )


def test_the_same_sheet_again_changes_nothing() -> None:
    sheet = HEAD + "L1,Quarry,Ash,Teal,4,9\nL2,Quarry,Ash,Teal,1,9\n"
    assert read_part(("gone.csv", sheet.encode()), week()).is_empty
