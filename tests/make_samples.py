"""Makes the sample files again, byte for byte: `python -m tests.make_samples FOLDER`.

Members of a workbook are stored, not deflated: deflate streams differ between zlib builds, stored bytes
do not. Every member is written in canonical XML, because openpyxl writes the same sheet a little
differently with lxml and without. Document properties and zip times are fixed.
"""

import csv
import sys
import xml.etree.ElementTree as ElementTree
from collections.abc import Iterable, Sequence
from copy import deepcopy
from decimal import Decimal
from io import BytesIO
from pathlib import Path
from typing import Any
from zipfile import ZIP_STORED, ZipFile, ZipInfo

from openpyxl import Workbook
from openpyxl.styles import Alignment, Font, PatternFill
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from tests.sample_loads import HAULIERS, loads_week
from tests.sample_trade import Figures, Row, large_week, small_week

DEPOT_HEADINGS = (
    "Depot",
    "Available",
    "Must move",
    "Charge if unsent",
    "Loads a day",
    "Latitude",
    "Longitude",
)
CUSTOMER_HEADINGS = (
    "Customer", "Ordered", "Charge if short", "Priority", "One depot", "Order number", "Day",
    "Latitude", "Longitude",
)  # fmt: skip
RATE_HEADINGS = ("Depot", "Customer", "Rate", "Haulier", "At least", "At most", "Closed", "Surcharge %", "Km")
RULE_HEADINGS = ("Rule", "Value")

FORMATS = {
    "Rate": "0.00", "Charge if short": "0.00", "Charge if unsent": "0.00", "Surcharge %": "0.0",
    "Latitude": "0.0000", "Longitude": "0.0000",
}  # fmt: skip

CORE_PROPERTIES = (
    '<cp:coreProperties xmlns:cp="http://schemas.openxmlformats.org/package/2006/metadata/core-properties"'
    ' xmlns:dc="http://purl.org/dc/elements/1.1/" xmlns:dcterms="http://purl.org/dc/terms/"'
    ' xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"><dc:creator>Hithe sample data</dc:creator>'
    '<dcterms:created xsi:type="dcterms:W3CDTF">2026-02-02T08:00:00Z</dcterms:created>'
    '<dcterms:modified xsi:type="dcterms:W3CDTF">2026-02-02T08:00:00Z</dcterms:modified></cp:coreProperties>'
)
APP_PROPERTIES = (
    '<Properties xmlns="http://schemas.openxmlformats.org/officeDocument/2006/extended-properties">'
    "<Application>Hithe sample data</Application></Properties>"
)
FIXED_MEMBERS = {"docProps/core.xml": CORE_PROPERTIES, "docProps/app.xml": APP_PROPERTIES}


def main(folder: Path) -> None:
    """Writes all sample files into a folder."""
    folder.mkdir(parents=True, exist_ok=True)
    small = small_week()
    write(folder / "small_week.xlsx", as_lists(small))
    write(folder / "small_week_grid.xlsx", as_grid(small))
    write(folder / "week_before.xlsx", as_lists(small_week(before=True)))
    write(folder / "large_week.xlsx", as_lists(large_week()))
    write(folder / "messy_week.xlsx", messy(small))
    write(folder / "loads_week.xlsx", of_loads())
    write_csv(folder / "small_week_depots.csv", DEPOT_HEADINGS, small.depots)
    write_csv(folder / "small_week_customers.csv", CUSTOMER_HEADINGS, small.customers)
    write_csv(folder / "small_week_rates.csv", RATE_HEADINGS, small.rates)
    write_csv(folder / "small_week_rules.csv", RULE_HEADINGS, small.rules)


def as_lists(figures: Figures) -> Workbook:
    """The usual workbook: four sheets, one row a rate."""
    book = Workbook()
    book.remove(book.worksheets[0])
    table(book.create_sheet("Depots"), DEPOT_HEADINGS, figures.depots)
    table(book.create_sheet("Customers"), CUSTOMER_HEADINGS, figures.customers)
    table(book.create_sheet("Rates"), RATE_HEADINGS, figures.rates)
    table(book.create_sheet("Rules"), RULE_HEADINGS, figures.rules)
    return book


def of_loads() -> Workbook:
    """The week of whole loads, with the columns and the sheet that only it needs."""
    week, book = loads_week(), Workbook()
    book.remove(book.worksheets[0])
    depots = [*DEPOT_HEADINGS[:5], "Opening charge", *DEPOT_HEADINGS[5:]]
    customers = [*CUSTOMER_HEADINGS[:5], "Smallest drop", *CUSTOMER_HEADINGS[5:]]
    rates = [*RATE_HEADINGS[:3], "Per", *RATE_HEADINGS[3:], "Load size", "Trip minimum", "Charge per use"]
    table(book.create_sheet("Depots"), depots, week.depots)
    table(book.create_sheet("Customers"), customers, week.customers)
    table(book.create_sheet("Rates"), rates, week.rates)
    table(book.create_sheet("Hauliers"), ("Haulier", "At most", "Load size"), HAULIERS)
    table(book.create_sheet("Rules"), RULE_HEADINGS, week.rules)
    return book


def as_grid(figures: Figures) -> Workbook:
    """The same week with the lowest open rate of each lane in a grid, "-" where there is no lane."""
    book = as_lists(figures)
    place = book.sheetnames.index("Rates")
    book.remove(book["Rates"])
    sheet = book.create_sheet("Rates", place)
    lowest: dict[tuple[str, str], Decimal] = {}
    for row in figures.rates:
        if not row.get("Closed"):
            lane = (row["Depot"], row["Customer"])
            lowest[lane] = min(row["Rate"], lowest.get(lane, row["Rate"]))
    customers = list(dict.fromkeys(row["Customer"] for row in figures.customers))
    headings = ("Depot", *customers)
    rows = [
        {"Depot": depot, **{customer: lowest.get((depot, customer), "-") for customer in customers}}
        for depot in (row["Depot"] for row in figures.depots)
    ]
    table(sheet, headings, rows, formats=dict.fromkeys(customers, "0.00"))
    return book


def messy(small: Figures) -> Workbook:
    """Twelve stores and four depots, as a hurried desk sends them (`test_samples.py` lists the faults)."""
    week = deepcopy(small)
    depots = [row for row in week.depots if row["Depot"] in ("Northgate", "Quarry", "Railhead", "Upland")]
    stores = list(dict.fromkeys(row["Customer"] for row in week.customers))[:12]
    customers = [row for row in week.customers if row["Customer"] in stores]
    names = {row["Depot"] for row in depots}
    rates = [row for row in week.rates if row["Depot"] in names and row["Customer"] in stores]
    rates = [row for row in rates if row["Customer"] not in ("Burdock", "Cole")]

    depots[1]["Available"] = "about 700"
    depots[3]["Available"] = f"{depots[3]['Available']} t"
    customers[2]["Ordered"] = "tbc"
    customers[5]["Ordered"] = -customers[5]["Ordered"]
    customers[8]["Customer"] = "  " + customers[8]["Customer"].upper() + " "
    rates[3]["Rate"] = str(rates[3]["Rate"]).replace(".", ",")
    rates[6]["Depot"] = "Nortgate"
    rates[9]["Customer"] = "Ironworks"
    rates[14]["Rate"] = "#N/A"
    rates[17]["Rate"] = "ask"
    rates[21]["At most"] = Decimal(-28)
    total = {"Customer": "Total", "Ordered": sum(r["Ordered"] for r in customers if r["Ordered"] != "tbc")}
    blank: Row = {}

    book = Workbook()
    book.remove(book.worksheets[0])
    notes = book.create_sheet("Read me")
    notes["A1"] = "Salt week 6, figures as of Friday evening. Railhead may change on Monday!"
    table(book.create_sheet("Stock"), DEPOT_HEADINGS, depots, title=("Stock for week 6", None))
    table(
        book.create_sheet("Orders"), CUSTOMER_HEADINGS, [*customers[:7], blank, *customers[7:], blank, total],
        title=("Orders, week 6", "all quantities in tonnes", None),
    )  # fmt: skip
    table(book.create_sheet("Haulage"), RATE_HEADINGS, [*rates[:12], blank, blank, *rates[12:]])
    table(book.create_sheet("Rules"), RULE_HEADINGS, week.rules)
    return book


def table(sheet: Worksheet, headings: Sequence[str], rows: Iterable[Row], title: Sequence[str | None] = (),
          formats: dict[str, str] | None = None) -> None:  # fmt: skip
    """Fills a sheet: title rows, headings, then the rows."""
    for number, text in enumerate(title, 1):
        sheet.cell(number, 1, text).font = Font(bold=True, size=13)
    top = len(title) + 1
    for column, heading in enumerate(headings, 1):
        cell = sheet.cell(top, column, heading)
        cell.font = Font(bold=True, color="FFFFFF")
        cell.fill = PatternFill("solid", fgColor="1F5A66")
        cell.alignment = Alignment(vertical="center")
        sheet.column_dimensions[get_column_letter(column)].width = max(10, len(heading) + 3)
    sheet.column_dimensions["A"].width = 18
    sheet.freeze_panes = sheet.cell(top + 1, 2)
    shown = FORMATS if formats is None else formats
    for number, row in enumerate(rows, top + 1):
        for column, heading in enumerate(headings, 1):
            value = row.get(heading)
            if value is not None:
                cell = sheet.cell(number, column, value)
                if heading in shown and isinstance(value, Decimal):
                    cell.number_format = shown[heading]


def write(path: Path, book: Workbook) -> None:
    """Saves a workbook so that the same cells always give the same bytes."""
    buffer = BytesIO()
    book.save(buffer)
    with ZipFile(buffer) as saved, ZipFile(path, "w", ZIP_STORED) as made:
        for name in sorted(saved.namelist(), key=lambda name: (name != "[Content_Types].xml", name)):
            member = ZipInfo(name, date_time=(2026, 2, 2, 8, 0, 0))
            member.create_system = 3
            member.external_attr = 0o644 << 16
            made.writestr(member, FIXED_MEMBERS.get(name) or canonical(saved.read(name)))


def canonical(xml: bytes) -> str:
    """The XML in canonical form (C14N 2.0)."""
    return ElementTree.canonicalize(xml.decode("utf-8"))


def write_csv(path: Path, headings: Sequence[str], rows: Iterable[Row]) -> None:
    """Saves rows as comma-separated text, in UTF-8, with plain line ends."""
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(headings)
        for row in rows:
            writer.writerow([plain(row.get(heading)) for heading in headings])


def plain(value: Any) -> str:
    return "" if value is None else str(value)


if __name__ == "__main__":
    if len(sys.argv) != 2:
        sys.exit("usage: python -m tests.make_samples FOLDER")
    main(Path(sys.argv[1]))
