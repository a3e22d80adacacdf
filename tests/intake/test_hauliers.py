"""The sheet of hauliers: known by its headings, never taken for rates, read in part, edited in its grid."""

from dataclasses import replace
from decimal import Decimal
from io import BytesIO

import openpyxl
import pytest

from engine.changes import Add, Alter, Remove, Together
from engine.figures import Haulier
from engine.intake.frames import changes_between, frame_of
from engine.intake.part import read_part
from engine.intake.reading import Reading, read_week
from engine.touch import touch_each_other
from engine.week import Refused, Week
from tests.intake.sheets import CUSTOMERS, DEPOTS

D = Decimal

RATES = [
    ["Depot", "Customer", "Rate", "Haulier"],
    ["Northgate", "Aster", 7, "Packhorse"],
    ["Quarry", "Birch", 8, "Vole"],
]


def reading(rows: list[list[object]], **more: list[list[object]]) -> Reading:
    """A week with its hauliers on a sheet of any name, below a title."""
    book = openpyxl.Workbook()
    book.remove(book.active)
    tables = {
        "Depots": DEPOTS,
        "Customers": CUSTOMERS,
        "Rates": RATES,
        "Fleet": rows,
        **more,
    }
    for name, cells in tables.items():
        sheet = book.create_sheet(name)
        for row in cells:
            sheet.append(row)
    held = BytesIO()
    book.save(held)
    return read_week(("week.xlsx", held.getvalue()))


@pytest.mark.parametrize(
    "headings",
    [
        ["Haulier", "At most", "Load size"],
        ["Carrier", "Weekly limit (t)", "Payload"],
        ["Haulage company", "Capacity", "Truck size"],
    ],
)
def test_a_list_of_hauliers_is_known_by_its_headings(headings: list[object]) -> None:
    read = reading([["Who carries what"], headings, ["Packhorse", 120, 24], ["VOLE", None, 27]])
    assert list(read.week.hauliers.values()) == [
        Haulier("Packhorse", D(120), D(24)),
        Haulier("Vole", None, D(27)),  # spelled as on the rates
    ]
    assert not [f for f in read.findings if f.rule not in ("no rules", "unit told")]


def test_kilograms_become_the_week_s_unit() -> None:
    read = reading([["Haulier", "At most (kg)"], ["Vole", 24500]], Rules=[["Rule", "Value"], ["Unit", "t"]])
    assert read.week.hauliers["Vole"].at_most == D("24.5")


def test_rates_without_their_rate_are_no_hauliers() -> None:
    """Depot, Customer, Haulier and Load size name lanes, whatever is missing."""
    read = reading([["Depot", "Customer", "Haulier", "Load size"], ["Quarry", "Aster", "Vole", 24]])
    assert not read.week.hauliers
    assert "missing rates" in {f.rule for f in read.findings} or read.week.rates


def test_a_cell_that_cannot_be_read_stops_and_keeps_the_rest() -> None:
    read = reading([["Haulier", "At most", "Load size"], ["Vole", "plenty", 24]])
    assert read.week.hauliers["Vole"] == Haulier("Vole", None, D(24))
    (found,) = [f for f in read.findings if f.rule == "not a number"]
    assert (found.sheet, found.cell) == ("Fleet", "B2")
    assert [(one.table, one.key, dict(one.texts)) for one in read.unused] == [
        ("hauliers", "Vole", {"at_most": "plenty"})
    ]


def week() -> Week:
    return reading([["Haulier", "At most", "Load size"], ["Packhorse", 120, 24], ["Vole", None, 27]]).week


def test_part_of_the_hauliers_is_one_change() -> None:
    book = openpyxl.Workbook()
    for row in (["Haulier", "At most"], ["vole", 80], ["Otter", 5]):
        book.active.append(row)
    held = BytesIO()
    book.save(held)
    part = read_part(("fleet.xlsx", held.getvalue()), week())
    assert part.change.changes == (Alter("haulier", "Vole", "at_most", D(80)), Add(Haulier("Otter", D(5))))
    assert part.differences == (
        "Vole: At most blank becomes 80.",
        "Otter is new.",
        "1 haulier is not in the upload and stays as it is.",
    )


def test_the_grid_of_hauliers_becomes_changes() -> None:
    now = week()
    before = frame_of(now, "hauliers")
    after = before.copy()
    after.loc[0, "At most"] = "100,5"
    after.loc[1, "Haulier"] = "Otter"
    after.loc[2] = ["Teal", "", "20"]
    style = replace(reading([["Haulier", "At most"], ["Vole", 1]]).style, decimal_mark=",")
    changes, problems = changes_between(now, "hauliers", before, after, style)
    assert not problems
    assert list(now.apply(Together(tuple(changes))).hauliers.values()) == [
        Haulier("Packhorse", D("100.5"), D(24)),
        Haulier("Otter", None, D(27)),
        Haulier("Teal", None, D(20)),
    ]


def test_changes_of_hauliers_are_undone_and_touch_only_their_own() -> None:
    now = week()
    for change in (
        Add(Haulier("Otter"), 0),
        Remove("haulier", "Packhorse"),
        Alter("haulier", "Vole", "load_size", None),
    ):
        assert now.apply(change).apply(now.inverse(change)) == now
    first = Alter("haulier", "Vole", "at_most", D(1))
    assert touch_each_other(first, Remove("haulier", "Vole"))
    assert not touch_each_other(first, Alter("haulier", "Vole", "load_size", D(1)))
    assert not touch_each_other(first, Alter("haulier", "Packhorse", "at_most", D(1)))
    with pytest.raises(Refused, match="no figure called 'name'"):
        now.apply(Alter("haulier", "Vole", "name", "Otter"))
