"""Sheets Compare, Bridge and Weeks: sums in a spreadsheet program, native charts, names never formulas."""

from dataclasses import replace
from datetime import UTC, datetime
from decimal import Decimal
from io import BytesIO
from pathlib import Path

import openpyxl

import engine
from engine.changes import Add, Alter
from engine.compare.bridge import Side, bridge
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.compare.variants import Variant, side_by_side
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.planning.planner import plan_week
from engine.records.totals import WeekTotals
from engine.records.weeks import Listed
from engine.report.book import write_book
from engine.report.bridge_sheet import bridge_sheet
from engine.report.compare_sheet import compare_sheet
from engine.report.variants_sheet import variants_sheet
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


def test_the_sheet_of_variants_adds_up_and_is_never_read_as_figures(tmp_path: Path) -> None:
    plan = plan_week(week())
    variants = (
        Variant(EVIL, (Alter("depot", EVIL, "available", D(3)), Alter("depot", "Upland", "must_move", D(1)))),
        Variant("More", (Add(Depot("Third", D(40))), Add(RateRow("Third", "Elm", D(1))))),
        Variant("Never", (Alter("depot", "Nowhere", "available", D(3)),)),
    )
    found = side_by_side(plan, variants)
    sheet = variants_sheet(plan, found, lambda change: f"={type(change).__name__} 1", "A")
    file = tmp_path / "variants.xlsx"
    engine.write_workbook(plan, file, more=[sheet])
    book = calculated([without_results(file, tmp_path / "bare.xlsx")], tmp_path)["bare.xlsx"]
    rows = [row for row in book["Variants"].iter_rows(values_only=True) if row[0]]
    by_name = {row[0]: row for row in reversed(rows) if isinstance(row[1], int | float)}
    for one in found[:2]:
        assert one.measures is not None
        assert one.difference is not None
        row = by_name[one.variant.name]
        assert D(str(row[1])) == one.measures.freight
        assert D(str(row[2])).quantize(D("0.01")) == one.difference.freight_payable
        assert row[10:12] == (2, len(one.difference.rows))
    never = next(row for row in rows if row[0] == "Never")
    assert str(never[1]).startswith("Cannot be planned. ")
    moved = [(r[0], r[1], r[6]) for r in rows if isinstance(r[6], int | float) and isinstance(r[1], str)]
    assert [(n, d, D(str(m)).quantize(D("0.01"))) for n, d, m in moved] == [
        (one.variant.name, row.key.depot, row.more)
        for one in found
        if one.difference
        for row in one.difference.rows
    ]
    written = openpyxl.load_workbook(file)["Variants"]
    assert len(written._charts) == 1
    formulas = [c.value for row in written.iter_rows() for c in row if c.data_type == "f"]
    assert formulas
    assert not [text for text in formulas if "HYPERLINK" in text or "Alter" in text]
    again = engine.read_week(file)
    assert again.week == plan.week
    assert not [f for f in again.findings if f.sheet == "Variants"]
    assert dict(engine.read_quantities(file)) == {s.key: s.quantity for s in plan.shipments}
