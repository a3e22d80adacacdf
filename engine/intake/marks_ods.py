"""What an OpenDocument sheet says beside its values: errors, percentages, hidden rows, how far it reaches.

Element and attribute names are those of OpenDocument 1.3, part 3 (OASIS, 2021).
"""

from collections.abc import Iterator
from io import BytesIO
from xml.etree.ElementTree import Element, ParseError, iterparse

from engine.intake.refusal import damaged
from engine.intake.workbook_marks import Marks, Outline

_TABLE = "{urn:oasis:names:tc:opendocument:xmlns:table:1.0}"
_OFFICE = "{urn:oasis:names:tc:opendocument:xmlns:office:1.0}"
_TEXT = "{urn:oasis:names:tc:opendocument:xmlns:text:1.0}"
_CALC_TYPE = "{urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0}value-type"
_MOST_MARKED = 10_000
"""So many repeats of a marked cell are marked one by one."""


def ods_marks(content: bytes, name: str) -> dict[str, tuple[Marks, Outline]]:
    """Marks and outline of each sheet of an OpenDocument spreadsheet, by the sheet's name.

    content: the part content.xml, which must be free of entities

    Raises:
        Unreadable: the XML is broken.
    """
    try:
        return dict(_sheets(content))
    except (ParseError, ValueError, LookupError) as error:
        raise damaged(name) from error


def _sheets(content: bytes) -> Iterator[tuple[str, tuple[Marks, Outline]]]:
    title = ""
    row = 0
    sheet = _Sheet()
    depth = 0
    for event, element in iterparse(BytesIO(content), ("start", "end")):
        tag = element.tag
        if event == "start":
            if tag == _TABLE + "table":
                depth += 1
                if depth == 1:
                    title, row, sheet = element.get(_TABLE + "name", ""), 0, _Sheet()
            continue
        if tag == _TABLE + "table-row" and depth == 1:
            repeats = int(element.get(_TABLE + "number-rows-repeated", "1"))
            sheet.take(element, row, repeats)
            row += repeats
            element.clear()
        elif tag == _TABLE + "table":
            depth -= 1
            if depth == 0:
                yield title, (sheet.marks(), sheet.outline())
            element.clear()


class _Sheet:
    """The marks of one sheet while its rows pass by."""

    def __init__(self) -> None:
        self.errors: dict[tuple[int, int], str] = {}
        self.no_result: dict[tuple[int, int], str] = {}
        self.percent: set[tuple[int, int]] = set()
        self.hidden: set[int] = set()
        self.rows = self.columns = self.cells = 0

    def take(self, row: Element, first: int, repeats: int) -> None:
        column = 0
        for cell in row:
            if cell.tag not in (_TABLE + "table-cell", _TABLE + "covered-table-cell"):
                continue
            wide = int(cell.get(_TABLE + "number-columns-repeated", "1"))
            kind = cell.get(_OFFICE + "value-type")
            formula = cell.get(_TABLE + "formula")
            if kind is not None or formula is not None:
                self.rows, self.columns = max(self.rows, first + repeats), max(self.columns, column + wide)
                self.cells += wide * repeats
                self._mark(cell, kind, formula, [
                    (first + down, column + right)
                    for down in range(min(repeats, _MOST_MARKED))
                    for right in range(min(wide, 100))
                ] if repeats * wide <= _MOST_MARKED else [(first, column)])  # fmt: skip
            column += wide
        if row.get(_TABLE + "visibility", "visible") != "visible":
            self.hidden.update(range(first, first + min(repeats, _MOST_MARKED)))

    def _mark(
        self, cell: Element, kind: str | None, formula: str | None, places: list[tuple[int, int]]
    ) -> None:
        if cell.get(_CALC_TYPE) == "error":
            text = "".join(cell.itertext()).strip() or "error"
            self.errors.update(dict.fromkeys(places, text))
        elif kind is None and formula is not None:
            self.no_result.update(dict.fromkeys(places, formula.partition(":")[2].lstrip("=") or formula))
        elif kind == "percentage":
            self.percent.update(places)

    def marks(self) -> Marks:
        return Marks(self.errors, self.no_result, frozenset(self.percent), frozenset(self.hidden))

    def outline(self) -> Outline:
        return Outline(self.rows, self.columns, self.cells, bool(self.errors), bool(self.no_result))
