"""Sheets to a workbook file: the same sheets give the same bytes.

openpyxl makes everything but the rows (styles, page set-up, filters, charts). The parts are then packed
again, in a fixed order and with fixed times, with the rows put in their place as they are made.
"""

import os
import re
import zipfile
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from io import BytesIO
from pathlib import Path
from typing import IO, Any

from openpyxl import Workbook
from openpyxl.cell.cell import Cell
from openpyxl.utils import get_column_letter
from openpyxl.workbook.properties import CalcProperties
from openpyxl.worksheet.pagebreak import Break
from openpyxl.xml.functions import tostring

from engine.report.look import FONT, Style, apply
from engine.report.sheet import Sheet, render
from engine.report.text import header_text

Target = str | os.PathLike[str] | IO[bytes]

NO_TIME = datetime(2000, 1, 1)
"""Stands in a file's properties where no time was given, so that equal plans make equal files."""

_ZIP_DAY = (1980, 1, 1, 0, 0, 0)
_STYLES = "xl/styles.xml"
_ROWS_HERE = re.compile(rb"<sheetData\s*/>|<sheetData>\s*</sheetData>")
_DIMENSION = re.compile(rb'<dimension ref="[^"]*"\s*/>')
_FIRST = ("[Content_Types].xml", "_rels/.rels", "docProps/app.xml", "docProps/core.xml", "xl/workbook.xml")
_APPLICATION = (
    b'<Properties xmlns="http://schemas.openxmlformats.org/officeDocument/2006/extended-properties">'
    b"<Application>Hithe</Application></Properties>"
)
_MOST_BREAKS = 1_023
"""Manual page breaks that the usual spreadsheet programs accept on a sheet."""


def write_book(sheets: Sequence[Sheet], target: Target, title: str, made: datetime | None = None) -> None:
    """Write sheets as an Office Open XML workbook.

    Args:
        sheets: in the order of their tabs.
        target: a path, or a file open for writing bytes. A path gets the whole workbook or none.
        title: what the file's properties call it.
        made: the time in the file's properties; None leaves it out.
    """
    book = Workbook()
    book.remove(book.worksheets[0])
    book.calculation = CalcProperties(fullCalcOnLoad=True)
    book.properties.creator = "Hithe"
    book.properties.title = title
    style_id = _styles_of(book)
    style_id(Style())  # the first style is what cells without one take
    for sheet in sheets:
        _set_up(book.create_sheet(sheet.name), sheet)
    when = NO_TIME if made is None else made.astimezone(UTC).replace(tzinfo=None)
    parts = _parts(book, when)
    with (
        open_whole(target) as file,
        zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, compresslevel=6) as archive,
    ):
        for name in sorted(parts, key=lambda name: (_FIRST.index(name) if name in _FIRST else 9, name)):
            if name != _STYLES and not name.startswith("xl/worksheets/sheet"):
                archive.writestr(_entry(name), parts[name])
        for place, sheet in enumerate(sheets, 1):
            _write_rows(archive, f"xl/worksheets/sheet{place}.xml", parts, sheet, style_id)
        archive.writestr(_entry(_STYLES), _parts(book, when)[_STYLES])  # now with every style that rows took


@contextmanager
def open_whole(target: Target) -> Iterator[IO[bytes]]:
    """Open `target` for writing bytes; a path only changes once all of them are written."""
    if not isinstance(target, str | os.PathLike):
        yield target
        return
    path = Path(target)
    part = path.with_name(path.name + ".part")
    try:
        with part.open("wb") as file:
            yield file
        part.replace(path)
    finally:
        part.unlink(missing_ok=True)


def fixed_zip(file: IO[bytes], members: Sequence[tuple[str, bytes]]) -> None:
    """Pack named bytes into a zip file whose own bytes depend on nothing else."""
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, compresslevel=6) as archive:
        for name, content in members:
            archive.writestr(_entry(name), content)


def _entry(name: str) -> zipfile.ZipInfo:
    entry = zipfile.ZipInfo(name, _ZIP_DAY)
    entry.compress_type = zipfile.ZIP_DEFLATED
    entry.external_attr = 0o644 << 16
    entry.create_system = 3
    return entry


def _styles_of(book: Workbook) -> Callable[[Style], int]:
    """The number of a style in the book's style sheet; a style is added when it is first asked for."""
    known: dict[Style, int] = {}
    scratch = Workbook.create_sheet(book, "scratch")
    book.remove(scratch)

    def style_id(style: Style) -> int:
        if style not in known:
            cell = Cell(scratch, row=1, column=1)
            apply(style, cell)
            known[style] = cell.style_id
        return known[style]

    return style_id


def _set_up(page: Any, sheet: Sheet) -> None:
    """All of an openpyxl sheet but its rows."""
    for place, width in enumerate(sheet.widths, 1):
        page.column_dimensions[get_column_letter(place)].width = width
    page.freeze_panes = sheet.frozen
    if sheet.filtered:
        page.auto_filter.ref = sheet.filtered
    if sheet.repeated:
        page.print_title_rows = sheet.repeated
    page.sheet_view.showGridLines = False
    page.sheet_properties.tabColor = sheet.tab
    page.sheet_properties.pageSetUpPr.fitToPage = True
    page.page_setup.orientation = "landscape" if sheet.landscape else "portrait"
    page.page_setup.paperSize = page.PAPERSIZE_A4
    page.page_setup.fitToWidth, page.page_setup.fitToHeight = 1, 0
    page.page_margins.left = page.page_margins.right = 0.5
    page.page_margins.top, page.page_margins.bottom = 0.8, 0.6
    for row in sheet.breaks[:_MOST_BREAKS]:
        page.row_breaks.append(Break(id=row))
    page.oddHeader.left.text = header_text(sheet.header).strip()
    page.oddHeader.right.text = header_text(sheet.name).strip()
    page.oddFooter.right.text = "&P / &N"
    for part in (page.oddHeader.left, page.oddHeader.right, page.oddFooter.right):
        part.size, part.font = 9, f"{FONT},Regular"
    if sheet.finish:
        sheet.finish(page)


def _parts(book: Workbook, when: datetime) -> dict[str, bytes]:
    """The files inside a workbook, as openpyxl makes them."""
    held = BytesIO()
    book.save(held)
    with zipfile.ZipFile(held) as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    book.properties.created = book.properties.modified = when
    parts["docProps/core.xml"] = tostring(book.properties.to_tree())
    parts["docProps/app.xml"] = _APPLICATION
    return parts


def _write_rows(
    archive: zipfile.ZipFile,
    name: str,
    parts: dict[str, bytes],
    sheet: Sheet,
    style_id: Callable[[Style], int],
) -> None:
    """One sheet's part, its rows streamed in."""
    last = f"{get_column_letter(max(1, len(sheet.widths)))}{max(1, sheet.length)}"
    shell = _DIMENSION.sub(f'<dimension ref="A1:{last}"/>'.encode(), parts[name], count=1)
    before, after = _ROWS_HERE.split(shell, maxsplit=1)
    with archive.open(_entry(name), "w", force_zip64=True) as file:
        file.write(before + b"<sheetData>")
        waiting: list[str] = []
        for row in render(sheet.rows, style_id):
            waiting.append(row)
            if len(waiting) >= 2_000:
                file.write("".join(waiting).encode())
                waiting.clear()
        file.write("".join(waiting).encode() + b"</sheetData>" + after)
