"""The workbook of a plan with whole loads: read back, invoices to the cent, a proof that is calculated."""

from collections import defaultdict
from decimal import Decimal as D
from io import BytesIO

import openpyxl
import pytest

import engine
from engine.figures import Customer, Depot, Gone, Haulier, Hold, Order, RateKey, RateRow, Rules
from engine.money import round_half_up
from engine.planning.plan import Plan
from engine.report.loading import write_loading_list
from engine.report.notes import notes_of
from engine.report.proof_loads import BROKEN, KEPT
from engine.week import Week
from tests.report.libreoffice import calculated, without_results

EDITS = {
    "a quantity sent": ("Plan", "D2", 1),
    "a payable amount": ("Plan", "{Payable}2", 1),
    "an exact cost": ("Plan", "{Cost}2", 1),
    "the loads of a shipment": ("Plan", "{Loads}2", 9),
    "the headline": ("Costs", "B4", 1),
    "what is available": ("Depots", "B2", 121),
    "what was ordered": ("Customers", "B3", 26),
    "a rate per load": ("Rates", "C2", 250),
    "the fuel surcharge": ("Rules", "B5", 6),
    "the week's load size": ("Rules", "B6", 20),
    "a haulier's load size": ("Hauliers", "C3", 11),
    "what a haulier carries": ("Hauliers", "B2", 30),
    "loads a day": ("Depots", "E2", 0),
    "loading days": ("Rules", "B10", 0),
    "an opening charge": ("Depots", "F2", 51),
    "a smallest drop": ("Customers", "G2", 60),
    "a charge per use": ("Rates", "K5", 80),
    "a trip minimum": ("Rates", "J3", 300),
    "a row that is used, closed": ("Rates", "H2", "yes"),
}
"""One edit each: sheet, cell (a heading of *Plan* in braces), what is typed."""


def loads_week() -> Week:
    """Every figure that whole loads know, with a hold and goods that have gone."""
    depots = (
        Depot("Quarry", D(120), loads_a_day=D(1), opening_charge=D(50)),
        Depot("Harbour", D("80.5"), must_move=D(10)),
    )
    customers = (
        Customer("Elm", (Order(D(50), "E-1"), Order(D(12), "E-2")), smallest_drop=D(10)),
        Customer("Ash", (Order(D(31)),), one_depot="yes"),
        Customer("Birch", (Order(D("40.5")),)),
    )
    rates = (
        RateRow("Quarry", "Elm", D(240), per="load", haulier="Vole"),
        RateRow("Harbour", "Elm", D("11.50"), haulier="Otter", trip_minimum=D(200)),
        RateRow("Quarry", "Ash", D(200), per="load", haulier="Vole", load_size=D(20)),
        RateRow("Harbour", "Ash", D(9), haulier="Otter", charge_per_use=D(75)),
        RateRow("Quarry", "Birch", D(12), haulier="Otter"),
        RateRow("Harbour", "Birch", D("260.333"), per="load", haulier="Vole", surcharge=D(5)),
    )
    return Week.of(
        depots,
        customers,
        rates,
        Rules("Week 7", load_size=D(25), fuel_surcharge=D("3.5"), charge_if_short=D(100)),
        {RateKey("Quarry", "Birch", "Otter"): Hold(D("15.5"), "promised")},
        (Gone("L-1", "Harbour", "Elm", D(2), D("11.9"), "Otter"),),
        (Haulier("Vole", at_most=D(90)), Haulier("Otter", load_size=D(24))),
    )


@pytest.fixture(scope="module")
def plan() -> Plan:
    return engine.plan_week(loads_week(), time_limit=20)


@pytest.fixture(scope="module")
def book(plan: Plan) -> openpyxl.Workbook:
    return openpyxl.load_workbook(written(plan), data_only=True)


def written(plan: Plan) -> BytesIO:
    held = BytesIO()
    engine.write_workbook(plan, held)
    held.seek(0)
    return held


def test_the_workbook_reads_back_as_the_same_week(plan: Plan) -> None:
    reading = engine.read_week(("plan.xlsx", written(plan).getvalue()))
    assert reading.week == plan.week
    assert engine.read_quantities(("plan.xlsx", written(plan).getvalue()))


def test_what_a_haulier_is_owed_is_the_sum_of_its_rounded_shipments(
    plan: Plan, book: openpyxl.Workbook
) -> None:
    """Worked out from the figures here: loads rounded up, surcharge, minimum, once per use, then the cent."""
    rates = {(r.depot, r.customer, r.haulier): r for r in plan.week.rates}
    owed: dict[str, D] = defaultdict(D)
    for one in plan.shipments:
        row, haulier = rates[one.key[:3]], plan.week.hauliers[one.haulier or ""]
        if one.gone:
            exact = one.quantity * one.rate
        else:
            size = row.load_size or haulier.load_size or plan.week.rules.load_size or D(1)
            factor = 1 + (row.surcharge if row.surcharge is not None else D("3.5")) / 100
            full, rest = divmod(one.quantity, size)
            trips = [size] * int(full) + ([rest] if rest else [])
            assert one.loads == len(trips)
            per_trip = [row.rate * factor * (1 if row.per == "load" else load) for load in trips]
            exact = sum(
                (max(cost, row.trip_minimum or D(0)) for cost in per_trip), row.charge_per_use or D(0)
            )
        assert one.cost == exact
        owed[one.haulier or ""] += round_half_up(exact, 2)
    sheet = list(book["By haulier"].iter_rows(values_only=True))
    payable = sheet[0].index("Payable")
    totals = {row[0].split(":")[0]: row[payable] for row in sheet if row[0] and ":" in str(row[0])}
    assert {name: D(str(amount)) for name, amount in totals.items()} == owed
    assert plan.freight_payable == sum(owed.values())


def test_loads_stand_on_the_sheets_that_are_loaded_and_paid_by(plan: Plan, book: openpyxl.Workbook) -> None:
    for name in ("Plan", "By depot", "By customer"):
        headings = [cell.value for cell in book[name][1]]
        assert {"Loads", "Filled"} <= set(headings), name
    held = BytesIO()
    write_loading_list(plan, "Quarry", held)
    rows = list(openpyxl.load_workbook(held)["Loading list"].iter_rows(min_row=4, values_only=True))
    assert rows[0][4:6] == ("Loads", "Filled")
    assert not {"Rate", "Cost", "Payable", "Per", "Charge per use"} & set(rows[0])


def test_the_notes_say_what_applied(plan: Plan) -> None:
    said = {label: words for _, pairs in notes_of(plan) for label, words in pairs}
    assert "5 loading days, Monday to Friday, the common practice" in said["Loads a day"]
    assert "Quarry 5" in said["Loads a day"]
    assert "that of the haulier (Otter 24), then the week's, 25 t" in said["Load size"]
    assert {"Trip minimum", "Charge per use", "Opening charge", "Smallest drop", "Hauliers"} <= set(said)
    assert "whole loads" in said["How it was found"]


@pytest.fixture(scope="module")
def results(plan: Plan, tmp_path_factory: pytest.TempPathFactory) -> dict[str, openpyxl.Workbook]:
    """Every workbook of this module, calculated in one go."""
    folder = tmp_path_factory.mktemp("loads")
    (folder / "loads.xlsx").write_bytes(written(plan).getvalue())
    headings = {c.value: c.column_letter for c in openpyxl.load_workbook(folder / "loads.xlsx")["Plan"][1]}
    files = [without_results(folder / "loads.xlsx", folder / "afresh.xlsx")]
    for about, (sheet, cell, value) in EDITS.items():
        edit = (sheet, cell.format(**headings), value)
        files.append(without_results(folder / "loads.xlsx", folder / f"{about}.xlsx", [edit]))
    return calculated(files, folder)


def test_every_stored_result_is_what_a_spreadsheet_program_calculates(
    book: openpyxl.Workbook, results: dict[str, openpyxl.Workbook]
) -> None:
    afresh = results["afresh.xlsx"]
    for name in ("Proof", "Plan", "By depot", "By haulier", "By customer"):
        for ours, theirs in zip(book[name].iter_rows(), afresh[name].iter_rows(), strict=True):
            for one, other in zip(ours, theirs, strict=True):
                if isinstance(one.value, int | float):
                    assert other.value == pytest.approx(one.value, abs=1e-9), f"{name} {one.coordinate}"
                else:
                    assert (one.value or "") == (other.value or ""), f"{name} {one.coordinate}"
    assert afresh["Proof"]["B3"].value == KEPT


@pytest.mark.parametrize("about", EDITS)
def test_every_edit_is_noticed(about: str, results: dict[str, openpyxl.Workbook]) -> None:
    assert results[f"{about}.xlsx"]["Proof"]["B3"].value == BROKEN
