"""Workbooks of every kind give the same week, and an error in a cell is never read as blank."""

import contextlib
import io
import zipfile
from decimal import Decimal
from pathlib import Path

import pytest

from engine.intake.cells import read_sheets
from engine.intake.reading import read_week
from engine.intake.refusal import Unreadable
from tests.intake.books import ods, xlsb
from tests.intake.sheets import CUSTOMERS, DEPOTS, RATES, plain, said, workbook

FILES = Path(__file__).resolve().parent / "files"
WRITERS = {"xlsx": workbook, "ods": ods, "xlsb": xlsb}


@pytest.mark.parametrize("kind", WRITERS)
def test_one_week_in_every_format(kind):
    reading = read_week(WRITERS[kind](plain()))
    assert reading.week == read_week(workbook(plain())).week
    assert reading.findings == ()


@pytest.mark.parametrize("kind", ["ods", "xlsb"])
@pytest.mark.parametrize("error", ["#N/A", "#DIV/0!", "#REF!"])
def test_error_cells(kind, error):
    reading = read_week(WRITERS[kind](plain(Rates=[*RATES, ["Quarry", "Aster", error]])))
    (finding,) = [f for f in reading.findings if f.rule == "error cell"]
    assert (finding.sheet, finding.cell, finding.read) == ("Rates", "C6", error)


@pytest.mark.parametrize("name", ["errors.ods", "errors.xls"])
def test_files_saved_by_a_spreadsheet_program(name):
    """Made with LibreOffice 7: errors in Rates C3 and C4, 12.5 % in D2, row 4 and sheet Customers hidden."""
    reading = read_week(FILES / name)
    assert {
        ("stops", "error cell", "Rates", "C3"),
        ("stops", "error cell", "Rates", "C4"),
        ("note", "hidden sheet", "Customers", ""),
        ("note", "hidden rows", "Rates", "A4"),
    } <= said(reading)
    assert next(str(row.surcharge) for row in reading.week.rates) == "12.5"
    assert str(next(iter(reading.week.rates)).valid_from) == "2026-03-31"


def test_a_cell_repeated_over_the_whole_sheet_is_refused():
    name, data = ods(plain())
    content = (
        '<table:table-cell table:number-columns-repeated="16384" office:value-type="float" office:value="1"/>'
    )

    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as new:
        for part in old.namelist():
            body = old.read(part).decode()
            row = f'<table:table-row table:number-rows-repeated="1000000">{content}</table:table-row>'
            new.writestr(part, body.replace("</table:table>", f"{row}</table:table>", 1))
    with pytest.raises(Unreadable, match="used area"):
        read_week((name, stream.getvalue()))


@pytest.mark.parametrize("name", ["errors.ods", "errors.xls"])
def test_broken_off_anywhere_is_refused_or_read(name):
    data = (FILES / name).read_bytes()
    for length in range(0, len(data), 257):
        with contextlib.suppress(Unreadable):
            read_sheets((name, data[:length]))


def test_several_files_and_formats_at_once():
    sources = [
        ods({"S": DEPOTS}, "depots.ods"),
        xlsb({"S": CUSTOMERS}, "orders.xlsb"),
        workbook({"S": RATES}, "rates.xlsx"),
    ]
    week = read_week(sources).week
    assert (len(week.depots), len(week.customers), len(week.rates)) == (2, 2, 4)


def test_percent_formats_of_a_binary_workbook():
    table = [["Depot", "Customer", "Rate", "Surcharge %"]]
    table += [["Northgate", "Aster", 12.5, (0.125, 1)], ["Northgate", "Birch", 13, (0.04, 2)]]
    table += [["Quarry", "Aster", 9, (4, 3)], ["Quarry", "Birch", 11, 5]]
    sheets = {"Depots": DEPOTS, "Customers": CUSTOMERS, "Rates": table}
    reading = read_week(xlsb(sheets))
    assert [row.surcharge for row in reading.week.rates] == [Decimal("12.5"), 4, 4, 5]
