"""Sheets Compare, Bridge and Weeks: sums in a spreadsheet program, native charts, names never formulas."""

from dataclasses import replace
from datetime import UTC, datetime
from decimal import Decimal
from io import BytesIO
from pathlib import Path

import openpyxl

from engine.compare.bridge import Side, bridge
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.planner import plan_week
from engine.records.totals import WeekTotals
from engine.records.weeks import Listed
from engine.report.book import write_book
from engine.report.bridge_sheet import bridge_sheet
from engine.report.compare_sheet import compare_sheet
from engine.report.weeks_sheet import weeks_sheet
from engine.week import Week
from tests.report.libreoffice import calculated, without_results

D = Decimal
EVIL = '=HYPERLINK("http://x.example")'


def week(stock: int = 8, name: str = "A") -> Week:
    return Week.of(
        (Depot(EVIL, D(stock)), Depot("Upland", D(20))),
        (Customer("Elm", (Order(D("10.25")),)),),
        (RateRow(EVIL, "Elm", D("2.333")), RateRow("Upland", "Elm", D(5))),
        Rules(week=name),
    )


def totals(name: str, freight: str) -> WeekTotals:
    moment = datetime(2031, 2, 3, tzinfo=UTC)
    listed = Listed("id", "read", name, moment, moment, None, 0, "t", "EUR")
    return WeekTotals(listed, "met", D(10), D(8), D(2), D(0), D(freight))


def test_the_sheets_add_up_in_a_spreadsheet_program(tmp_path: Path) -> None:
    first, second = week(), week(stock=3, name=EVIL)
    plan = plan_week(second)
    usual = usual_plan(second, Rule.CHEAPEST)
    found = bridge(Side("A", first, plan_week(first)), Side(EVIL, second, plan))
    saved = saving(plan, usual.costs)
    file = tmp_path / "compared.xlsx"
    sheets = [
        compare_sheet(plan, usual, saved, "A"),
        bridge_sheet(found, "A"),
        weeks_sheet([totals("A", "24.5"), totals(EVIL, "30")], "A"),
    ]
    write_book(sheets, file, title="Compared")
    bare = without_results(file, tmp_path / "bare.xlsx")
    book = calculated([bare], tmp_path)["bare.xlsx"]
    rows = [row for row in book["Bridge"].iter_rows(values_only=True) if row[0]]
    assert D(str(rows[-1][2])).quantize(D("0.01")) == plan.freight_payable
    assert D(str(rows[-1][1])).quantize(D("0.01")) == found.freight
    total = next(row for row in book["Compare"].iter_rows(values_only=True) if row[0] == "Total")
    assert D(str(total[6])).quantize(D("0.01")) == saved.freight
    assert [row[3] for row in book["Weeks"].iter_rows(min_row=5, values_only=True)] == [3.0625, 3.75]


def test_charts_are_native_and_names_never_formulas() -> None:
    held = BytesIO()
    plan = plan_week(week())
    usual = usual_plan(plan.week, Rule.CHEAPEST)
    second = replace(plan.week, rules=Rules(week=EVIL))
    found = bridge(Side("A", plan.week, plan), Side(EVIL, second, plan_week(second)))
    sheets = [
        compare_sheet(plan, usual, saving(plan, usual.costs), "A"),
        bridge_sheet(found, "A"),
        weeks_sheet([totals(EVIL, "24.5")], "A"),
    ]
    write_book(sheets, held, title="Compared")
    book = openpyxl.load_workbook(held)
    assert [len(sheet._charts) for sheet in book.worksheets] == [1, 1, 3]
    for sheet in book.worksheets:
        for row in sheet.iter_rows():
            assert not [c for c in row if c.data_type == "f" and "HYPERLINK" in str(c.value)]
