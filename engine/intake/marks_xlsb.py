"""What a binary workbook (.xlsb) says beside its values: errors, percent formats, hidden rows, its reach.

Record numbers and layouts are those of [MS-XLSB], sections 2.3 and 2.4.
"""

import re
import struct
from collections.abc import Iterator, Mapping
from posixpath import join, normpath

from engine.intake.workbook_marks import Marks, Outline

_ROW, _BLANK, _ERROR, _LAST_CELL, _FORMULA_ERROR, _SHEET = 0, 1, 3, 11, 11, 156
_NUMBERS = frozenset({2, 5, 9})  # BrtCellRk, BrtCellReal, BrtFmlaNum
_FORMAT, _STYLE, _STYLES, _STYLES_END, _COLUMNS = 44, 47, 617, 618, 60
_PERCENT_FORMATS = frozenset({9, 10})  # the built-in formats 0% and 0.00% of ECMA-376 part 1, 18.8.30
ERROR_TEXTS = {0x00: "#NULL!", 0x07: "#DIV/0!", 0x0F: "#VALUE!", 0x17: "#REF!", 0x1D: "#NAME?", 0x24: "#NUM!",
               0x2A: "#N/A", 0x2B: "#GETTING_DATA"}  # fmt: skip
"""Codes of errors as binary workbooks store them."""


def xlsb_marks(parts: Mapping[str, bytes]) -> dict[str, tuple[Marks, Outline]]:
    """Marks and outline of each sheet of a binary workbook, by the sheet's name.

    Raises:
        IndexError, struct.error: a record is cut short, or rows stand out of order.
    """
    links = parts.get("xl/_rels/workbook.bin.rels", b"").decode("utf-8", "replace")
    targets = {}
    for tag in re.findall(r"<Relationship\b([^>]*)>", links):
        found = dict(re.findall(r'(\w+)="([^"]*)"', tag))
        target = found.get("Target", "")
        targets[found.get("Id", "")] = (
            target.lstrip("/") if target[:1] == "/" else normpath(join("xl", target))
        )
    marks = {}
    percent = _percent_styles(parts.get("xl/styles.bin", b""))
    for kind, data in _records(parts.get("xl/workbook.bin", b"")):
        if kind == _SHEET and len(data) >= 12:
            link, rest = _wide(data, 8)
            title, _ = _wide(data, rest)
            marks[title] = _sheet(parts.get(targets.get(link, ""), b""), percent)
    return marks


def _percent_styles(part: bytes) -> frozenset[int]:
    """Numbers of the cell styles that show a number as percent."""
    formats = set(_PERCENT_FORMATS)
    styles: set[int] = set()
    number = -1
    for kind, data in _records(part):
        if kind == _FORMAT and len(data) >= 6:
            code, _ = _wide(data, 2)
            if "%" in re.sub(r'"[^"]*"|\\.', "", code):
                formats.add(struct.unpack_from("<H", data)[0])
        elif kind in (_STYLES, _STYLES_END):
            number = 0 if kind == _STYLES else -1
        elif kind == _STYLE and number >= 0 and len(data) >= 4:
            if struct.unpack_from("<H", data, 2)[0] in formats:
                styles.add(number)
            number += 1
    return frozenset(styles)


def _sheet(part: bytes, percent: frozenset[int]) -> tuple[Marks, Outline]:
    errors: dict[tuple[int, int], str] = {}
    shown: set[tuple[int, int]] = set()
    hidden: set[int] = set()
    unseen: set[int] = set()
    row = rows = columns = cells = 0
    for kind, data in _records(part):
        if kind == _ROW:
            before = row
            (row,) = struct.unpack_from("<I", data)
            if row < before or len(data) < 13:
                raise IndexError("rows out of order, or cut short")
            if data[11] & 0x10:  # fDyZero: the row is not shown
                hidden.add(row)
        elif _BLANK <= kind <= _LAST_CELL:
            column, style = struct.unpack_from("<II", data)
            if kind in _NUMBERS and style & 0xFFFFFF in percent:
                shown.add((row, column))
            rows, columns, cells = max(rows, row + 1), max(columns, column + 1), cells + 1
            if kind in (_ERROR, _FORMULA_ERROR) and len(data) >= 9:
                errors[row, column] = ERROR_TEXTS.get(data[8], "an error")
        elif kind == _COLUMNS and len(data) >= 18 and data[16] & 1:  # fHidden
            first, last = struct.unpack_from("<II", data)
            unseen.update(range(first, min(last + 1, 16384)))
    marks = Marks(errors, {}, frozenset(shown), frozenset(hidden), frozenset(unseen))
    return marks, Outline(rows, columns, cells, bool(errors), False)


def _records(part: bytes) -> Iterator[tuple[int, bytes]]:
    """Number and content of each record: both number and length are stored seven bits a byte."""
    at = 0
    while at < len(part):
        kind = part[at]
        at += 1
        if kind & 0x80 and at < len(part):
            kind = (kind & 0x7F) | (part[at] & 0x7F) << 7
            at += 1
        size = shift = 0
        for _ in range(4):
            if at >= len(part):
                return
            byte = part[at]
            at += 1
            size |= (byte & 0x7F) << shift
            shift += 7
            if not byte & 0x80:
                break
        yield kind, part[at : at + size]
        at += size


def _wide(data: bytes, at: int) -> tuple[str, int]:
    if at + 4 > len(data):
        return "", at
    (length,) = struct.unpack_from("<I", data, at)
    if length == 0xFFFFFFFF or at + 4 + 2 * length > len(data):
        return "", at + 4
    return data[at + 4 : at + 4 + 2 * length].decode("utf-16-le", "replace"), at + 4 + 2 * length
