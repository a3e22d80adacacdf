"""What a person typed never becomes a formula, a code or a broken file."""

import csv
import re
import zipfile
from io import BytesIO
from pathlib import Path
from xml.etree import ElementTree

import openpyxl

from engine.planning.plan import Plan
from engine.report.plan_csv import write_plan_csv
from engine.report.text import cell_text
from tests.report.libreoffice import calculated
from tests.report.weeks import HARM

OURS = re.compile(
    r"[A-Z]+\(|\$?[A-Z]{1,3}\$?\d+|\d+(\.\d+)?|TRUE|FALSE|[-+*/<>=,:()!]|"
    r"'Rates \d+'|Plan|Costs|Depots|Customers|Rates|Rules|\"[^\"]*\"|\s"
)
"""What our own formulas are made of."""

OUR_WORDS = {
    '""', '"yes"', '"NO"', '"<>0"', '"No lane can improve this plan"',
    '"Warning: these figures no longer prove the plan, see the checks marked NO"',
}  # fmt: skip


def test_every_typed_text_is_a_text_cell(harmful_file: Path) -> None:
    book = openpyxl.load_workbook(harmful_file)
    seen = set()
    typed = {cell_text(text) for text in HARM}
    for sheet in book:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.value in typed:
                    assert cell.data_type == "s", f"{sheet.title} {cell.coordinate}"
                    seen.add((sheet.title, cell.value))
                    if str(cell.value)[0] in "=+-@\t\n":
                        assert cell.quotePrefix, f"{sheet.title} {cell.coordinate} would turn when edited"
    for sheet in ("Plan", "By customer", "Values", "Proof", "Depots", "Customers", "Rates"):
        assert {text for title, text in seen if title == sheet} == typed, sheet


def test_formulas_hold_nothing_that_was_typed(harmful_file: Path) -> None:
    book = openpyxl.load_workbook(harmful_file)
    formulas = [c.value for sheet in book for row in sheet.iter_rows() for c in row if c.data_type == "f"]
    assert formulas
    for formula in formulas:
        assert OURS.sub("", formula.removeprefix("=")) == "", formula
        assert set(re.findall(r'"[^"]*"', formula)) <= OUR_WORDS


def test_the_parts_are_well_formed_and_headers_have_no_codes(harmful_file: Path) -> None:
    with zipfile.ZipFile(harmful_file) as archive:
        assert archive.testzip() is None
        for name in archive.namelist():
            if name.endswith((".xml", ".rels")):
                ElementTree.fromstring(archive.read(name))
        sheet = archive.read("xl/worksheets/sheet1.xml").decode()
    header = ElementTree.fromstring(sheet).find(".//{*}oddHeader")
    assert header is not None
    assert "=WEEK() (=t, EUR)" in str(header.text)


def test_a_spreadsheet_program_shows_the_texts_as_they_are(harmful_file: Path, tmp_path: Path) -> None:
    book = calculated([harmful_file], tmp_path)["plan.xlsx"]
    typed = {cell_text(text) for text in HARM}
    shown = {row[0] for row in book["Depots"].iter_rows(min_row=2, max_col=1, values_only=True)}
    # LibreOffice takes _xHHHH_ in a cell for an escaped character (ECMA-376, 22.9.2.19), as others do
    assert {text for text in typed if not text.startswith("_x")} <= shown
    assert book["Proof"]["B3"].value == "No lane can improve this plan"


def test_the_csv_file_has_no_formulas(harmful: Plan) -> None:
    held = BytesIO()
    write_plan_csv(harmful, held)
    text = held.getvalue().decode("utf-8-sig")
    rows = list(csv.reader(text.splitlines(keepends=True)))
    assert len(rows) == 1 + len(harmful.shipments)
    columns = {heading: place for place, heading in enumerate(rows[0])}
    for row in rows[1:]:
        for heading in ("Depot", "Customer", "Haulier", "Unit", "Hold reason", "Order numbers", "Days"):
            assert not row[columns[heading]].lstrip(" ").startswith(("=", "+", "-", "@", "\t", "\r"))
