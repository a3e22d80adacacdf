"""Stressed weeks against fresh plans of the altered weeks, whatever the case."""

from dataclasses import replace
from decimal import Decimal
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.compare import stress_ground
from engine.compare.stress import Bin, histogram, short_often, spreading, stressed, usual_cases
from engine.compare.stress_cases import (
    AS_IT_IS,
    Case,
    all_by,
    change_of,
    depots_lost,
    drawn,
    hauliers_lost,
    lanes_lost,
    unchanged,
)
from engine.compare.stress_draws import Draws, Spread
from engine.compare.stress_ground import ground_of
from engine.compare.stress_solve import Outcome, outcome_of
from engine.exact import total_of
from engine.figures import Customer, Depot, Gone, Order, RateRow, Rules
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.week import Week
from tests.planning.weeks import best_outcome, weeks

D = Decimal

DRAWS = Draws(
    7,
    orders=Spread("triangular", D(-60), D(60), D(10)),
    stock=Spread("normal", D(-80), D(40), D(0), D(30)),
    rates=Spread("even", D(-5), D(25)),
)


def planned(week: Week) -> Plan | None:
    try:
        return plan_week(week)
    except NotPlannable:
        return None


def some_cases(plan: Plan) -> list[Case]:
    return [
        AS_IT_IS,
        *depots_lost(plan),
        *lanes_lost(plan),
        *hauliers_lost(plan),
        *all_by("orders", [D(-25), D("12.5")]),
        *all_by("rates", [D("7.3"), D(-4)]),
        *drawn(DRAWS, 3),
    ]


def agree(week: Week, case: Case, outcome: Outcome) -> None:
    """The stressed plan and a plan of the week that the case makes are worth the same, aim by aim."""
    altered = week.apply(change_of(week, case))
    fresh = planned(altered)
    if outcome.why:
        assert fresh is None
        return
    assert fresh is not None
    assert outcome.total == fresh.total_cost
    by_priority = [
        {p: total_of(q for n, q in short if may_be(week, n, p)) for p in ("A", "B", "C")}
        for short in (outcome.short, [(one.customer, one.quantity) for one in fresh.short])
    ]
    assert by_priority[0] == by_priority[1]
    assert outcome.must_stay == total_of(one.must_move for one in fresh.unsent)


def may_be(week: Week, name: str, priority: str) -> bool:
    customer = week.customers[name]
    return not customer.may_decline and (customer.priority or "C") == priority


@settings(deadline=None, max_examples=25)
@given(weeks())
def test_every_case_costs_what_a_fresh_plan_of_the_altered_week_costs(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    ground = ground_of(plan)
    for case in some_cases(plan):
        agree(week, case, outcome_of(ground, case))


@settings(deadline=None, max_examples=15)
@given(weeks(), st.sampled_from(["0.5", "2", "0.25"]))
def test_even_shares_gone_goods_and_steps_are_kept(week: Week, step: str) -> None:
    rules = replace(week.rules, when_short="even share", step=D(step))
    depot, customer = next(iter(week.depots)), next(iter(week.customers))
    week = replace(
        week, rules=rules, gone={"Load 1": Gone("Load 1", depot, customer, D("1.5"), D("2.25"), "H0")}
    )
    plan = planned(week)
    if plan is None:
        return
    ground = ground_of(plan)
    for case in some_cases(plan):
        agree(week, case, outcome_of(ground, case))


@settings(deadline=None, max_examples=15)
@given(weeks())
def test_few_rows_at_first_give_the_same_as_all(week: Week) -> None:
    plan = planned(week)
    if plan is None:
        return
    cases = some_cases(plan)
    whole = [outcome_of(ground_of(plan), case) for case in cases]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(stress_ground, "FEW_ROWS", 0)
        patch.setattr(stress_ground, "CHEAPEST", 0)
        ground = ground_of(plan)
        few = [outcome_of(ground, case) for case in cases]
    for one, other in zip(whole, few, strict=True):
        assert (one.total, one.must_stay, bool(one.why)) == (other.total, other.must_stay, bool(other.why))


def test_a_lost_depot_against_linear_programming() -> None:
    """The same outcome as HiGHS finds aim by aim for the altered week (an independent solver)."""
    seen = 0

    @settings(deadline=None, max_examples=30)
    @given(weeks())
    def check(week: Week) -> None:
        nonlocal seen
        plan = planned(week)
        if plan is None or week.holds:
            return
        ground = ground_of(plan)
        for case in depots_lost(plan):
            found = outcome_of(ground, case)
            best = best_outcome(week.apply(change_of(week, case)))
            assert best is not None
            assert found.total == best.total_cost
            assert found.must_stay == best.must_move_kept
            seen += 1

    check()
    assert seen > 5


def small(**rules: Any) -> Week:
    """Worked by hand: North 10 at 2 a unit, South 10 at 5; Ash wants 8, Elm 6; a third lane is not used."""
    return Week.of(
        (Depot("North", D(10)), Depot("South", D(10))),
        (
            Customer("Ash", (Order(D(8)),), charge_if_short=D(50)),
            Customer("Elm", (Order(D(6)),), charge_if_short=D(20)),
        ),
        (
            RateRow("North", "Ash", D(2), haulier="Oxcart"),
            RateRow("South", "Ash", D(5), haulier="Drayman"),
            RateRow("South", "Elm", D(4), haulier="Oxcart"),
            RateRow("North", "Elm", D(9), haulier="Barrow"),
        ),
        Rules(**rules),
    )


def test_a_hand_worked_week() -> None:
    """All in whole units: 8 x 2 + 6 x 4 = 40 as it is; the rest is said beside each case."""
    plan = plan_week(small())
    ground = ground_of(plan)
    assert outcome_of(ground, AS_IT_IS).total == 40
    north = outcome_of(ground, Case("depot lost", depot="North"))  # South has 10 for 14: Elm waits for 4
    assert (north.freight, north.short_charge) == (D(8 * 5 + 2 * 4), D(4 * 20))
    assert north.hit == (("Elm", D(4)),)
    lane = outcome_of(ground, Case("lane lost", depot="South", customer="Elm"))  # North: 6 to Elm, 4 to Ash
    assert lane.freight == D(6 * 9 + 4 * 2 + 4 * 5)
    assert lane.moved == D(10)
    oxcart = outcome_of(ground, Case("haulier lost", haulier="Oxcart"))
    assert oxcart.freight == D(8 * 5 + 6 * 9)
    assert outcome_of(ground, Case("orders", percent=D(50))).missing == D(1)  # 21 for 20
    assert outcome_of(ground, Case("rates", percent=D("7.5"))).freight == D(43)
    assert unchanged(plan) == (
        "2 lanes carry nothing: losing one changes nothing.",
        "Nothing is left to go with Drayman and Barrow: losing them changes nothing.",
    )
    assert lanes_lost(plan) == (
        Case("lane lost", depot="North", customer="Ash"),
        Case("lane lost", depot="South", customer="Elm"),
    )


def test_what_has_gone_stays_gone() -> None:
    week = replace(small(), gone={"Load 1": Gone("Load 1", "North", "Ash", D(3), D(2), "Oxcart")})
    ground = ground_of(plan_week(week))
    lost = outcome_of(ground, Case("depot lost", depot="North"))  # 3 are there; South: 5 to Ash, 5 to Elm
    assert lost.freight == D(3 * 2 + 5 * 5 + 5 * 4)
    assert lost.hit == (("Elm", D(1)),)
    fewer = outcome_of(ground, Case("orders", percent=D(-90)))  # Ash cannot fall below the 3 that have gone
    assert fewer.freight == D("6") + D("0.6") * 4


def test_a_case_that_promises_forbid_says_so() -> None:
    week = small()
    key = week.rates.key_of(0)
    from engine.changes import SetHold

    held = week.apply(SetHold(key, D(8)))
    found = outcome_of(ground_of(plan_week(held)), Case("orders", percent=D(-50)))
    assert "Ash" in found.why
    assert planned(held.apply(change_of(held, Case("orders", percent=D(-50))))) is None


def test_a_name_that_is_not_there_is_said() -> None:
    found = outcome_of(ground_of(plan_week(small())), Case("depot lost", depot="Nowhere"))
    assert found.why == "There is no depot 'Nowhere' in the week."


def test_spreading_and_histogram_of_known_figures() -> None:
    """Nearest-rank percentiles of 1 to 20 (the smallest figure that so many tenths do not exceed)."""
    figures = [D(n) for n in range(20, 0, -1)]
    found = spreading(figures)
    assert found is not None
    assert (found.least, found.tenth, found.middle, found.ninetieth, found.most) == (1, 2, 10, 18, 20)
    assert spreading([]) is None
    bins = histogram([D("99.5"), D(100), D("101.99"), D(102), D(130)])
    assert sum(one.count for one in bins) == 5
    assert (bins[0].low, bins[0].high) == (D(98), D(100))
    assert [one.count for one in bins[:3]] == [1, 2, 1]
    assert bins[-1].low <= 130 < bins[-1].high
    assert histogram([D(7), D(7)]) == (Bin(D(7), D(8), 2),)


def test_ranking_and_who_goes_short_often() -> None:
    plan = plan_week(small())
    found = stressed(plan, [*usual_cases(plan, lanes=1), *drawn(DRAWS, 20)])
    assert [one.case.words for one in found.ranked()[:2]] == ["North lost", "South lost"]
    assert len(found.named) == 2 + 1 + 1 + 2 + 1
    assert not found.stopped
    often = short_often(found.drawn)
    for one in often:
        quantities = [q for outcome in found.drawn for name, q in outcome.short if name == one.customer]
        assert (one.weeks, one.most, one.sum) == (len(quantities), max(quantities), sum(quantities))
