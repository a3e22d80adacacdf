"""Names that a sheet does not write out again: ditto marks, and names blank below the first of a block."""

from collections.abc import Iterable, Sequence
from typing import Any

from engine.findings import Finding, Severity
from engine.intake.cells import Sheet, address
from engine.intake.numbers import is_blank

NAME_FIELDS = ("name", "depot", "customer", "haulier")
AS_ABOVE = "as in the row above"
_MARKS = frozenset({
    '"', '""', "''", "″", "“", "”", "„", "〃", '-"-', "-''-", "ditto", "do.", "idem", "id.", "same",
    "same as above", "as above", "see above",
})  # fmt: skip


def is_ditto(cell: Any) -> bool:
    """Whether a cell stands for what is in the cell above it."""
    return isinstance(cell, str) and cell.strip().casefold() in _MARKS


def written_out(cells: list[Any]) -> list[Any]:
    """A column of names with every ditto mark replaced by the name above it."""
    marks = {cell for cell in set(cells) if is_ditto(cell)}
    if not marks:
        return cells
    above: Any = ""
    found = []
    for cell in cells:
        above = above if cell in marks and not is_blank(above) else cell
        found.append(above)
    return found


def filled_down(cells: Sequence[Any], filled: Sequence[bool]) -> list[Any]:
    """A column of names with blank cells of rows that hold anything taken from the row above.

    filled: whether each row holds anything; a row that does not ends the block
    """
    above: Any = ""
    found = []
    for cell, there in zip(cells, filled, strict=True):
        above = (cell if not is_blank(cell) else above) if there else ""
        found.append(above if there else cell)
    return found


def about_dittos(sheet: Sheet, rows: range, columns: Iterable[int]) -> list[Finding]:
    """That ditto marks in columns of names were read as the names above them."""
    findings = []
    for column in columns:
        cells = [sheet.rows[number][column] for number in rows]
        marks = {cell for cell in set(cells) if is_ditto(cell)}
        places = [number for number, cell in zip(rows, cells, strict=True) if cell in marks] if marks else []
        if places:
            findings.append(
                Finding(
                    Severity.NOTE,
                    "ditto",
                    f"Ditto marks in {len(places)} cells were read as the name above them.",
                    "",
                    sheet.file,
                    sheet.name,
                    address(places[0], column),
                    str(sheet.rows[places[0]][column]),
                )
            )
    return findings
