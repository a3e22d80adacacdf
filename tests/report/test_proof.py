"""Sheet *Proof*: its formulas, calculated by a spreadsheet program, prove the plan and notice every edit."""

from dataclasses import replace
from decimal import Decimal
from io import BytesIO
from pathlib import Path

import numpy as np
import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings

from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.report.lines import lines_of
from engine.report.plan_sheet import plan_columns, plan_letters
from engine.report.proof_checks import checks_of
from engine.report.proof_figures import check_codes, lower_bound, proof_figures
from engine.report.proof_layout import layout_of
from engine.report.proof_sheet import BROKEN, PROVED, VERDICT
from engine.report.workbook import write_workbook
from engine.week import Week
from tests.planning.weeks import weeks
from tests.report.libreoffice import calculated, without_results
from tests.report.weeks import busy_week, gone_week, harmful_week, met_week

EDITS = {
    "a quantity sent": ("Plan", "D2", 1),
    "a quantity sent that is text": ("Plan", "D2", "many"),
    "a payable amount": ("Plan", "H2", 1),
    "an exact cost": ("Plan", "G2", 1),
    "the headline": ("Costs", "B4", 1),
    "what is available": ("Depots", "B2", 121),
    "what was ordered": ("Customers", "B3", 26),
    "a used rate": ("Rates", "C2", "=7.336"),
    "an unused rate, lowered until it pays": ("Rates", "C14", -90),
    "the fuel surcharge": ("Rules", "B5", 6),
    "a row's own surcharge": ("Rates", "L11", 3),
    "a limit below what is sent": ("Rates", "G2", 1),
    "a limit above what is sent": ("Rates", "F7", 85),
    "a row that is used, closed": ("Rates", "H8", "yes"),
    "a hold": ("Rates", "O9", 8),
}
"""One edit each: sheet, cell, what is typed."""

HARMLESS = {
    "an unused rate, raised": ("Rates", "C14", 90),
    "a charge that nobody pays, raised": ("Customers", "C2", 5000),
    "a reason": ("Plan", "J2", "=1+1"),
}


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> dict[str, openpyxl.Workbook]:
    """Every workbook of this module, calculated in one go: starting the program takes the time."""
    folder = tmp_path_factory.mktemp("proof")
    for name, week in {
        "busy": busy_week(),
        "met": met_week(),
        "harmful": harmful_week(),
        "gone": gone_week(),
    }.items():
        write_workbook(plan_week(week), folder / f"{name}.xlsx")
    files = [without_results(folder / f"{name}.xlsx", folder / f"afresh {name}.xlsx") for name in WEEKS]
    for about, edit in {**EDITS, **HARMLESS}.items():
        files.append(without_results(folder / "busy.xlsx", folder / f"{about}.xlsx", [edit]))
    books = calculated(files, folder)
    for name in WEEKS:
        books[f"ours {name}"] = openpyxl.load_workbook(folder / f"{name}.xlsx", data_only=True)
        books[f"live {name}"] = openpyxl.load_workbook(folder / f"{name}.xlsx")
    return books


WEEKS = ("busy", "met", "harmful", "gone")


@pytest.mark.parametrize("name", WEEKS)
def test_every_stored_result_is_what_a_spreadsheet_program_calculates(
    name: str, results: dict[str, openpyxl.Workbook]
) -> None:
    ours, live, afresh = results[f"ours {name}"], results[f"live {name}"], results[f"afresh {name}.xlsx"]
    compared = 0
    for sheet in live:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type == "f":
                    here, there = (book[sheet.title][cell.coordinate].value for book in (ours, afresh))
                    compared += 1
                    if isinstance(here, int | float):
                        assert there == pytest.approx(here, abs=1e-9), f"{sheet.title} {cell.coordinate}"
                    else:
                        assert (there or "") == (here or ""), f"{sheet.title} {cell.coordinate}"
    assert compared > 50


@pytest.mark.parametrize("name", WEEKS)
def test_the_verdict_is_that_the_plan_is_proved(name: str, results: dict[str, openpyxl.Workbook]) -> None:
    assert results[f"afresh {name}.xlsx"]["Proof"][VERDICT].value == PROVED


@pytest.mark.parametrize("about", EDITS)
def test_an_edit_turns_the_verdict_into_a_warning(about: str, results: dict[str, openpyxl.Workbook]) -> None:
    assert results[f"{about}.xlsx"]["Proof"][VERDICT].value == BROKEN


@pytest.mark.parametrize("about", HARMLESS)
def test_an_edit_that_changes_nothing_leaves_it(about: str, results: dict[str, openpyxl.Workbook]) -> None:
    assert results[f"{about}.xlsx"]["Proof"][VERDICT].value == PROVED


def test_the_rate_that_begins_to_pay_is_the_one_marked(results: dict[str, openpyxl.Workbook]) -> None:
    sheet = results["an unused rate, lowered until it pays.xlsx"]["Proof"]
    head = next(row[0].row for row in sheet.iter_rows(max_col=1) if row[0].value == "Rate row")
    marked = [row[:4] for row in sheet.iter_rows(min_row=head + 1, values_only=True) if row[11]]
    assert marked == [(13, "Millrace", "Dogwood", "Oxcart")]


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(weeks())
def test_all_checks_hold_for_any_plan(week: Week) -> None:
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    figures = proof_figures(plan)
    assert not check_codes(plan, figures).any()
    assert lower_bound(plan, figures) == plan.total_cost == plan.proof.lower_bound
    lines = lines_of(plan)
    layout = layout_of(plan, figures, lines, plan_letters(plan_columns(plan)), first=19)
    checks = checks_of(plan, figures, layout, {"payable": "Costs!$B$4", "rounding": "Costs!$B$8"})
    assert [check.about for check in checks if check.difference] == []
    assert all(check.is_here == check.is_should for check in checks)


def test_a_plan_that_is_not_the_cheapest_fails_the_checks(met: Plan) -> None:
    quantity = met.flow.quantity.copy()
    # met_week: East-Near 50, West-Far 60 is the plan; exchange 10 t of it for the two dearer lanes
    rows = {met.week.rates.flat.named(int(p))[:2]: r for r, p in enumerate(met.model.rate_row) if p >= 0}
    for lane, change in (
        (("East", "Near"), -10),
        (("West", "Near"), 10),
        (("East", "Far"), 10),
        (("West", "Far"), -10),
    ):
        quantity[rows[lane]] += change
    worse = replace(met, flow=replace(met.flow, quantity=quantity))
    figures = proof_figures(met)
    assert np.count_nonzero(check_codes(worse, figures)) > 0


def test_a_large_week_lists_only_the_used_rows(monkeypatch: pytest.MonkeyPatch, busy: Plan) -> None:
    monkeypatch.setattr("engine.report.proof_layout.MOST_ROWS_LISTED", 5)
    monkeypatch.setattr("engine.report.workbook.MOST_ROWS_LISTED", 5)
    held = BytesIO()
    write_workbook(busy, held)
    book = openpyxl.load_workbook(held, data_only=True)
    sheet = book["Proof"]
    assert sheet[VERDICT].value == PROVED
    assert "Only used rate rows are below; all 13 were checked" in str(sheet["A2"].value)
    head = next(row[0].row for row in sheet.iter_rows(max_col=1) if row[0].value == "Rate row")
    assert sheet.max_row - head == len(busy.shipments)
    notes = " ".join(str(row[1]) for row in book["Notes"].iter_rows(values_only=True))
    assert "Proof lists only the rate rows that are used" in notes


def test_the_verdict_is_a_warning_where_the_plan_was_tampered_with(busy: Plan, tmp_path: Path) -> None:
    first, *rest = busy.shipments
    dearer = replace(busy, shipments=(replace(first, payable=first.payable + Decimal("0.01")), *rest))
    write_workbook(dearer, tmp_path / "plan.xlsx")
    assert openpyxl.load_workbook(tmp_path / "plan.xlsx", data_only=True)["Proof"][VERDICT].value == BROKEN
