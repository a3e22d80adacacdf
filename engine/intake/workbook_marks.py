"""What a workbook's XML says beside the values: errors, formulas without a result, percent formats, hiding.

The reader of cells gives an error cell as blank and knows no formats, so the XML of each sheet is looked
through once, as bytes and without building a tree.
"""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from posixpath import join, normpath

_ROW_TAG = re.compile(rb"<(?:\w+:)?row\b([^>]*)>")
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
_WIDE = re.compile(rb'\br="[A-Z]{3}\d')
_MEDIUM = re.compile(rb'\br="[A-Z]{2}\d')
_ENTITY = re.compile(rb"<!(?:DOCTYPE|ENTITY)", re.IGNORECASE)
_PERCENT_FORMATS = frozenset({9, 10})  # the built-in formats 0% and 0.00% of ECMA-376 part 1, 18.8.30


@dataclass(frozen=True)
class Marks:
    """Positions are (row, column) from 0."""

    errors: Mapping[tuple[int, int], str]
    no_result: Mapping[tuple[int, int], str]
    percent: frozenset[tuple[int, int]]
    hidden_rows: frozenset[int]
    last_row: int
    last_column: int


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


def used_area(xml: bytes, most: int) -> tuple[int, int]:
    """The last row and column, from 1, that any cell stands in; exact where their product may pass `most`."""
    last_row = 0
    for match in _ROW_TAG.finditer(xml):
        number = _ROW_NUMBER.search(match[1])
        last_row = max(last_row, int(number[1])) if number else last_row + 1
    last_column = 16384 if _WIDE.search(xml) else 702 if _MEDIUM.search(xml) else 26
    if last_row * last_column > most:
        exact = [(_column(letters), int(row)) for letters, row in _REFERENCE.findall(xml)]
        if exact:
            return max(row for _, row in exact), max(column for column, _ in exact) + 1
    return last_row, last_column


def marks_of(xml: bytes, percent: frozenset[int], area: tuple[int, int]) -> Marks:
    """What one sheet's XML says beside its values."""
    errors = dict(_placed(_ERROR, xml)) if b't="e"' in xml else {}
    no_result = dict(_placed(_NO_RESULT, xml)) if b"<f" in xml or b":f" in xml else {}
    shown = set()
    if percent and any(b's="%d"' % style in xml for style in percent):
        for match in _FORMATTED.finditer(xml):
            place = _place(match[1])
            if int(match[2]) in percent and place is not None:
                shown.add(place)
    hidden = set()
    if b'hidden="' in xml:
        for match in _ROW_TAG.finditer(xml):
            number = _ROW_NUMBER.search(match[1])
            if number and re.search(rb'\bhidden="(?:1|true)"', match[1]):
                hidden.add(int(number[1]) - 1)
    return Marks(errors, no_result, frozenset(shown), frozenset(hidden), *area)


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
