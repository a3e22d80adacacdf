"""Layouts of the trade: hauliers side by side, quantities in pallets."""

from decimal import Decimal

import pytest

from engine.findings import Severity
from engine.intake.answers import Answers
from engine.intake.part import read_part
from engine.intake.reading import read_week
from engine.intake.side_by_side import A_HAULIER
from tests.intake.sheets import plain, workbook

SIDE_BY_SIDE = [
    ["Depot", "Customer", "Ore EUR/t", "Rate Pike", "Km"],
    ["Northgate", "Aster", 12.5, 11, 40],
    ["Northgate", "Birch", "", 13, 50],
    ["Quarry", "Aster", "x", 9, 20],
    ["Quarry", "Birch", "", "", 30],
]


def rows(reading):
    return [(r.depot, r.customer, r.haulier, r.rate, r.km) for r in reading.week.rates]


def test_a_column_for_each_haulier_is_read_as_alternatives_and_asked_about_once():
    reading = read_week(workbook(plain(Rates=SIDE_BY_SIDE)))
    assert rows(reading) == [
        ("Northgate", "Aster", "Ore", Decimal("12.5"), 40),
        ("Northgate", "Aster", "Pike", 11, 40),
        ("Northgate", "Birch", "Pike", 13, 50),
        ("Quarry", "Aster", "Pike", 9, 20),
    ]
    asked = [f for f in reading.findings if f.rule == "which column"]
    assert [(f.cell, f.severity, f.options[0]) for f in asked] == [
        ("C1", Severity.CHECK, A_HAULIER),
        ("D1", Severity.CHECK, A_HAULIER),
    ]
    assert [f.cell for f in reading.findings if f.rule == "no rate"] == ["C5"]
    answers = Answers().with_answer(asked[0], A_HAULIER).with_answer(asked[1], A_HAULIER)
    again = read_week(workbook(plain(Rates=SIDE_BY_SIDE)), answers=answers)
    assert rows(again) == rows(reading)
    assert [f.rule for f in again.findings if f.severity is Severity.CHECK] == ["no rate"]


def test_a_column_that_is_no_haulier_is_left_out_or_is_the_rate():
    reading = read_week(workbook(plain(Rates=SIDE_BY_SIDE)))
    ore, pike = (f for f in reading.findings if f.rule == "which column")
    answers = Answers().with_answer(ore, "none of these").with_answer(pike, A_HAULIER)
    one = read_week(workbook(plain(Rates=SIDE_BY_SIDE)), answers=answers)
    assert {haulier for _, _, haulier, _, _ in rows(one)} == {"Pike"}
    answers = Answers().with_answer(ore, "Rate").with_answer(pike, "none of these")
    plain_rate = read_week(workbook(plain(Rates=SIDE_BY_SIDE)), answers=answers)
    assert rows(plain_rate) == [("Northgate", "Aster", None, Decimal("12.5"), 40)]


def test_words_below_unknown_headings_make_no_hauliers():
    table = [["Depot", "Customer", "Foreman", "Gate"], ["Northgate", "Aster", "Tom", "B"]]
    reading = read_week(workbook(plain(Rates=table)))
    assert "missing rates" in [f.rule for f in reading.findings]
    assert not len(reading.week.rates)


def test_headings_of_rates_below_the_names_of_hauliers():
    table = [
        ["", "", "Ore", "", "Pike", ""],
        ["Depot", "Customer", "Rate", "Max", "Rate", "Max"],
        ["Northgate", "Aster", 12.5, 10, 11, 40],
        ["Quarry", "Birch", "", "", 13, ""],
    ]
    reading = read_week(workbook(plain(Rates=table)))
    assert [(r.depot, r.haulier, r.rate, r.at_most) for r in reading.week.rates] == [
        ("Northgate", "Ore", Decimal("12.5"), 10),
        ("Northgate", "Pike", 11, 40),
        ("Quarry", "Pike", 13, None),
    ]


def test_a_new_sheet_of_hauliers_side_by_side_alters_each_hauliers_row():
    week = read_week(workbook(plain(Rates=SIDE_BY_SIDE))).week
    dearer = [
        [*row[:2], *(c + 1 if isinstance(c, (int, float)) else c for c in row[2:4])] for row in SIDE_BY_SIDE
    ]
    part = read_part(workbook({"Rates": dearer}), week)
    assert [(change.key.haulier, change.value) for change in part.change.changes] == [
        ("Ore", Decimal("13.5")),
        ("Pike", 12),
        ("Pike", 14),
        ("Pike", 10),
    ]


def test_a_second_column_for_one_figure_is_said():
    reading = read_week(
        workbook(plain(Rates=[["Depot", "Customer", "Rate", "Price"], ["Northgate", "Aster", 4, 5]]))
    )
    assert [(f.severity, f.cell) for f in reading.findings if f.rule == "two columns"] == [
        (Severity.CHECK, "D1")
    ]


PALLETS = [["Depot", "Available (pallets)"], ["Northgate", 150], ["Quarry", 100]]


def weighed(reading):
    return [depot.available for depot in reading.week.depots.values()]


def test_what_a_pallet_weighs_is_asked_remembered_and_shown():
    asked = read_week(workbook(plain(Depots=PALLETS)))
    (question,) = (f for f in asked.findings if f.rule == "weight per pallet")
    assert (question.severity, question.cell) == (Severity.STOPS, "B1")
    with pytest.raises(ValueError, match="no weight"):
        Answers().with_answer(question, "heavy")
    answers = Answers.from_json(Answers().with_answer(question, "800 kg").as_json())
    reading = read_week(workbook(plain(Depots=PALLETS)), answers=answers)
    assert weighed(reading) == [120, 80]
    (note,) = (f for f in reading.findings if f.rule == "unit converted")
    assert "1 pallet is 0.8 t" in note.message


@pytest.mark.parametrize(
    ("rule", "value"),
    [
        ("Weight per pallet", 0.85),
        ("Weight per pallet", "850 kg"),
        ("kg per pallet", 850),
        ("Pallet weight (kg)", "850"),
    ],
)
def test_the_weight_on_rules_counts(rule, value):
    rules = [["Rule", "Value"], ["Unit", "t"], [rule, value]]
    reading = read_week(workbook(plain(Depots=PALLETS, Rules=rules)))
    assert weighed(reading) == [Decimal("127.5"), 85]
    assert not any(f.severity is Severity.STOPS for f in reading.findings)


def test_pallets_in_single_cells_and_rates_per_pallet():
    sheets = plain(
        Depots=[["Depot", "Available"], ["Northgate", "150 pallets"], ["Quarry", 80]],
        Rates=[["Depot", "Customer", "Rate EUR/pallet"], ["Northgate", "Aster", 10]],
        Rules=[["Rule", "Value"], ["Unit", "t"], ["Weight per pallet", "0.8 t"]],
    )
    reading = read_week(workbook(sheets))
    assert weighed(reading) == [120, 80]
    assert [row.rate for row in reading.week.rates] == [Decimal("12.5")]  # 10 a pallet of 0.8 t
    del sheets["Rules"][2]
    stopped = [f for f in read_week(workbook(sheets)).findings if f.rule == "weight per pallet"]
    assert {f.cell for f in stopped} == {"B2", "C1"}
