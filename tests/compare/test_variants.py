"""Variants: measured by hand, kept in the records, made the week's own by one grouped change."""

from dataclasses import replace
from decimal import Decimal

import pytest

from engine.changes import Alter, SetHold
from engine.compare.variants import Variant, measured, side_by_side
from engine.figures import Customer, Depot, Order, RateKey, RateRow, Rules
from engine.history import History
from engine.planning.planner import plan_week
from engine.week import Week

D = Decimal


def week() -> Week:
    return Week.of(
        (Depot("Quarry", D(8)), Depot("Upland", D(20), charge_if_unsent=D("0.5"))),
        (Customer("Elm", (Order(D(10)),)), Customer("Ash", (Order(D(4)),))),
        (
            RateRow("Quarry", "Elm", D(2), km=D("10.5")),
            RateRow("Upland", "Elm", D(5), km=D(30)),
            RateRow("Upland", "Ash", D(3), km=D(20)),
        ),
        Rules(unit="t"),
    )


def test_measures_by_hand() -> None:
    found = measured(plan_week(week()))
    # 8 x 2 + 2 x 5 + 4 x 3 = 38 for 14 t; 14 t stay at Upland; 8 x 10.5 + 2 x 30 + 4 x 20 = 224 t km
    assert (found.freight, found.per_unit, found.charges) == (D(38), D("2.7143"), D(7))
    assert (found.delivered, found.short, found.left, found.lanes) == (D(14), D(0), D(14), 3)
    assert (found.loads, found.unit_km) == (None, D(224))


def test_without_kilometres_or_places_there_is_no_sum() -> None:
    bare = replace(week(), rates=week().rates.with_row(2, RateRow("Upland", "Ash", D(3))))
    assert measured(plan_week(bare)).unit_km is None


def test_variants_side_by_side_by_hand() -> None:
    plan = plan_week(week())
    lost = Variant("Quarry out", (Alter("depot", "Quarry", "available", D(0)),))
    held = Variant(
        "Elm from Upland", (SetHold(RateKey("Upland", "Elm"), D(6)), Alter("rule", "", "step", D(1)))
    )
    wrong = Variant("of another week", (Alter("depot", "Harbour", "available", D(0)),))
    broken = Variant("too much", (SetHold(RateKey("Upland", "Elm"), D(11)),))
    found = side_by_side(plan, (lost, held, wrong, broken))
    assert [one.measures.freight if one.measures else None for one in found] == [62, 50, None, None]
    assert [one.difference.freight_payable if one.difference else None for one in found] == [
        24,
        12,
        None,
        None,
    ]
    assert [(r.key.depot, r.more) for r in found[0].difference.rows] == [  # type: ignore[union-attr]
        ("Quarry", D(-8)), ("Upland", D(8)),
    ]  # fmt: skip
    assert "There is no depot 'Harbour'" in found[2].findings[0].message
    assert found[3].findings


def test_a_variant_becomes_the_week_s_own_and_one_undo_takes_it_back() -> None:
    history = History.of(week())
    variant = Variant(
        "Quarry out", (Alter("depot", "Quarry", "available", D(0)), Alter("rule", "", "step", D(1)))
    )
    made = history.after(variant.as_one, who="Ann")
    assert len(made.entries) == 1
    assert made.week.depots["Quarry"].available == 0
    assert made.undo().week == week()


@pytest.mark.parametrize("changes", [0, 1, 3])
def test_a_variant_of_any_number_of_changes(changes: int) -> None:
    some = tuple(Alter("depot", "Quarry", "available", D(n)) for n in range(changes))
    (found,) = side_by_side(plan_week(week()), (Variant("some", some),))
    assert found.measures is not None
