"""Every rule of money, worked by hand."""

from decimal import Decimal

import pytest

from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow, Rules
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week

D = Decimal


def customer(name: str, ordered: str, **figures: object) -> Customer:
    return Customer(name, (Order(D(ordered)),), **figures)  # type: ignore[arg-type]


def sent(plan: Plan) -> dict[tuple[str, str], Decimal]:
    return {(s.depot, s.customer): s.quantity for s in plan.shipments}


def test_goods_are_delivered_even_where_being_short_would_be_cheaper() -> None:
    """Rule 1. 10 t at 50 against a charge of 1: delivered all the same, 500."""
    week = Week.of(
        (Depot("Quarry", D(10)),),
        (customer("Elm", "10", charge_if_short=D(1)),),
        (RateRow("Quarry", "Elm", D(50)),),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 10}
    assert plan.total_cost == 500


def test_a_customer_who_may_decline_is_served_only_where_that_costs_less() -> None:
    """Rule 1. Elm may decline at 1 a tonne and stays unserved; Ash at 60 a tonne is served for 50."""
    week = Week.of(
        (Depot("Quarry", D(20)),),
        (
            customer("Elm", "10", charge_if_short=D(1), may_decline=True),
            customer("Ash", "10", charge_if_short=D(60), may_decline=True),
        ),
        (RateRow("Quarry", "Elm", D(50)), RateRow("Quarry", "Ash", D(50))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Ash"): 10}
    assert [(s.customer, s.quantity, s.cost) for s in plan.short] == [("Elm", 10, 10)]
    assert plan.status == "short"
    assert plan.total_cost == 510


def test_priority_a_is_served_before_b_before_c_whatever_the_charges_say() -> None:
    """Rule 1. 25 t for orders of 10 each: A and B in full, C gets 5 though its charge is highest."""
    week = Week.of(
        (Depot("Quarry", D(25)),),
        (
            customer("Elm", "10", charge_if_short=D(900)),
            customer("Ash", "10", priority="B", charge_if_short=D(1)),
            customer("Birch", "10", priority="A"),
        ),
        tuple(RateRow("Quarry", name, D(rate)) for name, rate in (("Elm", 1), ("Ash", 80), ("Birch", 90))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 5, ("Quarry", "Ash"): 10, ("Quarry", "Birch"): 10}
    assert plan.short_cost == 4500


def test_charges_decide_who_is_short_within_a_priority() -> None:
    """15 t for two orders of 10. Elm's charge is 9, Ash's 5; serving Ash instead saves 2 of freight only."""
    week = Week.of(
        (Depot("Quarry", D(15)),),
        (customer("Elm", "10", charge_if_short=D(9)), customer("Ash", "10", charge_if_short=D(5))),
        (RateRow("Quarry", "Elm", D(8)), RateRow("Quarry", "Ash", D(6))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 10, ("Quarry", "Ash"): 5}
    assert (plan.freight_cost, plan.short_cost, plan.total_cost) == (110, 25, 135)


def test_must_move_leaves_before_cheaper_goods() -> None:
    """Rules 1 and 4. 8 of Quarry's 10 must move at 9 a tonne; Northgate at 2 sends the other 4 of 12."""
    week = Week.of(
        (Depot("Northgate", D(20)), Depot("Quarry", D(10), must_move=D(8))),
        (customer("Elm", "12"),),
        (RateRow("Northgate", "Elm", D(2)), RateRow("Quarry", "Elm", D(9))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Northgate", "Elm"): 4, ("Quarry", "Elm"): 8}
    assert plan.total_cost == 80


def test_must_move_beyond_what_orders_allow_is_reported_not_refused() -> None:
    """Rule 1. 15 must move, 12 are ordered: 12 go, 3 of what must move stay and a finding says so."""
    week = Week.of(
        (Depot("Quarry", D(20), must_move=D(15)),),
        (customer("Elm", "12"),),
        (RateRow("Quarry", "Elm", D(9)),),
    )
    plan = plan_week(week)
    assert [(u.quantity, u.must_move) for u in plan.unsent] == [(8, 3)]
    assert "Quarry keeps 3 t that must move" in " ".join(f.message for f in plan.findings)


def test_what_is_unsent_costs_its_charge_and_earns_its_credit() -> None:
    """Rule 4. Northgate pays 3 a tonne kept, Quarry is credited 2. Sending Northgate's 10 at 6 saves the
    30 of its charge and keeps Quarry's credit: 60 - 20 = 40; from Quarry at 4 it would be 40 + 30 = 70."""
    week = Week.of(
        (Depot("Northgate", D(10), charge_if_unsent=D(3)), Depot("Quarry", D(10), charge_if_unsent=D(-2))),
        (customer("Elm", "10"),),
        (RateRow("Northgate", "Elm", D(6)), RateRow("Quarry", "Elm", D(4))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Northgate", "Elm"): 10}
    assert (plan.freight_cost, plan.unsent_cost, plan.total_cost) == (60, -20, 40)
    assert any(f.severity.word == "check" and "credit" in f.message for f in plan.findings)


def test_a_blank_charge_takes_the_weeks_and_a_blank_week_is_zero() -> None:
    """Rule 3."""
    short = (customer("Elm", "10"), customer("Ash", "5", charge_if_short=D(0)))
    week = Week.of((), short, (RateRow("Quarry", "Elm", D(1)),), Rules(charge_if_short=D(7)))
    week = Week.of((Depot("Quarry", D(0)),), short, (RateRow("Quarry", "Elm", D(1)),), week.rules)
    plan = plan_week(week)
    assert {s.customer: s.cost for s in plan.short} == {"Elm": 70, "Ash": 0}
    plan = plan_week(Week.of((Depot("Quarry", D(0)),), short[:1], (RateRow("Quarry", "Elm", D(1)),)))
    assert plan.short_cost == 0
    assert any("freight alone decided who" in f.message for f in plan.findings)


def test_the_headline_is_freight_payable_and_charges_stand_apart() -> None:
    """Rule 5. 5 t at 10.00 is 50.00 payable; 5 short at 100 is no freight."""
    week = Week.of(
        (Depot("Quarry", D(5)),),
        (customer("Elm", "10", charge_if_short=D(100)),),
        (RateRow("Quarry", "Elm", D(10)),),
    )
    plan = plan_week(week)
    assert (plan.freight_payable, plan.short_cost, plan.total_cost) == (50, 500, 550)


def test_a_rate_is_never_rounded_and_an_amount_once() -> None:
    """Rule 7. 3.3 t at 12.345 with 12.5 %: rate 13.888125, cost 45.8308125, payable 45.83.

    1.5 t at 0.03: 0.045 is payable 0.05 (half up). Rounding in all: 45.88 - 45.8758125 = 0.0041875.
    """
    week = Week.of(
        (Depot("Quarry", D(10)),),
        (customer("Elm", "3.3"), customer("Ash", "1.5")),
        (RateRow("Quarry", "Elm", D("12.345")), RateRow("Quarry", "Ash", D("0.03"), surcharge=D(0))),
        Rules(fuel_surcharge=D("12.5")),
    )
    plan = plan_week(week)
    elm, ash = plan.shipments
    assert (elm.rate, elm.cost, elm.payable) == (D("13.888125"), D("45.8308125"), D("45.83"))
    assert (ash.rate, ash.cost, ash.payable) == (D("0.03"), D("0.045"), D("0.05"))
    assert plan.freight_cost == D("45.8758125")
    assert plan.freight_payable == D("45.88")
    assert plan.proof.rounding == D("0.0041875")


@pytest.mark.parametrize(("currency", "payable"), [("EUR", "45.83"), ("JPY", "46"), ("KWD", "45.831")])
def test_amounts_are_rounded_to_the_currencys_minor_unit(currency: str, payable: str) -> None:
    """Rule 7. ISO 4217: the euro has 2 places, the yen none, the Kuwaiti dinar 3."""
    week = Week.of(
        (Depot("Quarry", D(10)),),
        (customer("Elm", "3.3"),),
        (RateRow("Quarry", "Elm", D("12.345")),),
        Rules(currency=currency, fuel_surcharge=D("12.5")),
    )
    assert plan_week(week).freight_payable == D(payable)


def test_the_surcharge_does_not_touch_charges() -> None:
    """Rule 7. 5 short at 100 is 500 with any surcharge."""
    week = Week.of(
        (Depot("Quarry", D(5)),),
        (customer("Elm", "10", charge_if_short=D(100)),),
        (RateRow("Quarry", "Elm", D(10)),),
        Rules(fuel_surcharge=D(50)),
    )
    plan = plan_week(week)
    assert (plan.freight_payable, plan.short_cost) == (75, 500)


def test_hauliers_on_one_lane_are_alternatives() -> None:
    """10 t: Teal takes 6 at 4.00 (its most), Vole the rest at 5.00."""
    week = Week.of(
        (Depot("Quarry", D(10)),),
        (customer("Elm", "10"),),
        (
            RateRow("Quarry", "Elm", D(5), haulier="Vole"),
            RateRow("Quarry", "Elm", D(4), haulier="Teal", at_most=D(6)),
        ),
    )
    plan = plan_week(week)
    assert [(s.haulier, s.quantity, s.payable) for s in plan.shipments] == [("Vole", 4, 20), ("Teal", 6, 24)]


def test_at_least_always_holds_and_a_closed_row_carries_nothing() -> None:
    """Rule 6. 3 t go by the dear row that asks for them; the cheapest row is closed."""
    week = Week.of(
        (Depot("Quarry", D(10)), Depot("Northgate", D(10)), Depot("Harbour", D(10))),
        (customer("Elm", "10"),),
        (
            RateRow("Quarry", "Elm", D(9), at_least=D(3)),
            RateRow("Northgate", "Elm", D(5)),
            RateRow("Harbour", "Elm", D(1), closed=True),
        ),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 3, ("Northgate", "Elm"): 7}
    assert plan.total_cost == 62


def test_one_depot_by_name_takes_from_no_other() -> None:
    """Rule 12. Elm takes from Quarry only, though Northgate is cheaper and Quarry has too little."""
    week = Week.of(
        (Depot("Quarry", D(6)), Depot("Northgate", D(10))),
        (customer("Elm", "10", one_depot="Quarry"),),
        (RateRow("Quarry", "Elm", D(9)), RateRow("Northgate", "Elm", D(5))),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 6}
    assert [(s.customer, s.quantity) for s in plan.short] == [("Elm", 4)]


def test_even_share_is_rounded_to_the_step_and_the_remainder_handed_out() -> None:
    """Rule 11. 10 pallets for orders of 5, 4 and 6: 3 1/3, 2 2/3 and 4, so 3, 3 and 4."""
    week = Week.of(
        (Depot("Quarry", D(10)),),
        (customer("Elm", "5"), customer("Ash", "4"), customer("Birch", "6")),
        tuple(RateRow("Quarry", name, D(1)) for name in ("Elm", "Ash", "Birch")),
        Rules(when_short="even share", unit="pallets"),
    )
    assert sent(plan_week(week)) == {("Quarry", "Elm"): 3, ("Quarry", "Ash"): 3, ("Quarry", "Birch"): 4}


def test_even_share_in_tonnes_is_rounded_to_a_hundredth() -> None:
    """Rule 11. 10 t for three orders of 5: 3.33 each, and the hundredth left goes to the first."""
    names = ("Elm", "Ash", "Birch")
    week = Week.of(
        (Depot("Quarry", D(10)),),
        tuple(customer(name, "5") for name in names),
        tuple(RateRow("Quarry", name, D(1)) for name in names),
        Rules(when_short="even share"),
    )
    plan = plan_week(week)
    assert [sent(plan)[("Quarry", name)] for name in names] == [D("3.34"), D("3.33"), D("3.33")]


def test_a_shortage_by_lanes_names_the_cut_with_its_numbers() -> None:
    """Aster, Birch and Cole need 130; Northgate has 60, Quarry 35; Harbour's 100 reach only Elm."""
    week = Week.of(
        (Depot("Northgate", D(60)), Depot("Quarry", D(35)), Depot("Harbour", D(100))),
        (customer("Aster", "50"), customer("Birch", "40"), customer("Cole", "40"), customer("Elm", "20")),
        (
            RateRow("Northgate", "Aster", D(1)),
            RateRow("Northgate", "Birch", D(1)),
            RateRow("Quarry", "Birch", D(1)),
            RateRow("Quarry", "Cole", D(1)),
            RateRow("Harbour", "Elm", D(1)),
        ),
    )
    plan = plan_week(week)
    messages = [f.message for f in plan.findings]
    assert (
        "Aster, Birch and Cole need 130 t; only Northgate and Quarry reach them, and those can bring 95 t."
    ) in messages
    fewer = week.apply(_without("Cole")).apply(_without("Birch"))
    assert plan_week(fewer).status == "met"


def _without(name: str):  # type: ignore[no-untyped-def]
    from engine.changes import Remove

    return Remove("customer", name)


def contradicting() -> Week:
    """Elm ordered 10; 6 are held from Quarry, 3 from Northgate and 5 must come from Harbour."""
    return Week.of(
        (Depot("Quarry", D(20)), Depot("Northgate", D(20)), Depot("Harbour", D(20))),
        (customer("Elm", "10"),),
        (
            RateRow("Quarry", "Elm", D(1)),
            RateRow("Northgate", "Elm", D(1)),
            RateRow("Harbour", "Elm", D(1), at_least=D(5)),
        ),
        holds={
            RateKey("Quarry", "Elm"): Hold(D(6), "promised"),
            RateKey("Northgate", "Elm"): Hold(D(3), "promised"),
        },
    )


def test_a_contradiction_names_a_minimal_set_and_vanishes_with_one_member() -> None:
    with pytest.raises(NotPlannable) as stopped:
        plan_week(contradicting())
    (finding,) = stopped.value.findings
    assert finding.message == (
        "These figures contradict each other: Elm has 10 t ordered, but 11 t are forced: "
        "Quarry to Elm (hold 6 t); Harbour to Elm (at least 5 t)."
    )
    from engine.changes import Alter, Lift

    for mend in (Lift(RateKey("Quarry", "Elm")), Alter("rate", RateKey("Harbour", "Elm"), "at_least", None)):
        assert plan_week(contradicting().apply(mend)).status == "met"


def test_a_hold_beyond_its_rows_limit_contradicts_it() -> None:
    week = Week.of(
        (Depot("Quarry", D(20)),),
        (customer("Elm", "10"),),
        (RateRow("Quarry", "Elm", D(1), at_most=D(4)),),
        holds={RateKey("Quarry", "Elm"): Hold(D(6))},
    )
    with pytest.raises(NotPlannable, match="6 is held on Quarry to Elm, but the row takes at most 4"):
        plan_week(week)
