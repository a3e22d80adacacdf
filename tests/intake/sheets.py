"""Small workbooks and text files for the tests of the intake, made in memory."""

import io
import zipfile

import openpyxl


def workbook(sheets, name="week.xlsx", prepare=None):
    """(name, bytes) of a workbook with these sheets: {title: rows}; `prepare` works on it before saving."""
    book = openpyxl.Workbook()
    book.remove(book.active)
    for title, rows in sheets.items():
        sheet = book.create_sheet(title)
        for row in rows:
            sheet.append(row)
    if prepare is not None:
        prepare(book)
    stream = io.BytesIO()
    book.save(stream)
    return name, stream.getvalue()


def text_file(name, text, encoding="utf-8"):
    """(name, bytes) of a text file."""
    return name, text.encode(encoding)


def with_part(source, part, content):
    """The workbook with one part of its archive replaced; `content` is bytes or made from the old bytes."""
    name, data = source
    stream = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as new:
        for member in old.namelist():
            body = old.read(member)
            if member == part:
                body = content(body) if callable(content) else content
            new.writestr(member, body)
    return name, stream.getvalue()


DEPOTS = [["Depot", "Available"], ["Northgate", 120], ["Quarry", 80]]
CUSTOMERS = [["Customer", "Ordered"], ["Aster", 60], ["Birch", 40]]
RATES = [
    ["Depot", "Customer", "Rate"],
    ["Northgate", "Aster", 12.5],
    ["Northgate", "Birch", 13],
    ["Quarry", "Aster", 9.75],
    ["Quarry", "Birch", 11],
]
RULES = [["Rule", "Value"], ["Week", "Week 49"], ["Unit", "t"], ["Currency", "EUR"]]


def plain(**changed):
    """The sheets of a small week without a fault, some of them changed or, with None, left out."""
    sheets = {"Depots": DEPOTS, "Customers": CUSTOMERS, "Rates": RATES, "Rules": RULES, **changed}
    return {title: rows for title, rows in sheets.items() if rows is not None}


def said(reading):
    """Severity, rule, sheet and cell of all findings."""
    return {(f.severity.word, f.rule, f.sheet, f.cell) for f in reading.findings}
