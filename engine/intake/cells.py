"""Files to sheets of raw cells, with addresses. What a cell means is decided elsewhere."""

import io
import os
import struct
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, BinaryIO

import python_calamine as calamine

from engine.intake.delimited import rows_of_text
from engine.intake.marks_ods import ods_marks
from engine.intake.marks_xls import is_encrypted, xls_marks
from engine.intake.marks_xlsb import xlsb_marks
from engine.intake.numbers import ErrorCell, FormulaCell, PercentCell
from engine.intake.refusal import (
    MEGABYTE,
    Limits,
    Unreadable,
    check_area,
    damaged,
    kind_of,
    not_a_spreadsheet,
    protected,
    read_whole,
    refused,
    too_large,
    unpacked,
)
from engine.intake.workbook_marks import (
    Marks,
    Outline,
    has_entities,
    marks_of,
    outline_of,
    percent_styles,
    sheet_parts,
)

Source = str | os.PathLike[str] | bytes | BinaryIO | tuple[str, bytes] | tuple[str, BinaryIO]
"""A path; bytes or an open file; or a name with bytes or an open file."""


@dataclass(frozen=True, eq=False)
class Sheet:
    """One sheet: `rows` are lists of raw cells, all equally long, from row 1 and column A on."""

    file: str
    name: str
    rows: Sequence[Sequence[Any]]
    hidden: bool = False
    hidden_rows: frozenset[int] = frozenset()
    hidden_columns: frozenset[int] = frozenset()
    merged: tuple[tuple[tuple[int, int], tuple[int, int]], ...] = ()
    is_text: bool = False

    @property
    def width(self) -> int:
        return len(self.rows[0]) if self.rows else 0


def address(row: int, column: int) -> str:
    """The address of a cell, counted from 0, as spreadsheets write it: (0, 1) is B1."""
    return f"{column_letters(column)}{row + 1}"


def column_letters(column: int) -> str:
    """The letters of a column, counted from 0."""
    letters = ""
    column += 1
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


def read_sheets(sources: Source | Iterable[Source], limits: Limits | None = None) -> list[Sheet]:
    """All sheets of one file or of several, in order.

    Raises:
        Unreadable: a file that is no spreadsheet, is damaged, protected, or costs too much.
        OSError: a path that cannot be opened.
    """
    limits = limits or Limits()
    every: list[Source] = [sources] if is_single(sources) else list(sources)  # type: ignore[list-item, arg-type]
    if len(every) > limits.files:
        raise too_large("", f"These are {len(every)} files, and at most {limits.files} are read at once.")
    sheets: list[Sheet] = []
    read = 0
    for source in every:
        name, data = named_bytes(source, limits)
        read += len(data)
        if read > limits.all_files:
            raise too_large(name, f"The files together are larger than {limits.all_files // MEGABYTE} MB.")
        sheets += _sheets_of(name, data, limits)
    return sheets


def is_single(sources: object) -> bool:
    """Whether this is one file rather than several."""
    return isinstance(sources, (str, bytes, os.PathLike)) or hasattr(sources, "read") or _is_named(sources)


def _is_named(source: object) -> bool:
    return (
        isinstance(source, tuple)
        and len(source) == 2
        and isinstance(source[0], str)
        and (isinstance(source[1], bytes) or hasattr(source[1], "read"))
    )


def _sheets_of(name: str, data: bytes, limits: Limits) -> list[Sheet]:
    kind = kind_of(data, name)
    if kind == "text":
        return [Sheet(name, Path(name).stem, rows_of_text(data, name, limits), is_text=True)]
    if kind == "zip":
        return _zipped(data, name, limits)
    try:
        encrypted, found = is_encrypted(data), xls_marks(data)
    except (struct.error, IndexError) as error:
        raise damaged(name) from error
    if encrypted:
        raise protected(name)
    return _calamine_sheets(data, name, _checked(found, name, limits), limits)


def named_bytes(source: Source, limits: Limits) -> tuple[str, bytes]:
    """The name and content of one file.

    Raises:
        Unreadable: it is larger than the limit, or a folder.
        OSError: a path that cannot be opened.
    """
    if isinstance(source, (str, os.PathLike)):
        path = Path(source)
        if path.is_dir():
            raise refused("not a spreadsheet", "This is a folder.", "Name the file in it.", path.name)
        with path.open("rb") as opened:
            return path.name, read_whole(opened, path.name, limits)
    name, content = source if isinstance(source, tuple) else (_name_of(source), source)
    stream = io.BytesIO(content) if isinstance(content, bytes) else content
    return name, read_whole(stream, name, limits)


def _name_of(source: object) -> str:
    name = getattr(source, "name", "")
    return Path(name).name if isinstance(name, str) else ""


def _zipped(data: bytes, name: str, limits: Limits) -> list[Sheet]:
    parts = unpacked(data, name, limits)
    if any(has_entities(part[:100_000]) for key, part in parts.items() if not key.endswith(".bin")):
        raise refused(
            "entities in the file",
            "The workbook declares document types or entities of its own, which no spreadsheet needs.",
            "Open it in a spreadsheet program, save it again and upload that.",
            name,
        )
    lower = {key.casefold() for key in parts}
    if "xl/workbook.xml" in lower:
        percent = percent_styles(parts)
        marks: dict[str, Marks] = {}
        for sheet, part in sheet_parts(parts).items():
            xml = parts.pop(part, b"")
            outline = outline_of(xml)
            check_area(outline.rows, outline.columns, outline.cells, sheet, name, limits)
            marks[sheet] = marks_of(xml, percent, outline)
    elif "xl/workbook.bin" in lower:
        try:
            marks = _checked(xlsb_marks(parts), name, limits)
        except (struct.error, IndexError) as error:
            raise damaged(name) from error
    elif "content.xml" in lower:
        marks = _checked(ods_marks(parts["content.xml"], name), name, limits)
    else:
        raise not_a_spreadsheet(name)
    del parts
    return _calamine_sheets(data, name, marks, limits)


def _checked(found: Mapping[str, tuple[Marks, Outline]], name: str, limits: Limits) -> dict[str, Marks]:
    for sheet, (_, outline) in found.items():
        check_area(outline.rows, outline.columns, outline.cells, sheet, name, limits)
    return {sheet: marks for sheet, (marks, _) in found.items()}


def _calamine_sheets(data: bytes, name: str, marks: dict[str, Marks], limits: Limits) -> list[Sheet]:
    sheets = []
    try:
        with calamine.CalamineWorkbook.from_filelike(io.BytesIO(data)) as book:
            for meta in book.sheets_metadata:
                if meta.typ != calamine.SheetTypeEnum.WorkSheet:
                    continue
                sheet = book.get_sheet_by_name(meta.name)
                if sheet.total_height * sheet.total_width > limits.cells:
                    raise too_large(name, f"Sheet '{meta.name}' has more than {limits.cells} cells.")
                rows = sheet.to_python(skip_empty_area=False)
                known = marks.get(meta.name)
                if known is not None:
                    rows = _marked(rows, known)
                merged = tuple(sheet.merged_cell_ranges or ())
                _fill_down(rows, merged)
                sheets.append(
                    Sheet(
                        name,
                        meta.name,
                        rows,
                        hidden=meta.visible != calamine.SheetVisibleEnum.Visible,
                        hidden_rows=known.hidden_rows if known else frozenset(),
                        hidden_columns=known.hidden_columns if known else frozenset(),
                        merged=merged,
                    )
                )
    except calamine.PasswordError as error:
        raise protected(name) from error
    except (calamine.CalamineError, OSError, ValueError) as error:
        if isinstance(error, Unreadable):
            raise
        if "assword" in str(error) or "ncrypt" in str(error):
            raise protected(name) from error
        raise damaged(name) from error
    except BaseException as error:  # a panic of the reader is no Exception, yet only says: damaged
        if type(error).__name__ != "PanicException":
            raise
        raise damaged(name) from error
    return sheets


def _fill_down(rows: list[list[Any]], merged: Iterable[tuple[tuple[int, int], tuple[int, int]]]) -> None:
    """A name merged over several rows stands in each of them; numbers are left where they are."""
    for (top, left), (bottom, _) in merged:
        if top >= len(rows) or left >= len(rows[top]) or type(rows[top][left]) is not str:
            continue
        for number in range(top + 1, min(bottom + 1, len(rows))):
            if rows[number][left] == "":
                rows[number][left] = rows[top][left]


def _marked(rows: list[list[Any]], marks: Marks) -> list[list[Any]]:
    """The cells with errors, missing results and percent formats worked in."""
    spoilt: dict[tuple[int, int], Any] = {
        place: FormulaCell(f"={text}") for place, text in marks.no_result.items()
    }
    spoilt.update({place: ErrorCell(text) for place, text in marks.errors.items()})
    if spoilt:
        height = max(len(rows), max(row for row, _ in spoilt) + 1)
        width = max(len(rows[0]) if rows else 0, max(column for _, column in spoilt) + 1)
        for row in rows:
            row.extend([""] * (width - len(row)))
        rows.extend([""] * width for _ in range(height - len(rows)))
        for (row_number, column), cell in spoilt.items():
            rows[row_number][column] = cell
    for row_number, column in marks.percent:
        if row_number < len(rows) and column < len(rows[row_number]):
            cell = rows[row_number][column]
            if type(cell) is float:
                rows[row_number][column] = PercentCell(cell)
    return rows
