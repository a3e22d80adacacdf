"""A cell in its surroundings, and a repaired copy of the file that it came from."""

import csv
import io
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import openpyxl

from engine.findings import Finding
from engine.intake.cells import Sheet, Source, column_letters, named_bytes, read_sheets
from engine.intake.delimited import decoded, rows_of_text, separator_of
from engine.intake.fields import text_of
from engine.intake.refusal import Limits, ending_of, refused

Mends = Mapping[tuple[str, str], str]
"""What is to stand in a cell, by sheet and address."""


@dataclass(frozen=True, slots=True)
class Surroundings:
    """A piece of a sheet as text: `rows` under the `letters` of its columns, `numbers` of its rows.

    row, column: where the cell that it is about stands in `rows`
    """

    letters: tuple[str, ...]
    numbers: tuple[int, ...]
    rows: tuple[tuple[str, ...], ...]
    row: int
    column: int


def surroundings_of(
    source: Source | Iterable[Source], finding: Finding, around: int = 3, limits: Limits | None = None
) -> Surroundings | None:
    """The cells around the one that a finding names, None where it names none in these files.

    around: so many rows above and below, and columns left and right, are shown

    Raises:
        Unreadable: as `read_week`.
    """
    place = position_of(finding.cell)
    if place is None:
        return None
    for sheet in read_sheets(source, limits):
        if sheet.name == finding.sheet and finding.file in ("", sheet.file):
            return _piece(sheet, *place, around)
    return None


def position_of(cell: str) -> tuple[int, int] | None:
    """Row and column of an address, counted from 0; None where it is none."""
    letters = cell.rstrip("0123456789")
    digits = cell[len(letters) :]
    if not letters.isalpha() or not letters.isascii() or not digits or len(letters) > 3:
        return None
    column = 0
    for letter in letters.upper():
        column = column * 26 + ord(letter) - 64
    return int(digits) - 1, column - 1


def _piece(sheet: Sheet, row: int, column: int, around: int) -> Surroundings | None:
    if not (0 <= row < len(sheet.rows) and 0 <= column < sheet.width):
        return None
    rows = range(max(0, row - around), min(len(sheet.rows), row + around + 1))
    columns = range(max(0, column - around), min(sheet.width, column + around + 1))
    return Surroundings(
        tuple(column_letters(c) for c in columns),
        tuple(r + 1 for r in rows),
        tuple(
            tuple("" if sheet.rows[r][c] is None else text_of(sheet.rows[r][c]) for c in columns)
            for r in rows
        ),
        row - rows.start,
        column - columns.start,
    )


def repaired_copy(source: Source, mends: Mends, limits: Limits | None = None) -> bytes:
    """The file with some cells mended and everything else as it was.

    source: one .xlsx, .xlsm or text file; mends: the new text of each cell, by sheet and address

    Raises:
        Unreadable: another format, or as `read_week`.
    """
    limits = limits or Limits()
    name, data = named_bytes(source, limits)
    read_sheets((name, data), limits)  # refuses what must not be opened
    if data[:2] == b"PK" and ending_of(name) not in (".ods", ".xlsb"):
        return _repaired_workbook(data, mends, ending_of(name) == ".xlsm")
    if data[:2] != b"PK" and ending_of(name) != ".xls":
        return _repaired_text(data, name, mends, limits)
    raise refused(
        "no repair", "Only .xlsx, .xlsm and text files can be repaired.", "Save it as .xlsx first.", name
    )


def _repaired_workbook(data: bytes, mends: Mends, macros: bool) -> bytes:
    book = openpyxl.load_workbook(io.BytesIO(data), keep_vba=macros, rich_text=True)
    for (sheet, cell), text in mends.items():
        if sheet in book.sheetnames and position_of(cell) is not None:
            target = book[sheet][cell]
            number = _plain_number(text)
            target.value = (text or None) if number is None else number
            if number is None and isinstance(target.value, str):
                target.data_type = "s"  # a text never becomes a formula
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def _repaired_text(data: bytes, name: str, mends: Mends, limits: Limits) -> bytes:
    text = decoded(data, name)
    rows = rows_of_text(data, name, limits)
    for (_, cell), mended in mends.items():
        place = position_of(cell)
        if place is not None and place[0] < len(rows) and place[1] < len(rows[place[0]]):
            rows[place[0]][place[1]] = mended
    stream = io.StringIO(newline="")
    ends = "\r\n" if "\r\n" in text else "\n"
    csv.writer(stream, delimiter=separator_of(text[:200_000].splitlines()), lineterminator=ends).writerows(
        rows
    )
    return ("\ufeff" + stream.getvalue()).encode("utf-8")


def _plain_number(text: str) -> float | int | None:
    """The number in a text that only has digits, so that a workbook keeps a number a number."""
    plain = text.strip()
    if not plain.removeprefix("-").replace(".", "", 1).isdigit() or not plain.isascii() or len(plain) > 15:
        return None
    return float(plain) if "." in plain else int(plain)
