"""What has gone: counted against the whole week, at its own rate, and never moved."""

from datetime import date
from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter
from engine.figures import Customer, Depot, Gone, Hold, Order, RateKey, RateRow, Rules
from engine.planning.gone import rate_on, superseded
from engine.planning.planner import NotPlannable, plan_week
from engine.rates import RateTable
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal


def week_of(*rows: RateRow, gone: tuple[Gone, ...] = (), **figures: object) -> Week:
    return Week.of(
        (Depot("Quarry", D(20)), Depot("Harbour", D(20))),
        (Customer("Elm", (Order(D(15)),)),),
        rows or (RateRow("Quarry", "Elm", D(4)), RateRow("Harbour", "Elm", D(9))),
        gone=gone,
        **figures,  # type: ignore[arg-type]
    )


def test_gone_goods_count_against_both_ends_and_keep_their_rate() -> None:
    """5 of Elm's 15 left Harbour at 8 before its rate rose to 9; the other 10 come from Quarry at 4."""
    plan = plan_week(week_of(gone=(Gone("Load 1", "Harbour", "Elm", D(5), D(8)),)))
    assert [(s.depot, s.quantity, s.payable, s.gone) for s in plan.shipments] == [
        ("Harbour", 5, 40, "Load 1"),
        ("Quarry", 10, 40, ""),
    ]
    assert plan.total_cost == plan.proof.lower_bound == 80
    assert [(u.depot, u.quantity) for u in plan.unsent] == [("Quarry", 10), ("Harbour", 15)]


def test_limits_and_holds_state_the_whole_week() -> None:
    """At most 8 from Quarry, 5 of them gone: 3 more go from there and 7 from Harbour."""
    rows = (RateRow("Quarry", "Elm", D(4), at_most=D(8)), RateRow("Harbour", "Elm", D(9)))
    gone = (Gone("Load 1", "Quarry", "Elm", D(5), D(4)),)
    plan = plan_week(week_of(*rows, gone=gone))
    assert [(s.depot, s.quantity) for s in plan.shipments] == [("Quarry", 5), ("Quarry", 3), ("Harbour", 7)]
    held = week_of(gone=gone, holds={RateKey("Quarry", "Elm"): Hold(D(6))})
    plan = plan_week(held)
    assert [(s.depot, s.quantity) for s in plan.shipments] == [("Quarry", 5), ("Quarry", 1), ("Harbour", 9)]


def test_a_hold_below_what_has_gone_is_a_contradiction() -> None:
    week = week_of(
        gone=(Gone("Load 1", "Quarry", "Elm", D(5), D(4)),), holds={RateKey("Quarry", "Elm"): Hold(D(3))}
    )
    with pytest.raises(NotPlannable, match="3 t are held on Quarry to Elm, but 5 t have gone"):
        plan_week(week)


def test_more_gone_than_ordered_is_a_fact_with_a_finding() -> None:
    plan = plan_week(week_of(gone=(Gone("Load 1", "Quarry", "Elm", D(18), D(4)),)))
    assert [s.quantity for s in plan.shipments] == [18]
    assert any("18 t have gone to Elm, but only 15 t are ordered" in f.message for f in plan.findings)


def test_the_rate_valid_on_the_day_is_the_latest_that_had_begun() -> None:
    """4.00 from the 1st, 5.00 from the 10th, 10 % surcharge: 4.4 on the 9th, 5.5 on the 10th."""
    rows = (
        RateRow("Quarry", "Elm", D(4), valid_from=date(2026, 2, 1)),
        RateRow("Quarry", "Elm", D(5), valid_from=date(2026, 2, 10)),
    )
    week = week_of(*rows, rules=Rules(fuel_surcharge=D(10)))
    on = [rate_on(week, "Quarry", "Elm", None, date(2026, 2, day)) for day in (9, 10)]
    assert on == [D("4.4"), D("5.5")]
    assert rate_on(week, "Quarry", "Elm", None, date(2026, 1, 31)) is None
    assert [s.rate for s in plan_week(week).shipments] == [D("5.5")]


def test_a_later_rate_of_the_same_lane_and_haulier_replaces_the_earlier() -> None:
    day = date(2026, 2, 10)
    table = RateTable.of(
        [
            RateRow("Quarry", "Elm", D(4)),
            RateRow("Quarry", "Elm", D(5), valid_from=day),
            RateRow("Quarry", "Elm", D(6), valid_from=day),
            RateRow("Quarry", "Elm", D(3), haulier="Vole"),
            RateRow("Harbour", "Elm", D(3)),
        ]
    )
    assert superseded(table).tolist() == [True, False, False, False, False]


@settings(max_examples=200, deadline=None)
@given(weeks(), st.data())
def test_gone_goods_never_move_whatever_follows(week: Week, data: st.DataObject) -> None:
    row = data.draw(st.sampled_from(list(week.rates)))
    quantity = D(data.draw(st.integers(0, 6)))
    gone = Gone("Load 1", row.depot, row.customer, quantity, D("3.5"), row.haulier)
    week = week.apply(Add(gone))
    for _ in range(data.draw(st.integers(0, 3))):
        name = data.draw(st.sampled_from(list(week.depots)))
        week = week.apply(Alter("depot", name, "available", D(data.draw(st.integers(0, 12)))))
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    (shipped,) = [s for s in plan.shipments if s.gone]
    assert (shipped.key, shipped.quantity, shipped.rate) == (RateKey(*row_key(gone)), quantity, D("3.5"))
    assert plan.proof.gap == 0
    sent = sum((s.quantity for s in plan.shipments if s.customer == gone.customer), D(0))
    short = sum((s.quantity for s in plan.short if s.customer == gone.customer), D(0))
    assert sent + short == max(week.customers[gone.customer].ordered, quantity)


def row_key(gone: Gone) -> tuple[str, str, str | None]:
    return gone.depot, gone.customer, gone.haulier


def test_what_is_forced_on_top_of_what_has_gone_is_a_contradiction() -> None:
    """Elm ordered 15, 9 have gone from Quarry; 8 more must come from Harbour: 8 on top of 9 is too much."""
    rows = (RateRow("Quarry", "Elm", D(4)), RateRow("Harbour", "Elm", D(9), at_least=D(8)))
    week = week_of(*rows, gone=(Gone("Load 1", "Quarry", "Elm", D(9), D(4)),))
    with pytest.raises(NotPlannable) as stopped:
        plan_week(week)
    assert str(stopped.value) == (
        "These figures contradict each other: Elm has 15 t ordered, of which 9 t have gone, but 8 t are "
        "still forced: Harbour to Elm (at least 8 t)."
    )
