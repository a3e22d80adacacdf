"""Aims solved one after the other, where their weights do not fit, against HiGHS and by hand."""

from collections.abc import Iterable
from dataclasses import replace
from decimal import Decimal
from io import BytesIO

import pytest
from hypothesis import given, settings
from openpyxl import load_workbook

import engine
import engine.planning.model
from engine.compare.stress_ground import ground_of
from engine.exact import TooLarge
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.aims import Weights, weights
from engine.planning.planner import NotPlannable, plan_week
from engine.reasons import Withheld, rate_intervals, values
from engine.reasons.ground import APART
from engine.report.proof_figures import check_codes, lower_bound, proof_figures
from engine.week import Week
from tests.planning.weeks import best_outcome, outcome_of, weeks

D = Decimal


def refusing(largest: int, depots: int, priorities: Iterable[str], must_move: bool) -> Weights:
    """Weights as if none but the last mark ever fitted."""
    if list(priorities) or must_move:
        raise TooLarge("They do not fit.")
    return weights(largest, depots, (), must_move=False)


@settings(max_examples=250, deadline=None)
@given(weeks())
def test_one_by_one_the_aims_come_to_what_highs_finds(week: Week) -> None:
    expected = best_outcome(week)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(engine.planning.model, "weights", refusing)
        try:
            plan = plan_week(week)
        except NotPlannable:
            assert expected is None
            return
    assert expected is not None
    assert plan.model.apart == bool(plan.model.counted)
    assert outcome_of(week, plan) == expected
    assert plan.proof.lower_bound == plan.total_cost
    figures = proof_figures(plan)
    assert not check_codes(plan, figures).any()  # against the limits as stated, with the prices of every aim
    assert lower_bound(plan, figures) == plan.total_cost
    said = [f.message for f in plan.findings if f.rule == "short"]
    assert said == [f.message for f in plan_week(week).findings if f.rule == "short"]


@settings(max_examples=100, deadline=None)
@given(weeks())
def test_even_shares_are_the_same_one_by_one(week: Week) -> None:
    shared = replace(week, rules=replace(week.rules, when_short="even share", unit="pallets"))
    try:
        expected = plan_week(shared)
    except NotPlannable:
        return
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(engine.planning.model, "weights", refusing)
        plan = plan_week(shared)
    assert plan.total_cost == expected.total_cost
    assert plan.short == expected.short or plan.short_cost == expected.short_cost
    assert not check_codes(plan, proof_figures(plan)).any()


def dear_week() -> Week:
    """60 t for 90 t ordered. Fir comes before Elm; the rates have sixteen digits.

    By hand: Fir gets its 50 from North (1,200,000,000,000.5 each; South's rate is dearer by 0.0003). Of the
    other 10 t Elm gets all from South at 1,300,000,000,000.0001.
    """
    rates = [
        RateRow("North", "Fir", D("1200000000000.5")),
        RateRow("South", "Fir", D("1200000000000.5003")),
        RateRow("North", "Elm", D("1100000000000.0004")),
        RateRow("South", "Elm", D("1300000000000.0001")),
    ]
    customers = [
        Customer("Fir", (Order(D(50)),), priority="A"),
        Customer("Elm", (Order(D(40)),), priority="B"),
    ]
    depots = [Depot("North", D(50), must_move=D(5)), Depot("South", D(10))]
    return Week.of(depots, customers, rates, Rules(charge_if_short=D("900000000000.25")))


def test_rates_of_sixteen_digits_are_planned_to_the_last_digit() -> None:
    plan = plan_week(dear_week())
    assert plan.model.apart
    # Elm from North and Fir from both costs less: 10 Fir from South instead, 10 Elm from North instead
    saved = (D("1300000000000.0001") - D("1100000000000.0004")) - (
        D("1200000000000.5003") - D("1200000000000.5")
    )
    by_hand = 50 * D("1200000000000.5") + 10 * D("1300000000000.0001") - 10 * saved
    assert plan.freight_cost == by_hand
    assert [(one.customer, one.quantity) for one in plan.short] == [("Elm", D(30))]
    assert plan.total_cost == by_hand + 30 * D("900000000000.25")
    assert plan.proof.gap == 0


def test_what_such_a_plan_does_not_tell_is_said() -> None:
    plan = plan_week(dear_week())
    assert values(plan).withheld == APART
    with pytest.raises(Withheld, match="one after the other"):
        rate_intervals(plan)
    with pytest.raises(TooLarge, match="cannot be stressed"):
        ground_of(plan)
    written = BytesIO()
    engine.write_workbook(plan, written)
    book = load_workbook(written)
    assert any(APART in str(cell.value) for row in book["Values"] for cell in row)
    assert any("one after the other" in str(cell.value) for row in book["Notes"] for cell in row)
    assert book["Proof"]["B3"].value.startswith("=IF(")
