"""Every rule of money for whole loads, worked by hand (DESIGN: loads, trip minimum, charges due once)."""

from decimal import Decimal

import pytest

from engine.changes import Alter, SetHold
from engine.figures import Customer, Depot, Gone, Haulier, Hold, Order, RateKey, RateRow, Rules
from engine.money import round_half_up
from engine.planning import planner
from engine.planning.gone import paid_per_unit
from engine.planning.load_plan import cost_of_wholeness
from engine.planning.plan import Plan, Shipment
from engine.planning.planner import NotPlannable
from engine.reasons import Withheld, chain, curve, options, pairs, rate_intervals, unquoted, values, why
from engine.week import Week

D = Decimal


def plan_week(week: Week) -> Plan:
    """The plan once it is proved, however long the first search on a machine takes to be compiled."""
    return planner.plan_week(week, time_limit=None)


def customer(name: str, ordered: str, **figures: object) -> Customer:
    return Customer(name, (Order(D(ordered)),), **figures)  # type: ignore[arg-type]


def only(plan: Plan) -> Shipment:
    (shipment,) = plan.shipments
    return shipment


def sent(plan: Plan) -> dict[tuple[str, str], Decimal]:
    return {(s.depot, s.customer): s.quantity for s in plan.shipments}


def one_lane(row: RateRow, ordered: str, **rules: object) -> Plan:
    """A plan of a single lane from Quarry to Elm, with stock enough."""
    return plan_week(
        Week.of((Depot("Quarry", D(1000)),), (customer("Elm", ordered),), (row,), Rules(**rules))  # type: ignore[arg-type]
    )


def test_a_part_load_pays_whole() -> None:
    """62 t in loads of 25 are 3 loads, the last at 12 t: 3 x 240 = 720. Spread, 62 x 9.60 = 595.20."""
    plan = one_lane(RateRow("Quarry", "Elm", D(240), per="load"), "62", load_size=D(25))
    shipment = only(plan)
    assert (shipment.loads, shipment.cost, shipment.payable) == (3, 720, 720)
    assert (plan.proof.exact, plan.proof.gap) == (True, 0)
    assert cost_of_wholeness(plan) == D("124.80")


def test_the_surcharge_is_on_a_rate_per_load() -> None:
    """240 and 3.5 % are 248.40 a load; two loads 496.80."""
    row = RateRow("Quarry", "Elm", D(240), per="load")
    plan = one_lane(row, "50", load_size=D(25), fuel_surcharge=D("3.5"))
    assert (only(plan).rate, plan.freight_payable) == (D("248.4"), D("496.80"))


def test_a_trip_minimum_is_for_each_load() -> None:
    """10 a tonne, at least 200 a load of 25 t. 30 t: a full load 250, and 5 t at 50 pay 200: 450."""
    row = RateRow("Quarry", "Elm", D(10), trip_minimum=D(200))
    assert one_lane(row, "30", load_size=D(25)).total_cost == 450


@pytest.mark.parametrize(("ordered", "cost"), [("19", D(209)), ("18", D(200))])
def test_a_trip_minimum_is_compared_after_the_surcharge_and_bears_none(ordered: str, cost: Decimal) -> None:
    """10 a tonne and 10 %: 19 t cost 209, more than 200; 18 t cost 198, so 200, not 220."""
    row = RateRow("Quarry", "Elm", D(10), trip_minimum=D(200))
    assert one_lane(row, ordered, load_size=D(25), fuel_surcharge=D(10)).total_cost == cost


def test_a_trip_minimum_lifts_a_rate_per_load() -> None:
    """150 a load and 10 % are 165, below the minimum of 180: two loads cost 360."""
    row = RateRow("Quarry", "Elm", D(150), per="load", trip_minimum=D(180))
    assert one_lane(row, "50", load_size=D(25), fuel_surcharge=D(10)).total_cost == 360


def test_a_charge_per_use_is_due_once_and_bears_no_surcharge() -> None:
    """31 t at 9 and 10 % are 306.90, and 75 once: 381.90."""
    row = RateRow("Quarry", "Elm", D(9), charge_per_use=D(75))
    plan = one_lane(row, "31", fuel_surcharge=D(10))
    assert (plan.total_cost, only(plan).once, only(plan).loads) == (D("381.90"), 75, None)


def test_amounts_are_rounded_once_for_each_shipment() -> None:
    """33.335 a load: one load each to three customers is payable 3 x 33.34 = 100.02, exactly 100.005.

    Two loads to one customer are 66.67, rounded once: not 2 x 33.34.
    """
    week = Week.of(
        (Depot("Quarry", D(100)),),
        tuple(customer(name, "25") for name in ("Elm", "Ash", "Birch")),
        tuple(RateRow("Quarry", name, D("33.335"), per="load") for name in ("Elm", "Ash", "Birch")),
        Rules(load_size=D(25)),
    )
    plan = plan_week(week)
    assert (plan.freight_payable, plan.freight_cost, plan.proof.rounding) == (
        D("100.02"),
        D("100.005"),
        D("0.015"),
    )
    both = one_lane(RateRow("Quarry", "Elm", D("33.335"), per="load"), "50", load_size=D(25))
    assert both.freight_payable == D("66.67")


def test_the_load_size_is_the_row_s_then_the_haulier_s_then_the_week_s() -> None:
    """60 t: in loads of 20 (row) 3, in loads of 24 (Vole) 3, in loads of 30 (week) 2."""
    week = Week.of(
        (Depot("Quarry", D(1000)),),
        tuple(customer(name, "60") for name in ("Elm", "Ash", "Birch")),
        (
            RateRow("Quarry", "Elm", D(100), per="load", haulier="Vole", load_size=D(20)),
            RateRow("Quarry", "Ash", D(100), per="load", haulier="Vole"),
            RateRow("Quarry", "Birch", D(100), per="load", haulier="Otter"),
        ),
        Rules(load_size=D(30)),
        hauliers=(Haulier("Vole", load_size=D(24)),),
    )
    plan = plan_week(week)
    assert [(s.load_size, s.loads) for s in plan.shipments] == [(20, 3), (24, 3), (30, 2)]
    assert plan.total_cost == 800


def test_an_opening_charge_is_due_once_and_is_no_freight() -> None:
    """Harbour costs 1 a tonne less for 20 t, but 50 to open: all 20 t go from Quarry for 200.

    At an opening charge of 10 Harbour is opened: 180 freight, 10 beside it.
    """

    def plan(charge: int) -> Plan:
        return plan_week(
            Week.of(
                (Depot("Quarry", D(30)), Depot("Harbour", D(30), opening_charge=D(charge))),
                (customer("Elm", "10"), customer("Ash", "10")),
                tuple(
                    RateRow(depot, name, D(rate))
                    for depot, rate in (("Quarry", 10), ("Harbour", 9))
                    for name in ("Elm", "Ash")
                ),
            )
        )

    assert (plan(50).total_cost, plan(50).openings) == (200, ())
    opened = plan(10)
    assert (opened.freight_payable, opened.opening_cost, opened.total_cost) == (180, 10, 190)
    assert [(o.depot, o.charge) for o in opened.openings] == [("Harbour", 10)]


def test_a_smallest_drop_is_nothing_or_at_least_so_much() -> None:
    """Elm takes drops of 8 at least. 6 t of the cheap stock would be too small: all 12 t come dear, 120."""
    week = Week.of(
        (Depot("Quarry", D(6)), Depot("Harbour", D(20))),
        (customer("Elm", "12", smallest_drop=D(8)),),
        (RateRow("Quarry", "Elm", D(1)), RateRow("Harbour", "Elm", D(10))),
    )
    plan = plan_week(week)
    assert (sent(plan), plan.total_cost) == ({("Harbour", "Elm"): 12}, 120)


def test_any_single_depot_serves_a_customer_of_one_depot() -> None:
    """12 t from Quarry (6 at 1) and Harbour (6 at 10) would cost 66; from Harbour alone 120."""
    week = Week.of(
        (Depot("Quarry", D(6)), Depot("Harbour", D(20))),
        (customer("Elm", "12", one_depot="yes"),),
        (RateRow("Quarry", "Elm", D(1)), RateRow("Harbour", "Elm", D(10))),
    )
    assert sent(plan_week(week)) == {("Harbour", "Elm"): 12}


@pytest.mark.parametrize(("days", "sent_cheap"), [(None, 50), (D(2), 20)])
def test_loads_a_day_times_days_is_the_most_a_depot_loads(days: Decimal | None, sent_cheap: int) -> None:
    """One load of 10 t a day: five days (the usual week) are 50 t from Quarry, two days 20 t."""
    week = Week.of(
        (Depot("Quarry", D(90), loads_a_day=D(1)), Depot("Harbour", D(90))),
        (customer("Elm", "80"),),
        (RateRow("Quarry", "Elm", D(1)), RateRow("Harbour", "Elm", D(2))),
        Rules(load_size=D(10), days=days),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): sent_cheap, ("Harbour", "Elm"): 80 - sent_cheap}


def test_a_haulier_carries_no_more_than_it_can_over_all_its_lanes() -> None:
    """Vole takes 15 t in the week: 10 to one, 5 to the other; Otter the rest at 2 more."""
    rows = [
        RateRow("Quarry", name, D(rate), haulier=haulier)
        for name in ("Elm", "Ash")
        for haulier, rate in (("Vole", 4), ("Otter", 6))
    ]
    week = Week.of(
        (Depot("Quarry", D(90)),),
        (customer("Elm", "10"), customer("Ash", "10")),
        tuple(rows),
        hauliers=(Haulier("Vole", at_most=D(15)),),
    )
    plan = plan_week(week)
    assert sum(s.quantity for s in plan.shipments if s.haulier == "Vole") == 15
    assert plan.total_cost == 15 * 4 + 5 * 6


def test_what_has_gone_is_paid_as_it_says_and_counts_against_loads() -> None:
    """20 t have gone in two loads of 10, at 3 all in. Of five loads three are left: 30 t; the charge per use
    was due with the first: 30 x 1 and 60 are 90, the other 50 t come from Harbour at 2: 190 in all.
    """
    week = Week.of(
        (Depot("Quarry", D(90), loads_a_day=D(1)), Depot("Harbour", D(90))),
        (customer("Elm", "100"),),
        (RateRow("Quarry", "Elm", D(1), charge_per_use=D(500)), RateRow("Harbour", "Elm", D(2))),
        Rules(load_size=D(10)),
        gone=(Gone("Load 1", "Quarry", "Elm", D(20), D(3)),),
    )
    plan = plan_week(week)
    still = {(s.depot, s.customer): s.quantity for s in plan.shipments if not s.gone}
    assert still == {("Quarry", "Elm"): 30, ("Harbour", "Elm"): 50}
    assert plan.total_cost == 60 + 30 + 100


def test_a_depot_that_something_has_left_is_open() -> None:
    """10 t have left Quarry at 3: its 50 for opening stand. The other 10 t come from Harbour,
    where they cost 1 instead of 2: 30 + 50 + 10, and no plan could cost less.
    """
    week = Week.of(
        (Depot("Quarry", D(90), opening_charge=D(50)), Depot("Harbour", D(90))),
        (customer("Elm", "20"),),
        (RateRow("Quarry", "Elm", D(2)), RateRow("Harbour", "Elm", D(1))),
        gone=(Gone("Load 1", "Quarry", "Elm", D(10), D(3)),),
    )
    plan = plan_week(week)
    assert [(o.depot, o.charge) for o in plan.openings] == [("Quarry", 50)]
    assert (plan.total_cost, plan.freight_payable, plan.proof.gap) == (90, 40, 0)


@pytest.mark.parametrize(
    ("row", "quantity", "paid"),
    [
        (RateRow("Quarry", "Elm", D(10)), "30", D(11)),  # 10 and 10 %
        (RateRow("Quarry", "Elm", D(200), per="load"), "30", D(440) / 30),  # two loads at 220
        (RateRow("Quarry", "Elm", D(10), trip_minimum=D(200)), "30", D(475) / 30),  # 275, and 200 for 5 t
        (RateRow("Quarry", "Elm", D(10), charge_per_use=D(60)), "30", D(13)),  # 330 and 60
    ],
)
def test_what_leaves_is_paid_by_its_whole_loads(row: RateRow, quantity: str, paid: Decimal) -> None:
    """Loads of 25 t, 10 % surcharge; the amount is right to the cent though the quotient may not end."""
    week = Week.of(
        (Depot("Quarry", D(90)),),
        (customer("Elm", "90"),),
        (row,),
        Rules(load_size=D(25), fuel_surcharge=D(10)),
    )
    found = paid_per_unit(week, "Quarry", "Elm", None, None, D(quantity))
    assert found is not None
    assert abs(found - paid) < D("1e-9")
    assert round_half_up(found * D(quantity), 2) == round_half_up(paid * D(quantity), 2)


def test_a_hold_stands_whatever_it_costs() -> None:
    """26 t are held on loads of 25: two loads, 200, though Otter would bring the last tonne for 5."""
    key = RateKey("Quarry", "Elm", "Vole")
    week = Week.of(
        (Depot("Quarry", D(90)),),
        (customer("Elm", "26"),),
        (
            RateRow("Quarry", "Elm", D(100), per="load", haulier="Vole"),
            RateRow("Quarry", "Elm", D(5), haulier="Otter"),
        ),
        Rules(load_size=D(25)),
        {key: Hold(D(26), "promised")},
    )
    plan = plan_week(week)
    assert [(s.key, s.quantity, s.loads, s.held) for s in plan.shipments] == [(key, 26, 2, True)]
    assert plan.total_cost == 200


def test_priorities_come_before_the_cost_of_another_load() -> None:
    """A is served in full by a second load of 100 though 1 t in it is all, and C's charge if short is 1."""
    week = Week.of(
        (Depot("Quarry", D(30)),),
        (customer("Elm", "26", priority="A"), customer("Ash", "10", charge_if_short=D(1))),
        (RateRow("Quarry", "Elm", D(100), per="load"), RateRow("Quarry", "Ash", D(1))),
        Rules(load_size=D(25)),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 26, ("Quarry", "Ash"): 4}
    assert [(s.customer, s.quantity) for s in plan.short] == [("Ash", 6)]
    assert plan.total_cost == 200 + 4 + 6


def test_even_shares_are_filled_with_whole_loads() -> None:
    """30 t for orders of 40 and 20: half each, in steps of 5: 20 and 10."""
    week = Week.of(
        (Depot("Quarry", D(30)),),
        (customer("Elm", "40"), customer("Ash", "20")),
        (RateRow("Quarry", "Elm", D(100), per="load"), RateRow("Quarry", "Ash", D(1))),
        Rules(load_size=D(25), when_short="even share", step=D(5)),
    )
    plan = plan_week(week)
    assert sent(plan) == {("Quarry", "Elm"): 20, ("Quarry", "Ash"): 10}
    assert plan.total_cost == 110


def test_goods_that_only_parts_of_vehicles_could_bring_are_said() -> None:
    """One load a week of 10 t: 5 t go short that stock and lanes would have served."""
    week = Week.of(
        (Depot("Quarry", D(90), loads_a_day=D(1)),),
        (customer("Elm", "15"),),
        (RateRow("Quarry", "Elm", D(1)),),
        Rules(load_size=D(10), days=D(1)),
    )
    plan = plan_week(week)
    assert (plan.status, plan.short[0].quantity) == ("short", 5)
    assert "short by whole loads" in {finding.rule for finding in plan.findings}


def test_holds_that_cannot_go_together_are_named() -> None:
    """Two loads are held at a depot that sends one: nothing is planned, and both are named."""
    held = {RateKey("Quarry", name): Hold(D(10)) for name in ("Elm", "Ash")}
    week = Week.of(
        (Depot("Quarry", D(90), loads_a_day=D(1)),),
        (customer("Elm", "10"), customer("Ash", "10")),
        (RateRow("Quarry", "Elm", D(1)), RateRow("Quarry", "Ash", D(1))),
        Rules(load_size=D(10), days=D(1)),
        held,
    )
    with pytest.raises(NotPlannable) as refused:
        plan_week(week)
    (message,) = [f.message for f in refused.value.findings if f.rule == "contradiction"]
    assert "Quarry to Elm" in message
    assert "Quarry to Ash" in message


def test_reasons_are_withheld_for_a_plan_with_whole_loads() -> None:
    """A unit more may need another vehicle, or none: no function of reasons pretends to an answer."""
    plan = one_lane(RateRow("Quarry", "Elm", D(240), per="load"), "62", load_size=D(25))
    assert values(plan).withheld
    assert values(plan).depots == ()
    assert curve(plan, "Elm", D(50), D(70)).withheld
    for ask in (
        lambda: pairs(plan),
        lambda: rate_intervals(plan),
        lambda: options(plan),
        lambda: unquoted(plan, customer="Elm"),
        lambda: why(plan, "Elm"),
        lambda: chain(plan, Alter("customer", "Elm", "ordered", D(63))),
        lambda: chain(plan, SetHold(RateKey("Quarry", "Elm"), D(50))),
    ):
        with pytest.raises(Withheld, match="whole loads"):
            ask()
