"""Spreadsheets to a week: what is read, and which finding stands at which cell."""

from decimal import Decimal

import pytest
from openpyxl.worksheet.formula import ArrayFormula

from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow, Rules
from engine.findings import Severity, stops
from engine.intake.answers import Answers
from engine.intake.reading import read_week
from engine.week import Week
from tests.intake.sheets import CUSTOMERS, DEPOTS, RATES, plain, said, text_file, workbook

PLAIN = Week.of(
    (Depot("Northgate", Decimal(120)), Depot("Quarry", Decimal(80))),
    (Customer("Aster", (Order(Decimal(60)),)), Customer("Birch", (Order(Decimal(40)),))),
    (
        RateRow("Northgate", "Aster", Decimal("12.5")),
        RateRow("Northgate", "Birch", Decimal(13)),
        RateRow("Quarry", "Aster", Decimal("9.75")),
        RateRow("Quarry", "Birch", Decimal(11)),
    ),
    Rules(week="Week 49"),
)


def read(**changed):
    return read_week(workbook(plain(**changed)))


def test_a_plain_week():
    reading = read()
    assert reading.week == PLAIN
    assert reading.findings == ()
    assert (reading.rows_read, reading.rows_used, reading.rows_named) == (11, 11, 0)
    assert reading.summary == (
        "2 depots, 2 customers, 4 lanes of 4; 100 t ordered, 200 t available; "
        "rates in EUR per t; decimal point"
    )


def test_a_path_bytes_and_an_open_file_read_alike(tmp_path):
    name, data = workbook(plain())
    path = tmp_path / name
    path.write_bytes(data)
    with path.open("rb") as opened:
        readings = [read_week(source) for source in (path, str(path), data, opened, (name, data))]
    assert all(reading.week == PLAIN for reading in readings)


GRID = [["", "Aster", "Birch"], ["Northgate", 12.5, 13], ["Quarry", 9.75, 11]]
ACROSS = [["EUR/t", "Northgate", "Quarry"], ["Aster", 12.5, 9.75], ["Birch", 13, 11]]


@pytest.mark.parametrize("grid", [GRID, ACROSS])
def test_rates_as_a_grid_either_way_round(grid):
    week = read(Rates=grid).week
    assert sorted(map(repr, week.rates)) == sorted(map(repr, PLAIN.rates))


def test_a_grid_that_starts_anywhere_with_lanes_closed_in_words():
    rows = [
        ["Rates of November"],
        [],
        ["", "", "Aster", "Birch", "Total"],
        ["", "Northgate", "x", 13, 13],
        ["", "Quarry", "9.75", "n/a"],
        ["", "Total", 1, 2],
        [],
        ["valid until Friday"],
    ]
    reading = read(Rates=rows)
    assert [(r.depot, r.customer, r.rate) for r in reading.week.rates] == [
        ("Northgate", "Birch", Decimal(13)),
        ("Quarry", "Aster", Decimal("9.75")),
    ]
    assert not stops(reading.findings)


def test_tables_anywhere_two_on_a_sheet_titles_and_notes():
    rows = [
        ["Stock and orders"],
        [],
        ["", "Depot", "Stock on hand (t)", "", "Consignee", "Qty"],
        ["", "Northgate", 120, "", "Aster", 60],
        ["", "Quarry", 80, "", "Birch", 40],
        ["", "Total", 200, "", "", ""],
        [],
        ["", "", "", "", "* by Friday", ""],
    ]
    reading = read(Depots=rows, Customers=None)
    assert reading.week == PLAIN
    assert reading.rows_read == reading.rows_used + reading.rows_named
    assert ("note", "total left out", "Depots", "B6") in said(reading)


def test_order_rows_are_added_up_and_numbers_and_days_kept():
    rows = [
        ["Customer", "Ordered", "Priority", "Order number", "Day"],
        ["Aster", 50, "A", 1001, "Mon"],
        ["Birch", "40 t", None, None, None],
        ["  aster", 10, None, "1002", "Tue"],
    ]
    week = read(Customers=rows).week
    aster = week.customers["Aster"]
    assert aster.orders == (Order(Decimal(50), "1001", "Mon"), Order(Decimal(10), "1002", "Tue"))
    assert (aster.ordered, aster.priority) == (Decimal(60), "A")


def test_holds_come_back():
    rows = [[*RATES[0], "Hold", "Hold reason"], [*RATES[1], 20, "promised"], *RATES[2:]]
    assert read(Rates=rows).week.holds == {RateKey("Northgate", "Aster"): Hold(Decimal(20), "promised")}


def test_without_rules_a_note():
    reading = read(Rules=None)
    assert said(reading) == {("note", "no rules", "", "")}


def rates(*rows, headings=()):
    return [[*RATES[0], *headings], *rows]


FAULTS = [
    ({"Depots": [*DEPOTS, ["Mill", "many"]]}, ("stops", "not a number", "Depots", "B4")),
    ({"Depots": [*DEPOTS, ["Mill", None]]}, ("stops", "figure missing", "Depots", "B4")),
    ({"Depots": [*DEPOTS, ["Mill", -4]]}, ("stops", "negative", "Depots", "B4")),
    ({"Depots": [*DEPOTS, ["QUARRY", 5]]}, ("stops", "same depot twice", "Depots", "A4")),
    ({"Depots": [*DEPOTS, [None, 5]]}, ("stops", "no name", "Depots", "A4")),
    ({"Depots": [*DEPOTS, ["Mill", 5]]}, ("check", "no lane leaves", "Depots", "A4")),
    (
        {"Depots": [["Depot", "Available", "Charge if unsent"], ["Northgate", 120, -2], ["Quarry", 80]]},
        ("check", "credit if unsent", "Depots", "C2"),
    ),
    (
        {"Depots": [["Depot", "Available", "Must move"], ["Northgate", 120, 121], ["Quarry", 80]]},
        ("stops", "must move over available", "Depots", "C2"),
    ),
    (
        {"Depots": [["Depot", "Available", "Region"], ["Northgate", 120, "N"], ["Quarry", 80]]},
        ("note", "which column", "Depots", "C1"),
    ),
    (
        {"Depots": [["Depot", "Free tonnage"], ["Northgate", 120], ["Quarry", 80]]},
        ("stops", "no depots", "Depots", ""),
    ),
    ({"Depots": None}, ("stops", "no depots", "Depots", "")),
    ({"Customers": None}, ("stops", "no customers", "Customers", "")),
    ({"Customers": [*CUSTOMERS, ["Cole", 5]]}, ("check", "no lane reaches", "Customers", "A4")),
    ({"Customers": [*CUSTOMERS, ["Birch", None]]}, ("check", "no order", "Customers", "B4")),
    (
        {"Customers": [["Customer", "Ordered"], ["Aster", 250], ["Birch", 40]]},
        ("check", "order beyond reach", "Customers", "B2"),
    ),
    (
        {"Customers": [["Customer", "Ordered", "One depot"], ["Aster", 60, "Mill"], ["Birch", 40, None]]},
        ("stops", "unknown name", "Customers", "C2"),
    ),
    (
        {"Customers": [["Customer", "Ordered", "Smallest drop"], ["Aster", 60, None], ["Birch", 40, 50]]},
        ("check", "smallest drop over order", "Customers", "C3"),
    ),
    ({"Rates": None}, ("stops", "no rates", "Rates", "")),
    ({"Rates": [*RATES, ["Nothgate", "Aster", 3]]}, ("check", "unknown name", "Rates", "A6")),
    ({"Rates": [*RATES, ["Northgate", "Cole", 3]]}, ("check", "unknown name", "Rates", "B6")),
    ({"Rates": [*RATES, ["Northgate", "Aster", "ask"]]}, ("stops", "not a number", "Rates", "C6")),
    ({"Rates": [*RATES, ["Northgate", "Aster", None]]}, ("check", "no rate", "Rates", "C6")),
    ({"Rates": [*RATES, ["Northgate", None, 3]]}, ("stops", "no name", "Rates", "B6")),
    ({"Rates": [*RATES, ["Northgate", "Aster", 12]]}, ("check", "same lane twice", "Rates", "C6")),
    (
        {"Rates": rates(["Northgate", "Aster", 3, 20, 10], *RATES[2:], headings=["At least", "At most"])},
        ("stops", "at least over at most", "Rates", "D2"),
    ),
    (
        {"Rates": rates(["Northgate", "Aster", 3, "load"], *RATES[2:], headings=["Per"])},
        ("stops", "load size missing", "Rates", "D2"),
    ),
    (
        {"Rates": [["Depot", "Customer", "Rate EUR/load"], *RATES[1:]]},
        ("stops", "load size missing", "Rates", "C2"),
    ),
    (
        {"Rates": rates(["Northgate", "Aster", 3, 50], *RATES[2:], headings=["Trip minimum"])},
        ("stops", "load size missing", "Rates", "D2"),
    ),
    (
        {"Rates": rates(["Northgate", "Aster", -3, "load", 25], *RATES[2:], headings=["Per", "Load size"])},
        ("stops", "negative rate per load", "Rates", "C2"),
    ),
    (
        {"Rates": rates(["Northgate", "Aster", 3, "load", 0], *RATES[2:], headings=["Per", "Load size"])},
        ("stops", "load size", "Rates", "E2"),
    ),
    (
        {"Hauliers": [["Haulier", "At most"], ["Packhrose", 50]]},
        ("check", "unknown haulier", "Hauliers", "A2"),
    ),
    (
        {"Hauliers": [["Haulier", "Load size"], ["Vole", 25], ["vole", 24]]},
        ("stops", "same haulier twice", "Hauliers", "A3"),
    ),
    ({"Rules": [["Rule", "Value"], ["Days", 0]]}, ("stops", "rule", "Rules", "B2")),
    (
        {"Rates": [["Depot", "Customer", "Rate £/t"], *RATES[1:]]},
        ("stops", "column in other currency", "Rates", "C1"),
    ),
    (
        {"Rates": [["Depot", "Customer", "Rate"], ["Northgate", "Aster", "1,234"], *RATES[2:]]},
        ("check", "which mark", "Rates", "C2"),
    ),
    ({"Rules": [["Rule", "Value"], ["When short", "toss a coin"]]}, ("stops", "rule", "Rules", "B2")),
    ({"Rules": [["Rule", "Value"], ["Unit", "ton"]]}, ("stops", "unclear unit", "Rules", "B2")),
    ({"Rules": [["Rule", "Value"], ["Colour", "blue"]]}, ("check", "unknown rule", "Rules", "A2")),
]


@pytest.mark.parametrize(("changed", "finding"), FAULTS)
def test_a_fault_is_named_at_its_cell(changed, finding):
    reading = read(**changed)
    assert finding in said(reading)
    assert reading.rows_read == reading.rows_used + reading.rows_named
    assert reading.rows_named == sum(f.rows for f in reading.findings)
    assert all(f.message.endswith((".", "?")) and f.file in ("", "week.xlsx") for f in reading.findings)


def test_error_cells_and_formulas_without_a_result():
    def prepare(book):
        book["Depots"]["B2"] = "#N/A"
        book["Depots"]["B2"].data_type = "e"
        book["Rates"]["C3"] = "=C2*1.05"
        book["Rates"]["C4"] = ArrayFormula("C4", "=C2*2")
        book["Customers"]["A3"] = "#REF!"
        book["Customers"]["A3"].data_type = "e"

    reading = read_week(workbook(plain(), prepare=prepare))
    assert {
        ("stops", "error cell", "Depots", "B2"),
        ("stops", "formula without value", "Rates", "C3"),
        ("stops", "formula without value", "Rates", "C4"),
        ("stops", "error cell", "Customers", "A3"),
    } <= said(reading)
    assert reading.rows_named == 4


def test_unknown_names_wait_in_the_week_and_near_ones_are_offered():
    reading = read(Rates=[*RATES, ["Nothgate", "Aster", 3]])
    finding = next(f for f in reading.findings if f.rule == "unknown name")
    assert "Did you mean Northgate?" in finding.message
    assert finding.options == ("Northgate",)
    assert [row.depot for row in reading.week.rates][-1] == "Nothgate"
    answered = read_week(
        workbook(plain(Rates=[*RATES, ["Nothgate", "Aster", 3]])),
        answers=Answers().with_answer(finding, "Northgate"),
    )
    assert [row.depot for row in answered.week.rates][-1] == "Northgate"


def test_a_repeated_depot_is_settled_by_the_answer():
    source = workbook(plain(Depots=[*DEPOTS, ["Quarry", 5]]))
    question = next(f for f in read_week(source).findings if f.rule == "same depot twice")
    available = {
        option: read_week(source, answers=Answers().with_answer(question, option))
        .week.depots["Quarry"]
        .available
        for option in question.options
    }
    assert available == {"add up": Decimal(85), "keep the first": Decimal(80), "keep the last": Decimal(5)}


def test_a_heading_is_taught_once():
    source = workbook(
        plain(Depots=[["Depot", "Free tonnage", "Must move"], ["Northgate", 120, 1], ["Quarry", 80, 2]])
    )
    reading = read_week(source)
    question = next(f for f in reading.findings if f.rule == "missing depots")
    assert "Is it 'Free tonnage'?" in question.message
    answers = Answers().with_answer(question, "Available")
    assert read_week(source, answers=answers).week.depots["Northgate"].available == 120


def test_total_that_differs():
    reading = read(Depots=[*DEPOTS, ["Total", 210]])
    finding = next(f for f in reading.findings if f.rule == "total differs")
    assert (finding.cell, finding.severity, finding.rows) == ("A4", Severity.CHECK, 1)
    assert "210" in finding.message
    assert "200" in finding.message


def test_units_and_currency_in_headings():
    reading = read(
        Depots=[["Depot", "Available (kg)"], ["Northgate", 120000], ["Quarry", 80000]],
        Rates=[["Depot", "Customer", "Rate EUR/kg"], *[[d, c, r / 1000] for d, c, r in RATES[1:]]],
    )
    assert reading.week == PLAIN
    assert ("note", "unit converted", "Depots", "B1") in said(reading)
    assert ("note", "unit converted", "Rates", "C1") in said(reading)


def test_separate_text_files_with_decimal_comma():
    sources = [
        text_file("depots.csv", "Depot;Available\nNorthgate;120\nQuarry;80\n", "utf-8-sig"),
        text_file("orders.txt", "Customer\tOrdered\nAster\t60,0\nBirch\t40\n", "utf-16"),
        text_file(
            "rates.csv",
            "Depot;Customer;Rate\nNorthgate;Aster;12,5\nNorthgate;Birch;13\n"
            "Quarry;Aster;9,75\nQuarry;Birch;11\n",
            "cp1252",
        ),
        text_file("rules.csv", "Rule,Value\nWeek,Week 49\n"),
    ]
    reading = read_week(sources)
    assert reading.week == PLAIN
    assert reading.findings == ()
    assert reading.summary.endswith("decimal comma")


def test_a_column_without_a_settled_mark_is_asked_with_both_readings():
    source = workbook(plain(Customers=[["Customer", "Ordered"], ["Aster", "1.234"], ["Birch", 40]]))
    reading = read_week(source)
    question = next(f for f in reading.findings if f.rule == "which mark")
    assert "1.234 with a decimal point and 1234 with a decimal comma" in question.message
    assert reading.week.customers["Aster"].ordered == Decimal("1.234")
    answered = read_week(source, answers=Answers().with_answer(question, "decimal comma"))
    assert answered.week.customers["Aster"].ordered == Decimal(1234)
    assert not any(f.rule == "which mark" for f in answered.findings)


def test_a_sheet_with_send_is_never_read_as_rates():
    plan = [["Depot", "Customer", "Haulier", "Send", "Rate"], ["Northgate", "Aster", None, 60, 99]]
    reading = read(Plan=plan)
    assert reading.week == PLAIN
    assert ("note", "plan left out", "Plan", "") in said(reading)


def test_percent_as_the_sheet_shows_it():
    def prepare(book):
        book["Rates"]["D1"] = "Surcharge %"
        book["Rates"]["D2"] = 0.125
        book["Rates"]["D2"].number_format = "0.0%"

    reading = read_week(workbook(plain(), prepare=prepare))
    assert [row.surcharge for row in reading.week.rates][:2] == [Decimal("12.5"), None]


def test_many_faults_alike_are_counted_not_listed():
    rows = [*RATES, *[["Northgate", f"Customer {n}", "ask"] for n in range(500)]]
    reading = read(Rates=rows)
    alike = [f for f in reading.findings if f.rule == "not a number"]
    assert len(alike) == 21
    assert sum(f.rows for f in alike) == 500
    assert reading.rows_read == reading.rows_used + reading.rows_named
