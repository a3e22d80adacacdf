"""What a desk answers, accepts, uploads in part, or splits by product."""

import datetime
import io
from dataclasses import replace
from decimal import Decimal

import openpyxl
import pytest

import engine
import sample_data
from engine.changes import Add, Alter, SetHold
from engine.figures import Gone, Order, RateKey
from engine.findings import Finding, Severity
from engine.intake.answers import Answers
from engine.intake.part import read_part
from engine.intake.reading import read_week, read_weeks
from engine.intake.refusal import Unreadable
from engine.intake.surroundings import position_of, repaired_copy, surroundings_of
from tests.intake.books import ods
from tests.intake.sheets import CUSTOMERS, DEPOTS, RATES, plain, said, text_file, workbook

WEEK = read_week(workbook(plain())).week


def test_answers_are_kept_as_text():
    question = Finding(Severity.CHECK, "unknown name", "?", subject="depot: Nothgate", options=("Northgate",))
    answers = Answers().with_answer(question, "Northgate").with_accepted(question)
    again = Answers.from_json(answers.as_json())
    assert again == answers
    assert again.to("unknown name", "Depot:  NOTHGATE") == "Northgate"
    with pytest.raises(ValueError, match="no answer"):
        answers.with_answer(question, "Quarry")
    with pytest.raises(ValueError, match="kept earlier"):
        Answers.from_json("[1]")


def test_what_was_accepted_is_not_asked_again_but_stays_for_the_notes():
    source = workbook(plain(Customers=[*CUSTOMERS, ["Cole", 5]]))
    finding = next(f for f in read_week(source).findings if f.rule == "no lane reaches")
    answers = Answers().with_accepted(finding)
    moved = workbook(plain(Customers=[["Orders"], *CUSTOMERS, ["Cole", 5]]))
    reading = read_week(moved, answers=answers)
    assert [f.rule for f in reading.findings] == []
    assert [(f.rule, f.cell) for f in reading.accepted] == [("no lane reaches", "A5")]
    with pytest.raises(ValueError, match="accepted"):
        Answers().with_accepted(replace(finding, severity=Severity.STOPS))


PRODUCTS = {
    "Depots": [
        ["Depot", "Product", "Available"],
        ["Northgate", "Lime", 10],
        ["Northgate", "Ash", 20],
        ["Total", "", 30],
    ],
    "Customers": [
        ["Customer", "Product", "Ordered"],
        ["Aster", "Lime", 5],
        ["Birch", "ash ", 7],
        ["Aster", "Ash", 1],
    ],
    "Rates": [["Depot", "Customer", "Rate"], ["Northgate", "Aster", 4], ["Northgate", "Birch", 5]],
}


def test_a_product_column_makes_one_week_each():
    readings = read_weeks(workbook(PRODUCTS))
    assert list(readings) == ["Lime", "Ash"]
    assert {name: r.week.depots["Northgate"].available for name, r in readings.items()} == {
        "Lime": 10,
        "Ash": 20,
    }
    assert {name: sorted(r.week.customers) for name, r in readings.items()} == {
        "Lime": ["Aster"],
        "Ash": ["Aster", "Birch"],
    }
    asked = read_week(workbook(PRODUCTS))
    question = next(f for f in asked.findings if f.rule == "several products")
    assert (question.severity, question.options) == (Severity.STOPS, ("Lime", "Ash"))
    answered = read_week(workbook(PRODUCTS), answers=Answers().with_answer(question, "Ash"))
    assert answered.week == readings["Ash"].week


def test_one_product_is_said_named_and_never_taken_for_another():
    ash = read_week(workbook(PRODUCTS), product="ASH ")
    assert ash.week.rules.week == "Week, Ash"
    assert [f.severity for f in ash.findings if f.rule == "one product read"] == [Severity.NOTE]
    none = read_week(workbook(PRODUCTS), product="Sand")
    assert none.week.is_empty
    assert [(f.rule, f.options) for f in none.findings if f.options] == [("no such product", ("Lime", "Ash"))]
    question = Finding(Severity.STOPS, "several products", "?", subject="product", options=("Sand",))
    stale = read_week(workbook(PRODUCTS), answers=Answers().with_answer(question, "Sand"))
    assert "several products" in [f.rule for f in stale.findings]
    part = read_part(workbook(PRODUCTS), ash.week.apply(Alter("depot", "Northgate", "available", Decimal(3))),
                     product="Ash")  # fmt: skip
    assert part.change.changes == (Alter("depot", "Northgate", "available", Decimal(20)),)


def test_a_product_column_beside_a_grid_splits_its_rows():
    grid = [
        ["Product", "Depot", "Aster", "Birch"],
        ["Lime", "Northgate", 4, 5],
        ["Ash 0-4", "Northgate", 6, 7],
    ]
    for turned in (grid, [[row[1], row[0], *row[2:]] for row in grid]):
        readings = read_weeks(
            workbook(plain(Rates=turned, Depots=[["Depot", "Available"], ["Northgate", 200]]))
        )
        rates = {name: [row.rate for row in reading.week.rates] for name, reading in readings.items()}
        assert rates == {"Lime": [4, 5], "Ash 0-4": [6, 7]}


def test_a_new_stock_sheet_alters_only_what_it_holds_and_keeps_holds():
    held = WEEK.apply(SetHold(RateKey("Northgate", "Aster"), Decimal(20), "promised")).apply(
        Alter("depot", "Northgate", "must_move", Decimal(5))
    )
    part = read_part(workbook({"Stock": [["Depot", "Available"], ["northgate", 90], ["Mill", 10]]}), held)
    assert [c for c in part.change.changes if isinstance(c, Alter)] == [
        Alter("depot", "Northgate", "available", Decimal(90))
    ]
    assert [c.record.name for c in part.change.changes if isinstance(c, Add)] == ["Mill"]
    after = held.apply(part.change)
    assert (after.depots["Northgate"].must_move, after.holds) == (Decimal(5), held.holds)
    assert "Northgate: Available 120 becomes 90." in part.differences
    assert "1 depot is not in the upload and stays as it is." in part.differences
    assert not any(f.rule.startswith("no ") and f.severity is Severity.STOPS for f in part.findings)


def test_new_rates_as_a_list_or_a_grid_and_new_orders():
    grid = [["", "Aster", "Birch"], ["Northgate", 12.5, 14], ["Quarry", 9.75, 11]]
    part = read_part(workbook({"New": grid}), WEEK)
    assert part.change.changes == (Alter("rate", RateKey("Northgate", "Birch"), "rate", Decimal(14)),)
    part = read_part(text_file("orders.csv", "Customer;Ordered;Day\nBirch;50;Fri\n"), WEEK)
    assert part.change.changes == (Alter("customer", "Birch", "orders", (Order(Decimal(50), None, "Fri"),)),)
    same = read_part(workbook({"R": RATES}), WEEK)
    assert same.is_empty


def test_rates_on_one_sheet_per_depot():
    sheets = {
        "Depots": DEPOTS,
        "Customers": CUSTOMERS,
        "Northgate": [["Customer", "Rate"], ["Aster", 12.5], ["Birch", 13]],
        "Sheet9": [["Rates from Quarry"], [], ["Customer", "Rate"], ["Aster", 9.75], ["Birch", 11]],
        "Rules": [["Rule", "Value"], ["Week", "Week 49"]],
    }
    reading = read_week(workbook(sheets))
    assert reading.week == WEEK
    assert reading.findings == ()


def test_a_figure_in_kilograms_among_tonnes_and_swapped_places():
    names = [f"Customer {n}" for n in range(8)]
    customers = [["Customer", "Ordered", "Latitude", "Longitude"]]
    customers += [[name, 24 + n, 55 + n / 10, 5 + n / 10] for n, name in enumerate(names)]
    customers[3][1] = 24000
    customers[5][2:] = [5.4, 55.4]
    rates = [["Depot", "Customer", "Rate"], *[["Northgate", name, 9] for name in names]]
    depots = [["Depot", "Available"], ["Northgate", 90000]]
    reading = read_week(workbook(plain(Depots=depots, Customers=customers, Rates=rates)))
    assert {
        ("check", "out of proportion", "Customers", "B4"),
        ("check", "places swapped", "Customers", "C6"),
    } == {one for one in said(reading) if one[0] == "check"}


def test_a_cell_in_its_surroundings_and_a_repaired_copy():
    source = workbook(plain(Depots=[*DEPOTS, ["Mill", "lots"]]))
    finding = next(f for f in read_week(source).findings if f.cell == "B4")
    piece = surroundings_of(source, finding, around=1)
    assert piece.letters == ("A", "B")
    assert piece.numbers == (3, 4)
    assert piece.rows[piece.row][piece.column] == "lots"
    mended = repaired_copy(source, {("Depots", "B4"): "45.5", ("Depots", "A4"): "=1+1"})
    week = read_week(("week.xlsx", mended)).week
    assert week.depots["=1+1"].available == Decimal("45.5")
    assert openpyxl.utils.cell.coordinate_from_string("B4") == ("B", 4)
    assert (position_of("B4"), position_of("AA10"), position_of("")) == ((3, 1), (9, 26), None)


def test_a_repaired_text_file_keeps_its_separator():
    source = text_file("d.csv", "Depot;Available\r\nMühle;viel\r\n", "cp1252")
    assert (
        repaired_copy(source, {("d", "B2"): "12,5"}).decode("utf-8-sig")
        == "Depot;Available\r\nMühle;12,5\r\n"
    )
    with pytest.raises(Unreadable, match="Only"):
        repaired_copy(ods(plain()), {})


GONE = [
    ["Load", "Depot", "Customer", "Haulier", "Gone", "Paid per unit", "Day gone"],
    ["L-1", "northgate", "Aster", "Ore", 24, 12.5, datetime.date(2026, 12, 1)],
    ["L-2", "Quarry", "Birch", None, "16 t", "EUR 11/t", "2026-12-02"],
]


def test_what_has_gone_is_read_and_every_fault_named():
    reading = read_week(workbook(plain(Gone=GONE)))
    assert reading.findings == ()
    assert list(reading.week.gone.values()) == [
        Gone("L-1", "Northgate", "Aster", Decimal(24), Decimal("12.5"), "Ore", datetime.date(2026, 12, 1)),
        Gone("L-2", "Quarry", "Birch", Decimal(16), Decimal(11), None, datetime.date(2026, 12, 2)),
    ]
    faulty = [
        *GONE,
        ["L-1", "Quarry", "Aster", None, 3, 9, None],
        ["L-3", "Quarry", "Aster", None, "some", 9, None],
    ]
    reading = read_week(workbook(plain(Gone=[*faulty, ["L-4", "Quarry", None, None, 3, 9, None]])))
    assert said(reading) == {
        ("stops", "same load twice", "Gone", "A4"),
        ("stops", "not a number", "Gone", "E5"),
        ("stops", "figure missing", "Gone", "C6"),
    }
    assert reading.rows_read == reading.rows_used + reading.rows_named


@pytest.mark.parametrize("name", ["small_week.xlsx", "small_week_grid.xlsx"])
def test_a_workbook_that_the_tool_wrote_reads_back_as_the_same_week(name):
    week = read_week(sample_data.path(name)).week
    row = next(row for row in week.rates if not row.closed)
    gone = Gone("L-1", row.depot, row.customer, Decimal("0.5"), row.rate, row.haulier)
    week = week.apply(Add(gone))
    stream = io.BytesIO()
    engine.write_workbook(engine.plan_week(week), stream)
    assert read_week(("plan.xlsx", stream.getvalue())).week == week


def test_places_are_remembered_by_name():
    places = [["Depot", "Available", "Latitude", "Longitude"], ["Northgate", 1, 57.5, -3.25]]
    earlier = read_week(workbook(plain(Depots=places))).week
    reading = read_week(workbook(plain(Depots=[DEPOTS[0], ["NORTHGATE", 120], DEPOTS[2]])), known=earlier)
    assert reading.week.depots["NORTHGATE"].longitude == Decimal("-3.25")
    assert ("note", "places remembered", "", "") in said(reading)


def test_the_currency_that_cells_carry_and_names_merged_over_rows():
    def prepare(book):
        sheet = book["Rates"]
        for row, rate in enumerate(("£12.50", "£13", "£ 9.75", "11 GBP"), start=2):
            sheet.cell(row, 3, rate)
        sheet["A3"], sheet["A5"] = None, None
        sheet["D1"], sheet["D2"] = "At most", 30
        for area in ("A2:A3", "A4:A5", "D2:D3"):
            sheet.merge_cells(area)

    reading = read_week(workbook(plain(Rules=None), prepare=prepare))
    assert reading.week.rules.currency == "GBP"
    assert [(r.depot, r.customer) for r in reading.week.rates] == [(r.depot, r.customer) for r in WEEK.rates]
    assert {("check", "merged figure", "Rates", "D2"), ("note", "currency told", "", "")} <= said(reading)
