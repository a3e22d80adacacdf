"""What has gone stands in the workbook as a fact, is paid for, and is on no loading list."""

from collections.abc import Iterator
from decimal import Decimal as D
from io import BytesIO

import openpyxl
import pytest

from engine.planning.plan import Plan
from engine.planning.planner import plan_week
from engine.report.loading import write_loading_list
from engine.report.workbook import write_workbook
from tests.report.weeks import gone_week


@pytest.fixture(scope="module")
def plan() -> Plan:
    return plan_week(gone_week())


@pytest.fixture(scope="module")
def book(plan: Plan) -> openpyxl.Workbook:
    held = BytesIO()
    write_workbook(plan, held)
    return openpyxl.load_workbook(held, data_only=True)


def listed(book: openpyxl.Workbook, sheet: str) -> Iterator[dict[str, object]]:
    rows = book[sheet].iter_rows(values_only=True)
    headings = [str(heading) for heading in next(rows)]
    return (dict(zip(headings, row, strict=True)) for row in rows)


def test_plan_marks_what_has_gone_and_counts_it(book: openpyxl.Workbook, plan: Plan) -> None:
    rows = list(listed(book, "Plan"))
    gone = {row["Gone, load"]: (row["Depot"], row["Customer"], row["Send"], row["Payable"]) for row in rows}
    # 12.25 t at 7.50; 5 t at 9.4572 is 47.286, rounded half up to the cent; 10 t at 9
    assert gone["L1"] == ("Northgate", "Alder", 12.25, 91.88)
    assert gone["L2"] == ("Quarry", "Cole", 5, 47.29)
    assert gone["=L3"] == ("Millrace", "Elm", 10, 90)
    total = next(row for row in rows if row["Depot"] == "Total")
    assert D(repr(total["Payable"])) == plan.freight_payable


def test_invoices_cover_what_has_gone(book: openpyxl.Workbook, plan: Plan) -> None:
    totals = [row for row in listed(book, "By haulier") if str(row["Haulier"]).startswith("Drayman: ")]
    expected = sum(s.payable for s in plan.shipments if s.haulier == "Drayman")
    assert [D(repr(row["Payable"])) for row in totals] == [expected]


def test_customers_get_what_has_gone_and_what_is_still_to_go(book: openpyxl.Workbook, plan: Plan) -> None:
    rows = [row for row in listed(book, "By customer") if row["Customer"] == "Alder"]
    assert sum(float(str(row["Send"])) for row in rows) == float(plan.week.customers["Alder"].ordered)


def test_loading_lists_leave_it_out(book: openpyxl.Workbook, plan: Plan) -> None:
    held = BytesIO()
    write_loading_list(plan, "Millrace", held)
    sheet = openpyxl.load_workbook(held, data_only=True)["Loading list"]
    customers = [row[0] for row in sheet.iter_rows(min_row=5, values_only=True)]
    assert "Elm" not in customers
    assert "Cole" in customers
    elm = [r for r in listed(book, "By depot") if (r["Depot"], r["Customer"]) == ("Millrace", "Elm")]
    assert elm == []


def test_the_sheet_of_what_has_gone_tells_all_of_it(book: openpyxl.Workbook, plan: Plan) -> None:
    rows = [list(row.values()) for row in listed(book, "Gone")]
    assert [row[:6] for row in rows] == [
        ["L1", "Northgate", "Alder", "Drayman", 12.25, 7.5],
        ["L2", "Quarry", "Cole", "Drayman", 5, 9.4572],
        ["=L3", "Millrace", "Elm", None, 10, 9],
    ]
    assert book["Gone"]["G2"].value.date() == next(iter(plan.week.gone.values())).day


def test_notes_say_how_it_was_treated(book: openpyxl.Workbook) -> None:
    abouts = {row[0] for row in book["Notes"].iter_rows(values_only=True)}
    assert {"Gone", "Later rates"} <= abouts
