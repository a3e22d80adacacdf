"""Files as desks send them, each once misread or read with a needless question."""

from decimal import Decimal

import pytest

from engine.findings import Severity
from engine.intake.answers import Answers
from engine.intake.reading import read_week
from tests.intake.sheets import CUSTOMERS, DEPOTS, plain, text_file, workbook

LANES = ["Depot", "Customer", "Rate"]


def read(prepare=None, answers=None, **sheets):
    return read_week(workbook(plain(**sheets), "week.xlsx", prepare), answers=answers)


def rates(reading):
    return [(row.depot, row.customer, row.rate) for row in reading.week.rates]


def marked(reading, rule):
    return [(f.severity.word, f.sheet, f.cell) for f in reading.findings if f.rule == rule]


def test_units_in_the_row_below_the_headings():
    stock = [
        ["Depot", "Available", "Charge if unsent"],
        ["", "kg", "EUR/t"],
        ["Northgate", 120000, 2],
        ["Quarry", 80000, 1],
    ]
    reading = read(Depots=stock)
    assert [d.available for d in reading.week.depots.values()] == [120, 80]
    assert [d.charge_if_unsent for d in reading.week.depots.values()] == [2, 1]
    assert marked(reading, "unit converted") == [("note", "Depots", "B2")]


@pytest.mark.parametrize(
    ("heading", "rate"),
    [("Rate EUR/100kg", "1.25"), ("Rate (EUR per 100 kg)", "1.25"), ("Rate (EUR per 1000 kg)", "12.5"),
     ("Rate EUR/1.000 kg", "12.5"), ("Rate EUR/25 t", "312.5"), ("Rate EUR/t", "12.5")],
)  # fmt: skip
def test_rates_per_so_many_of_a_unit(heading, rate):
    reading = read(Rates=[[*LANES[:2], heading], ["Northgate", "Aster", float(rate)]])
    assert rates(reading) == [("Northgate", "Aster", Decimal("12.5"))]


def test_thousands_of_tonnes():
    reading = read(Depots=[["Depot", "Available ('000 t)"], ["Northgate", 0.12], ["Quarry", 0.08]])
    assert [d.available for d in reading.week.depots.values()] == [120, 80]


def test_ditto_marks_stand_for_the_name_above():
    reading = read(
        Rates=[
            LANES,
            ["Northgate", "Aster", 12.5],
            ['"', "Birch", 13],
            ["Quarry", "Aster", 9],
            ["ditto", "Birch", 11],
        ],
        Customers=[["Customer", "Ordered"], ["Aster", 30], ["〃", 30], ["Birch", 40]],
    )
    assert [depot for depot, _, _ in rates(reading)] == ["Northgate", "Northgate", "Quarry", "Quarry"]
    assert [(c.name, c.ordered) for c in reading.week.customers.values()] == [("Aster", 60), ("Birch", 40)]
    assert marked(reading, "ditto") == [("note", "Customers", "A3"), ("note", "Rates", "A3")]


def test_names_left_blank_below_the_first_are_asked_about_once():
    table = [
        LANES,
        ["Northgate", "Aster", 12.5],
        ["", "Birch", 13],
        [],
        ["Quarry", "Aster", 9],
        ["", "Birch", 11],
    ]
    asked = read(Rates=table)
    assert marked(asked, "no name") == [("stops", "Rates", "A3"), ("stops", "Rates", "A6")]
    question = next(f for f in asked.findings if f.rule == "no name")
    answers = Answers().with_answer(question, question.options[0])
    reading = read(Rates=table, answers=answers)
    assert [depot for depot, _, _ in rates(reading)] == ["Northgate", "Northgate", "Quarry", "Quarry"]
    assert not marked(reading, "no name")


@pytest.mark.parametrize("title", ["Distances", "Km", "Transit time", "Shipped last week"])
def test_a_grid_of_something_else_is_not_read_as_rates(title):
    grid = [["", "Aster", "Birch"], ["Northgate", 120, 130], ["Quarry", 50, 60]]
    reading = read(**{title: grid})
    assert [rate for _, _, rate in rates(reading)] == [Decimal("12.5"), 13, Decimal("9.75"), 11]
    assert marked(reading, "no rates in the grid") == [("check", title, "A1")]
    assert reading.rows_read == reading.rows_used + reading.rows_named


def test_a_list_of_distances_is_not_read_as_rates():
    reading = read(Rates=[["Depot", "Customer", "Km"], ["Northgate", "Aster", 120]])
    assert rates(reading) == []
    assert marked(reading, "missing rates") == [("stops", "Rates", "A1")]


def test_a_comma_inside_a_figure_of_a_comma_file_stops():
    reading = read_week([text_file("d.csv", "Depot,Available\nNorthgate,1,5\nQuarry,80\n")])
    assert marked(reading, "too many cells") == [("stops", "d", "C2")]
    notes = read_week([text_file("d.csv", "Depot,Available\nNorthgate,15,call Tom\nQuarry,80\n")])
    assert marked(notes, "too many cells") == []


def test_hidden_columns_are_read_and_said():
    def hide(book):
        book["Rates"].column_dimensions["C"].hidden = True

    assert marked(read(hide), "hidden columns") == [("note", "Rates", "C1")]


def test_subtotals_of_regions_are_compared_with_their_own_rows():
    rows = [
        CUSTOMERS[0],
        ["Aster", 60],
        ["Subtotal North", 60],
        ["Birch", 40],
        ["Subtotal South", 40],
        ["Total", 100],
    ]
    assert not marked(read(Customers=rows), "total differs")
    rows[4][1] = 41
    assert marked(read(Customers=rows), "total differs") == [("check", "Customers", "A5")]


def test_a_letter_among_digits_is_pointed_at():
    reading = read(Depots=[DEPOTS[0], ["Northgate", "12O"], ["Quarry", "8l.5"]])
    found = [f for f in reading.findings if f.rule == "not a number"]
    assert [(f.severity, f.mend) for f in found] == [
        (Severity.STOPS, "Is 120 meant?"),
        (Severity.STOPS, "Is 81.5 meant?"),
    ]


def test_a_column_that_says_cancelled_is_asked_about():
    reading = read(
        Customers=[["Customer", "Ordered", "Status"], ["Aster", 60, "cancelled"], ["Birch", 40, "ok"]]
    )
    assert marked(reading, "which column") == [("check", "Customers", "C1")]


def test_headings_repeated_on_each_page_and_minus_behind():
    rows = [CUSTOMERS[0], ["Aster", 60], [], ["Orders of week 49"], CUSTOMERS[0], ["Birch", 40]]
    stock = [["Depot", "Available", "Charge if unsent"], ["Northgate", "120", "2.50-"], ["Quarry", "80-", 1]]
    reading = read(Customers=rows, Depots=stock)
    assert [(c.name, c.ordered) for c in reading.week.customers.values()] == [("Aster", 60), ("Birch", 40)]
    assert reading.week.depots["Northgate"].charge_if_unsent == Decimal("-2.5")
    assert marked(reading, "negative") == [("stops", "Depots", "B3")]


@pytest.mark.parametrize("encoding", ["utf-16-le", "utf-16-be"])
def test_utf_16_without_a_mark(encoding):
    text = 'Depot;Available\n"Müh\nle";120,5\n"The ""Mill""";1.040\n'
    reading = read_week([("d.csv", text.encode(encoding))])
    assert {d.name: d.available for d in reading.week.depots.values()} == {
        "Müh le": Decimal("120.5"),
        'The "Mill"': 1040,
    }
