"""What a workbook's XML says beside the values: errors, formulas without a result, percent formats, hiding.

The reader of cells gives an error cell as blank and knows no formats, so the XML of each sheet is looked
through once, as bytes and without building a tree.
"""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from posixpath import join, normpath
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

_CHUNK, _OVERLAP = 1 << 20, 32

_ROW_TAG = re.compile(rb"<(?:\w+:)?row\b([^>]*)>")
_COLUMN_TAG = re.compile(rb"<(?:\w+:)?col\b([^>]*)>")
_SPAN = re.compile(rb'\b(min|max)="(\d{1,5})"')
_ROW_NUMBER = re.compile(rb'\br="(\d+)"')
_REFERENCE = re.compile(rb'\br="([A-Z]{1,3})(\d{1,7})"')
_ERROR = re.compile(
    rb'<(?:\w+:)?c\b([^>]*\bt="e"[^>]*)>(?:\s*<(?:\w+:)?f\b(?:[^>]*/>|[^>]*>[^<]*</(?:\w+:)?f>))?'
    rb"\s*<(?:\w+:)?v>([^<]*)<"
)
_NO_RESULT = re.compile(
    rb"<(?:\w+:)?c\b([^>/]*)>\s*<(?:\w+:)?f\b(?:[^>]*/>|[^>]*>([^<]*)</(?:\w+:)?f>)"
    rb"\s*(?:<(?:\w+:)?v\s*/>|<(?:\w+:)?v>\s*</(?:\w+:)?v>)?\s*</(?:\w+:)?c>"
)
_FORMATTED = re.compile(rb'<(?:\w+:)?c\b([^>]*\bs="(\d+)"[^>]*)>')
_LOOSE = re.compile(rb"""\br\s*=\s*["']([A-Z]{1,3})(\d{1,7})["']""")
_ENTITY = re.compile(rb"<!(?:DOCTYPE|ENTITY)", re.IGNORECASE)
_PERCENT_FORMATS = frozenset({9, 10})  # the built-in formats 0% and 0.00% of ECMA-376 part 1, 18.8.30


@dataclass(frozen=True)
class Marks:
    """Positions are (row, column) from 0."""

    errors: Mapping[tuple[int, int], str]
    no_result: Mapping[tuple[int, int], str]
    percent: frozenset[tuple[int, int]]
    hidden_rows: frozenset[int]
    hidden_columns: frozenset[int] = frozenset()


class Outline(NamedTuple):
    """How many rows and columns reach from A1 to the farthest cell, how many cells there are, and which."""

    rows: int
    columns: int
    cells: int
    has_errors: bool
    has_formulas: bool


def has_entities(part: bytes) -> bool:
    """Whether an XML part declares a document type or entities, which no spreadsheet needs."""
    if part.startswith((b"\xff\xfe", b"\xfe\xff")):
        part = part.replace(b"\x00", b"")
    return _ENTITY.search(part) is not None


def sheet_parts(parts: Mapping[str, bytes]) -> dict[str, str]:
    """For each sheet's name the archive part that holds it, in the workbook's order."""
    book = _part(parts, "xl/workbook.xml")
    targets: dict[str, str] = {}
    for tag in re.findall(r"<(?:\w+:)?Relationship\b([^>]*)>", _part(parts, "xl/_rels/workbook.xml.rels")):
        attributes = dict(_attributes(tag))
        target = attributes.get("Target", "")
        path = target.lstrip("/") if target.startswith("/") else normpath(join("xl", target))
        targets[attributes.get("Id", "")] = path
    sheets = {}
    for tag in re.findall(r"<(?:\w+:)?sheet\b([^>]*)>", book):
        attributes = dict(_attributes(tag))
        link = next((value for name, value in attributes.items() if name.endswith(":id")), "")
        sheets[attributes.get("name", "")] = targets.get(link, "")
    return sheets


def percent_styles(parts: Mapping[str, bytes]) -> frozenset[int]:
    """Numbers of the cell styles that show a number as percent."""
    styles = _part(parts, "xl/styles.xml")
    formats = set(_PERCENT_FORMATS)
    for tag in re.findall(r"<(?:\w+:)?numFmt\b([^>]*)>", styles):
        attributes = dict(_attributes(tag))
        if "%" in re.sub(r'"[^"]*"|\\.', "", attributes.get("formatCode", "")):
            formats.add(int(attributes.get("numFmtId", "0") or 0))
    cells = re.search(r"<(?:\w+:)?cellXfs\b.*?</(?:\w+:)?cellXfs>", styles, re.DOTALL)
    tags = re.findall(r"<(?:\w+:)?xf\b([^>]*)>", cells[0]) if cells else []
    numbers = [int(dict(_attributes(tag)).get("numFmtId", "0") or 0) for tag in tags]
    return frozenset(style for style, number in enumerate(numbers) if number in formats)


def outline_of(xml: bytes) -> Outline:
    """How far a sheet's cells reach, and whether it has errors or formulas, from one pass over its bytes.

    Every reference counts, in whatever order they stand: what a sheet states as its dimension may be wrong,
    and a single cell far away would make a reader allocate the whole area.
    """
    rows = columns = found = cells = 0
    errors = formulas = False
    for start in range(0, len(xml), _CHUNK):
        chunk = np.frombuffer(xml, np.uint8, min(_CHUNK + _OVERLAP, len(xml) - start), start)
        length = min(_CHUNK, len(xml) - start)
        last_row, last_column, count = _farthest(chunk, length)
        rows, columns, found = max(rows, last_row), max(columns, last_column), found + count
        cells += _cells(chunk, length)
        errors = errors or _quoted(chunk, "e")
        formulas = formulas or _opened(chunk, "f")
    if found < cells:  # cells without a reference, or with spaces in it
        loose = [(int(row), _column(letters) + 1) for letters, row in _LOOSE.findall(xml)]
        rows = max([rows, xml.count(b"<row"), *(row for row, _ in loose)])
        columns = max([columns, min(16384, cells - len(loose)), *(column for _, column in loose)])
    return Outline(rows, columns, max(found, cells), errors, formulas)


def _quoted(chunk: npt.NDArray[np.uint8], letter: str) -> bool:
    """Whether a letter stands alone between quotes."""
    at = np.flatnonzero(chunk[1:-1] == ord(letter)) + 1
    quotes = (ord('"'), ord("'"))
    return bool((np.isin(chunk[at - 1], quotes) & np.isin(chunk[at + 1], quotes)).any())


def _opened(chunk: npt.NDArray[np.uint8], letter: str) -> bool:
    """Whether a tag may begin whose name, with or without a prefix, begins with this letter."""
    at = np.flatnonzero(chunk[1:] == ord(letter)) + 1
    return bool(np.isin(chunk[at - 1], (ord("<"), ord(":"))).any())


def _cells(chunk: npt.NDArray[np.uint8], length: int) -> int:
    """How many cell tags begin in some bytes, whatever their namespace prefix."""
    at = np.flatnonzero(chunk[1 : max(1, len(chunk) - 1)] == ord("c")) + 1
    at = at[at <= length]
    before, behind = chunk[at - 1], chunk[at + 1]
    opens = (before == ord("<")) | (before == ord(":"))
    return int((opens & ((behind <= ord(" ")) | (behind == ord(">")) | (behind == ord("/")))).sum())


def _farthest(chunk: npt.NDArray[np.uint8], length: int) -> tuple[int, int, int]:
    """The last row and column that references in some bytes name, and how many cells have one."""
    if len(chunk) < 6:
        return 0, 0, 0
    at = np.flatnonzero(chunk[: len(chunk) - 3] == ord("r"))
    at = at[at < length]
    at = at[(chunk[at + 1] == ord("=")) & ((chunk[at + 2] == ord('"')) | (chunk[at + 2] == ord("'")))] + 3
    row = np.zeros(len(at), dtype=np.int32)
    column = np.zeros(len(at), dtype=np.int32)
    padded = np.concatenate([chunk, np.zeros(16, dtype=np.uint8)])
    byte = padded[at]
    for _ in range(3):
        letter = (byte >= ord("A")) & (byte <= ord("Z"))
        if not letter.any():
            break
        column = np.where(letter, column * 26 + byte - 64, column)
        at = at + letter
        byte = padded[at]
    for step in range(1, 8):
        digit = (byte >= ord("0")) & (byte <= ord("9"))
        if not digit.any():
            break
        row = np.where(digit, row * 10 + byte - 48, row)
        byte = np.where(digit, padded[at + step], 0)
    named = (column > 0) & (row > 0)
    plain = row[column == 0]
    far = max(int(row[named].max(initial=0)), int(plain[plain <= 1 << 20].max(initial=0)))
    return far, int(column[named].max(initial=0)), int(named.sum())


def marks_of(xml: bytes, percent: frozenset[int], outline: Outline) -> Marks:
    """What one sheet's XML says beside its values."""
    errors = dict(_placed(_ERROR, xml)) if outline.has_errors else {}
    no_result = dict(_placed(_NO_RESULT, xml)) if outline.has_formulas else {}
    shown = set()
    if percent and any(b's="%d"' % style in xml for style in percent):
        for match in _FORMATTED.finditer(xml):
            place = _place(match[1])
            if int(match[2]) in percent and place is not None:
                shown.add(place)
    hidden = set()
    columns: set[int] = set()
    if b'hidden="' in xml:
        for attributes in _COLUMN_TAG.findall(xml[: xml.find(b"sheetData")]):
            span = dict(_SPAN.findall(attributes))
            if re.search(rb'\bhidden="(?:1|true)"', attributes) and len(span) == 2:
                columns.update(range(int(span[b"min"]) - 1, min(int(span[b"max"]), 16384)))
        for match in _ROW_TAG.finditer(xml):
            number = _ROW_NUMBER.search(match[1])
            if number and re.search(rb'\bhidden="(?:1|true)"', match[1]):
                hidden.add(int(number[1]) - 1)
    return Marks(errors, no_result, frozenset(shown), frozenset(hidden), frozenset(columns))


def _placed(pattern: re.Pattern[bytes], xml: bytes) -> Iterator[tuple[tuple[int, int], str]]:
    for match in pattern.finditer(xml):
        place = _place(match[1])
        if place is not None:
            text = (match[2] or b"").decode("utf-8", "replace")
            yield place, _unescaped(text)


def _place(attributes: bytes) -> tuple[int, int] | None:
    match = _REFERENCE.search(attributes)
    return None if match is None else (int(match[2]) - 1, _column(match[1]))


def _column(letters: bytes) -> int:
    number = 0
    for letter in letters:
        number = number * 26 + letter - 64
    return number - 1


def _part(parts: Mapping[str, bytes], name: str) -> str:
    found = parts.get(name) or next((part for key, part in parts.items() if key.casefold() == name), b"")
    return found.decode("utf-8", "replace")


def _attributes(tag: str) -> Iterator[tuple[str, str]]:
    for name, _, value in re.findall(r"""([\w:.-]+)\s*=\s*(["'])(.*?)\2""", tag, re.DOTALL):
        yield name, _unescaped(value)


def _unescaped(text: str) -> str:
    for entity, character in (("&lt;", "<"), ("&gt;", ">"), ("&quot;", '"'), ("&apos;", "'"), ("&amp;", "&")):
        text = text.replace(entity, character)
    return text
