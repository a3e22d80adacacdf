"""The sample files are made again byte for byte, and are what they are said to be."""

import csv
import subprocess
import sys
from pathlib import Path

import numpy as np
import openpyxl
import pytest
from scipy.optimize import linprog
from scipy.sparse import coo_array

import sample_data

ROOT = Path(__file__).resolve().parent.parent

FAULTS = (
    ("Stock", "B5", "about 700", "text where a number belongs"),
    ("Stock", "B7", "540 t", "a number with its unit typed behind it"),
    ("Orders", "B7", "tbc", "text where a number belongs"),
    ("Orders", "B10", -61, "negative quantity"),
    ("Orders", "A14", "  BRACKEN ", "the name of Bracken in capitals, with blanks around it"),
    ("Orders", "A17", "Burdock", "a customer that no lane reaches"),
    ("Orders", "A21", "Cole", "a customer that no lane reaches"),
    ("Orders", "A25", "Total", "a row of totals"),
    ("Haulage", "C5", "14,31", "a number kept as text, with a decimal comma"),
    ("Haulage", "A8", "Nortgate", "a near miss: Northgate"),
    ("Haulage", "B11", "Ironworks", "a customer that is on no other sheet"),
    ("Haulage", "C18", "#N/A", "a formula error"),
    ("Haulage", "C21", "ask", "text where a rate belongs"),
    ("Haulage", "F25", -28, "negative limit"),
)
"""Each fault of the messy week: sheet, cell, what stands there, what is wrong."""


def rows(name, sheet):
    values = openpyxl.load_workbook(sample_data.path(name), read_only=True)[sheet].iter_rows(values_only=True)
    headings = next(values)
    return [dict(zip(headings, row, strict=True)) for row in values]


def ordered(name):
    totals = {}
    for row in rows(name, "Customers"):
        totals[row["Customer"]] = totals.get(row["Customer"], 0) + row["Ordered"]
    return totals


def least_short(name):
    """The least that can stay undelivered, and the sum of orders (scipy's HiGHS, not our own solver)."""
    supply = {row["Depot"]: row["Available"] for row in rows(name, "Depots")}
    demand = ordered(name)
    tied = {row["Customer"]: row["One depot"] for row in rows(name, "Customers") if row["One depot"]}
    rates = [
        row for row in rows(name, "Rates")
        if not row["Closed"] and tied.get(row["Customer"], row["Depot"]) == row["Depot"]
    ]  # fmt: skip
    depots, customers = list(supply), list(demand)
    count = len(rates)
    line = [depots.index(row["Depot"]) for row in rates]
    line += [len(depots) + customers.index(row["Customer"]) for row in rates]
    sums = coo_array((np.ones(2 * count), (line, [*range(count), *range(count)])))
    answer = linprog(
        -np.ones(count),
        A_ub=sums.tocsr(),
        b_ub=[*supply.values(), *demand.values()],
        bounds=[(row["At least"] or 0, row["At most"]) for row in rates],
        method="highs",
    )
    assert answer.status == 0
    return sum(demand.values()) + answer.fun, sum(demand.values())


def test_samples_are_made_again_byte_for_byte(tmp_path):
    subprocess.run([sys.executable, "-m", "tests.make_samples", str(tmp_path)], cwd=ROOT, check=True)
    made = {file.name: file.read_bytes() for file in tmp_path.iterdir()}
    assert sorted(made) == sample_data.names()
    for name, content in made.items():
        assert content == sample_data.path(name).read_bytes(), (
            f"{name} is not what tests/make_samples.py makes: run 'python -m tests.make_samples sample_data'"
            " and look at the difference before keeping it"
        )


def test_a_missing_sample_is_named():
    with pytest.raises(FileNotFoundError, match=r"no sample 'other\.xlsx'.*small_week\.xlsx"):
        sample_data.path("other.xlsx")


@pytest.mark.parametrize(
    ("name", "depots", "customers"),
    [("small_week.xlsx", 6, 48), ("week_before.xlsx", 6, 48), ("large_week.xlsx", 20, 500)],
)
def test_sizes(name, depots, customers):
    assert len(rows(name, "Depots")) == depots
    assert len(ordered(name)) == customers
    known = {row["Depot"] for row in rows(name, "Depots")}, set(ordered(name))
    assert all(row["Depot"] in known[0] and row["Customer"] in known[1] for row in rows(name, "Rates"))


def test_small_week_is_short_of_stock_and_of_lanes():
    rates = rows("small_week.xlsx", "Rates")
    assert {row["Haulier"] for row in rates} == {"Oxcart", "Drayman", "Packhorse"}
    assert 220 <= len({(row["Depot"], row["Customer"]) for row in rates}) <= 240
    assert sum(row["Closed"] == "yes" for row in rates) > 3
    assert sum(row["At most"] is not None for row in rates) > 10
    assert sum(row["At least"] is not None for row in rates) == 2
    short, total = least_short("small_week.xlsx")
    stock = sum(row["Available"] for row in rows("small_week.xlsx", "Depots"))
    assert short >= total - stock > 0
    to_cole = sum(row["At most"] for row in rates if row["Customer"] == "Cole" and not row["Closed"])
    assert to_cole < ordered("small_week.xlsx")["Cole"]


def test_stock_would_do_in_the_other_weeks_but_for_lanes():
    for name in ("week_before.xlsx", "large_week.xlsx"):
        short, total = least_short(name)
        assert total < sum(row["Available"] for row in rows(name, "Depots"))
        assert 0 <= short < total / 20


def test_two_weeks_of_one_desk():
    now, before = (rows(name, "Customers") for name in ("small_week.xlsx", "week_before.xlsx"))
    assert {(r["Customer"], r["Latitude"]) for r in now} == {(r["Customer"], r["Latitude"]) for r in before}
    assert ordered("small_week.xlsx") != ordered("week_before.xlsx")
    pairs = list(zip(rows("small_week.xlsx", "Rates"), rows("week_before.xlsx", "Rates"), strict=True))
    moved = [pair for pair in pairs if pair[0] != pair[1]]
    assert 10 < len(moved) < len(pairs) / 4
    assert all(now["Rate"] > before["Rate"] and now["Haulier"] == "Drayman" for now, before in moved)


def test_grid_holds_the_lowest_open_rate_of_each_lane():
    lowest = {}
    for row in rows("small_week.xlsx", "Rates"):
        if not row["Closed"]:
            lane = row["Depot"], row["Customer"]
            lowest[lane] = min(row["Rate"], lowest.get(lane, row["Rate"]))
    grid = {
        (row["Depot"], customer): rate
        for row in rows("small_week_grid.xlsx", "Rates")
        for customer, rate in row.items()
        if customer != "Depot" and rate != "-"
    }
    assert grid == lowest


def test_csv_files_say_what_the_workbook_says():
    for sheet in ("Depots", "Customers", "Rates", "Rules"):
        with sample_data.path(f"small_week_{sheet.lower()}.csv").open(encoding="utf-8", newline="") as file:
            texts = list(csv.DictReader(file))
        cells = rows("small_week.xlsx", sheet)
        assert len(texts) == len(cells)
        for text, cell in zip(texts, cells, strict=True):
            assert [same(text[heading], value) for heading, value in cell.items()] == [True] * len(cell)


def same(text, value):
    return text == "" if value is None else text == value if isinstance(value, str) else float(text) == value


def test_messy_week_has_its_faults():
    book = openpyxl.load_workbook(sample_data.path("messy_week.xlsx"))
    found = [(sheet, cell, book[sheet][cell].value) for sheet, cell, _, _ in FAULTS]
    assert found == [fault[:3] for fault in FAULTS]
    reached = {row[0].value for row in book["Haulage"].iter_rows(min_row=2, min_col=2, max_col=2)}
    assert not {"Burdock", "Cole"} & reached
    assert book["Orders"]["A1"].value == "Orders, week 6"
    assert all(cell.value is None for cell in book["Orders"][12])
