"""The blank workbook: the five sheets with their headings, an explanation at each, and nothing else."""

import os
from typing import BinaryIO

from openpyxl import Workbook
from openpyxl.comments import Comment
from openpyxl.styles import Alignment, Font, PatternFill
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from engine.columns import (
    CUSTOMER_COLUMNS,
    DEPOT_COLUMNS,
    HAULIER_COLUMNS,
    RATE_COLUMNS,
    RULE_COLUMNS,
    Column,
)
from engine.figures import Rules
from engine.intake.fields import show_field

_NEEDED = PatternFill("solid", start_color="1F3A4D")
_OPTIONAL = PatternFill("solid", start_color="DDE6EA")


def write_blank(target: str | os.PathLike[str] | BinaryIO) -> None:
    """Write the blank workbook: Depots, Customers, Rates, Hauliers, Rules; headings explained in comments.

    target: a path, or a file open for writing bytes

    Raises:
        OSError: the path cannot be written.
    """
    book = Workbook()
    for sheet in book.worksheets:
        book.remove(sheet)
    for title, columns in (
        ("Depots", DEPOT_COLUMNS),
        ("Customers", CUSTOMER_COLUMNS),
        ("Rates", RATE_COLUMNS),
        ("Hauliers", HAULIER_COLUMNS),
    ):
        sheet = book.create_sheet(title)
        for number, column in enumerate(columns, start=1):
            _heading(sheet, number, column.heading, column.about, column.needed)
        sheet.freeze_panes = "B2" if title != "Rates" else "C2"
    _rules(book.create_sheet("Rules"))
    book.save(target)


def _heading(sheet: Worksheet, number: int, heading: str, about: str, needed: bool) -> None:
    cell = sheet.cell(1, number, heading)
    cell.font = Font(bold=True, color="FFFFFF" if needed else "1F3A4D")
    cell.fill = _NEEDED if needed else _OPTIONAL
    cell.alignment = Alignment(vertical="center", wrap_text=True)
    cell.comment = Comment(about + (" (needed)" if needed else ""), "hithe", width=260, height=60)
    sheet.column_dimensions[get_column_letter(number)].width = max(12, len(heading) + 4)


def _rules(sheet: Worksheet) -> None:
    _heading(sheet, 1, "Rule", "Which setting", True)
    _heading(sheet, 2, "Value", "What it is set to; blank takes what stands beside it", True)
    default = Rules()
    for number, column in enumerate(RULE_COLUMNS, start=2):
        sheet.cell(number, 1, column.heading)
        sheet.cell(number, 1).comment = Comment(_about(column, default), "hithe", width=260, height=60)
    sheet.column_dimensions["A"].width = 22
    sheet.column_dimensions["B"].width = 16
    sheet.freeze_panes = "B2"


def _about(column: Column, default: Rules) -> str:
    usual = show_field(
        column, default.loading_days if column.field == "days" else getattr(default, column.field)
    )
    return f"{column.about} (blank: {usual or 'none'})"
