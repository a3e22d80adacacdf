"""The workbook of a plan: what stands on each sheet, and that it reads back as the same week."""

from collections import defaultdict
from dataclasses import replace
from datetime import UTC, datetime
from decimal import Decimal as D
from io import BytesIO
from pathlib import Path

import openpyxl
import pandas as pd
import pytest
from hypothesis import HealthCheck, given, settings

import engine
from engine.findings import Severity
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.report.workbook import write_workbook
from tests.planning.weeks import weeks
from tests.report.weeks import long_week

SHEETS = [
    "Plan", "By depot", "By customer", "By haulier", "Costs", "Values", "Proof", "Notes",
    "Depots", "Customers", "Rates", "Rules",
]  # fmt: skip


def book_of(plan: Plan, data_only: bool = True, made: datetime | None = None) -> openpyxl.Workbook:
    held = BytesIO()
    write_workbook(plan, held, made)
    return openpyxl.load_workbook(held, data_only=data_only)


def table(book: openpyxl.Workbook, sheet: str, head: int = 1) -> list[dict[str, object]]:
    """The rows of a list below its headings, as far as the first blank row."""
    rows = list(book[sheet].iter_rows(min_row=head, values_only=True))
    headings = [str(heading) for heading in rows[0]]
    found = []
    for row in rows[1:]:
        if not any(cell is not None for cell in row):
            break
        found.append(dict(zip(headings, row, strict=True)))
    return found


def exact(value: object) -> D:
    return D(repr(value)) if isinstance(value, float) else D(str(value))


def test_sheets_in_order(busy: Plan) -> None:
    assert book_of(busy).sheetnames == SHEETS


def test_plan_lists_every_shipment_exactly(busy: Plan) -> None:
    listed = {
        (row["Depot"], row["Customer"], row["Haulier"], row["Rate row"]): (
            exact(row["Send"]), exact(row["Rate"]), exact(row["Cost"]), exact(row["Payable"]), row["Unit"],
        )
        for row in table(book_of(busy), "Plan")
    }  # fmt: skip
    keys = {
        shipment.key: 1
        + [busy.week.rates.key_of(n) for n in busy.week.rates.ids_in_order].index(shipment.key)
        for shipment in busy.shipments
    }
    assert listed == {
        (s.depot, s.customer, s.haulier, keys[s.key]): (s.quantity, s.rate, s.cost, s.payable, "t")
        for s in busy.shipments
    }


def test_plan_tells_holds_and_orders(busy: Plan) -> None:
    rows = {(row["Depot"], row["Customer"], row["Haulier"]): row for row in table(book_of(busy), "Plan")}
    held = rows["Quarry", "Cole", "Drayman"]
    assert (held["Send"], held["Held"], held["Hold reason"]) == (7.5, "yes", "promised on the telephone")
    alder = next(row for (_, customer, _), row in rows.items() if customer == "Alder")
    assert (alder["Order numbers"], alder["Days"], alder["Held"]) == ("A-1, A-2", "Mon, Wed", None)


def test_pandas_reads_the_plan_with_its_totals(busy_file: Path, busy: Plan) -> None:
    frame = pd.read_excel(busy_file, sheet_name="Plan", engine="openpyxl")
    total = frame[frame["Depot"] == "Total"].iloc[0]
    assert D(repr(float(total["Payable"]))) == busy.freight_payable
    assert D(repr(float(total["Send"]))) == sum(s.quantity for s in busy.shipments)
    assert frame["Send"].iloc[: len(busy.shipments)].notna().all()


def test_haulier_totals_are_what_invoices_say_to_the_cent(busy: Plan) -> None:
    book = book_of(busy)
    totals = {
        str(row["Haulier"]).removesuffix(": invoices should say"): exact(row["Payable"])
        for row in table(book, "By haulier")
        if str(row["Haulier"]).endswith(": invoices should say")
    }
    # an invoice adds up amounts that were each rounded half up to the cent (common practice)
    expected: dict[str, D] = defaultdict(D)
    for s in busy.shipments:
        expected[s.haulier or "(no haulier named)"] += (s.cost * 100 + D("0.5")).to_integral_value(
            "ROUND_FLOOR"
        ) / 100
    assert totals == dict(expected)
    assert sum(totals.values()) == busy.freight_payable
    assert exact(book["By haulier"].cell(book["By haulier"].max_row, 7).value) == busy.freight_payable


def test_depots_and_customers_add_up(busy: Plan) -> None:
    book = book_of(busy)
    loaded = {
        str(row["Depot"]).removesuffix(": to load"): exact(row["Send"])
        for row in table(book, "By depot")
        if str(row["Depot"]).endswith(": to load")
    }
    got: dict[str, D] = defaultdict(D)
    short, whole = {}, {}
    for row in table(book, "By customer"):
        got[str(row["Customer"])] += exact(row["Send"])
        if row["Whole order"] is not None:
            whole[row["Customer"]] = exact(row["Whole order"])
        if row["Goes short of"] is not None:
            short[row["Customer"]] = exact(row["Goes short of"])
    week = busy.week
    unsent = {one.depot: one.quantity for one in busy.unsent}
    assert loaded == {
        name: depot.available - unsent.get(name, 0)
        for name, depot in week.depots.items()
        if depot.available > unsent.get(name, 0)
    }
    assert whole == {name: customer.ordered for name, customer in week.customers.items()}
    assert short == {one.customer: one.quantity for one in busy.short}
    assert all(whole[name] == got[name] + short.get(name, 0) for name in whole)


def test_costs_keep_charges_apart_and_mark_them(busy: Plan) -> None:
    rows = {row[0]: row[1:3] for row in book_of(busy)["Costs"].iter_rows(max_row=13, values_only=True)}
    assert exact(rows["Freight payable"][0]) == busy.freight_payable
    assert exact(rows["Freight, exact"][0]) == busy.freight_cost
    assert exact(rows["Rounding, once per shipment"][0]) == busy.freight_payable - busy.freight_cost
    assert rows["Freight, to be invoiced"][1] == "payable"
    assert (exact(rows["Charges for what is short"][0]), rows["Charges for what is short"][1]) == (
        busy.short_cost,
        "notional",
    )
    assert (exact(rows["Charges for what is unsent"][0]), rows["Charges for what is unsent"][1]) == (
        busy.unsent_cost,
        "notional",
    )
    assert exact(rows["Made least: exact freight and charges"][0]) == busy.total_cost


def test_the_same_plan_gives_the_same_bytes(busy: Plan) -> None:
    first, second = BytesIO(), BytesIO()
    write_workbook(busy, first)
    write_workbook(plan_week(busy.week), second)
    assert first.getvalue() == second.getvalue()


def test_a_time_is_told_only_when_given(busy: Plan) -> None:
    made = datetime(2026, 12, 1, 9, 30, tzinfo=UTC)
    cells = [row[:2] for row in book_of(busy, made=made)["Notes"].iter_rows(values_only=True)]
    assert ("Written", "2026-12-01 09:30+00:00") in cells
    assert book_of(busy, made=made).properties.modified == datetime(2026, 12, 1, 9, 30)
    assert all(row[0] != "Written" for row in book_of(busy)["Notes"].iter_rows(values_only=True))


@pytest.mark.parametrize("name", ["busy", "met"])
def test_the_workbook_reads_back_as_the_same_week(name: str, request: pytest.FixtureRequest) -> None:
    plan: Plan = request.getfixturevalue(name)
    held = BytesIO()
    write_workbook(plan, held)
    reading = engine.read_week(held.getvalue())
    assert reading.week == plan.week
    assert {finding.rule for finding in reading.findings if finding.rule not in _ABOUT_THE_WEEK} <= {
        "plan left out"
    }
    again = plan_week(reading.week)
    assert (again.total_cost, again.freight_payable) == (plan.total_cost, plan.freight_payable)


_ABOUT_THE_WEEK = {finding.rule for finding in engine.check_week(engine.Week())} | {
    "credit if unsent", "same lane twice", "no lane reaches", "no lane leaves", "order beyond reach",
    "loads a day not counted",
}  # fmt: skip


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
@given(weeks())
def test_any_week_that_can_be_planned_reads_back(week: engine.Week) -> None:
    try:
        plan = plan_week(week)
    except NotPlannable:
        return
    held = BytesIO()
    write_workbook(plan, held)
    reading = engine.read_week(held.getvalue())
    assert not [finding for finding in reading.findings if finding.severity is Severity.STOPS]
    assert reading.week == week
    assert plan_week(reading.week).total_cost == plan.total_cost


def test_long_numbers_are_kept_as_text_and_notes_say_so() -> None:
    plan = plan_week(long_week())
    book = book_of(plan)
    assert [row["Available"] for row in table(book, "Depots")] == ["1234567890123.125", 60]
    assert [exact(row["Send"]) for row in table(book, "Plan")] == [s.quantity for s in plan.shipments]
    notes = " ".join(str(row[1]) for row in book["Notes"].iter_rows(values_only=True))
    assert "that concerns exact freight" in notes
    assert exact(book["Costs"]["B7"].value) == plan.freight_cost
    assert "those below are copies" in str(book["Proof"]["A2"].value)
    held = BytesIO()
    write_workbook(plan, held)
    assert engine.read_week(held.getvalue()).week == plan.week


def test_an_empty_plan_is_written_too(busy: Plan) -> None:
    closed = tuple(replace(row, closed=True, at_least=None) for row in busy.week.rates)
    week = engine.Week.of(tuple(busy.week.depots.values()), tuple(busy.week.customers.values()), closed)
    plan = plan_week(week)
    book = book_of(plan)
    assert book["Plan"]["A2"].value == "Nothing can be sent: see Notes."
    assert book["Costs"]["B4"].value == 0
