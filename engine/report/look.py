"""The look of our workbooks: a few colours, one font, and styles named by what they are for."""

from collections.abc import Iterable, Sequence
from decimal import Decimal
from math import ceil
from typing import NamedTuple

from openpyxl.cell.cell import Cell
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side

from engine.exact import places_needed

FONT = "Arial"
INK = "1F2D33"  # text
QUIET = "66757B"  # remarks
DEEP = "17505A"  # headings: water under a quay
PALE = "E4EEED"  # totals
SHORE = "F7F1E3"  # what was typed by the desk
WARN = "F6D9C6"
WARN_INK = "8A3412"
GOOD = "DCEBDD"
GOOD_INK = "1E5B34"
RULE_LINE = "B9C7C8"

TEXT_FORMAT = "@"
MOST_PLACES_SHOWN = 6


class Style(NamedTuple):
    """How a cell looks. `number` is a number format; `kind` is one of the keys of `_LOOKS`."""

    kind: str = "plain"
    number: str = "General"
    align: str | None = None
    wrap: bool = False
    quoted: bool = False


class _Look(NamedTuple):
    ink: str = INK
    fill: str | None = None
    bold: bool = False
    size: float = 10
    italic: bool = False
    line: str | None = None  # 'above' or 'below'


_LOOKS = {
    "plain": _Look(),
    "heading": _Look(ink="FFFFFF", fill=DEEP, bold=True),
    "title": _Look(ink=DEEP, bold=True, size=16),
    "part": _Look(ink=DEEP, bold=True, size=12, line="below"),
    "strong": _Look(bold=True),
    "headline": _Look(ink=DEEP, bold=True, size=20),
    "total": _Look(fill=PALE, bold=True, line="above"),
    "group": _Look(ink=DEEP, fill=PALE, bold=True),
    "held": _Look(fill=SHORE),
    "short": _Look(ink=WARN_INK, fill=WARN),
    "quiet": _Look(ink=QUIET, italic=True),
    "good": _Look(ink=GOOD_INK, fill=GOOD, bold=True, size=12),
}

_INDENTED = {"plain", "heading", "total", "group", "held", "short", "good"}
"""Where text keeps a distance from the number to its left."""

LINE_HEIGHT = 13.2
"""Points that a line of text takes at 10 points."""


def apply(style: Style, cell: Cell) -> None:
    """Dress an openpyxl cell; the workbook it belongs to keeps the style."""
    look = _LOOKS[style.kind]
    cell.font = Font(name=FONT, size=look.size, bold=look.bold, italic=look.italic, color=look.ink)
    if look.fill:
        cell.fill = PatternFill("solid", start_color=look.fill, end_color=look.fill)
    side = Side("thin", color=RULE_LINE)
    if look.line == "above":
        cell.border = Border(top=side)
    elif look.line == "below":
        cell.border = Border(bottom=Side("medium", color=DEEP))
    text = style.align in (None, "left") and style.kind in _INDENTED
    cell.alignment = Alignment(
        horizontal="left" if text else style.align,
        vertical="center" if style.kind in ("heading", "headline", "good", "title") else "top",
        wrap_text=style.wrap or None,
        indent=1 if text else 0,
    )
    cell.number_format = style.number
    cell.quotePrefix = style.quoted


def number_format(places: int, always: int | None = None) -> str:
    """Thousands apart, and this many decimal places (at most six are shown; the cell keeps them all).

    Beyond `always` places only those are shown that are not 0, with decimal points still in line.
    """
    shown = max(0, min(places, MOST_PLACES_SHOWN))
    fixed = shown if always is None else min(always, shown)
    decimals = "0" * fixed + "?" * (shown - fixed)
    return "#,##0" + (f".{decimals}" if decimals else "")


def height_of(values: Sequence[object], widths: Sequence[float], styles: Sequence[Style]) -> float | None:
    """How high a row has to be for its wrapped text; None where one line will do.

    Programs are left to guess otherwise, and not all of them do. widths: in characters.
    """
    lines = 1
    for value, width, style in zip(values, widths, styles, strict=False):
        if style.wrap and isinstance(value, str):
            wide = max(1.0, width - 2) * 1.15  # most letters are narrower than the digits that widths count
            lines = max(lines, sum(max(1, ceil(len(part) / wide)) for part in value.split("\n")))
    return None if lines == 1 else min(400.0, LINE_HEIGHT * lines + 2)


def places_of(decimals: Iterable[object]) -> int:
    """The most decimal places that any of these decimals needs; what is no decimal is passed over."""
    return max((places_needed(decimal) for decimal in decimals if isinstance(decimal, Decimal)), default=0)
