"""A sheet as a value, and its rows as the XML that a workbook holds (ECMA-376, part 1, section 18.3).

Rows are written by us and not by openpyxl for three reasons: a formula carries its result, so that a
reader who does not calculate sees a number too; text is an inline string and can never be a formula;
and a million rows take seconds. openpyxl writes all the rest, see `engine.report.book`.
"""

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from datetime import date
from decimal import Decimal
from functools import lru_cache
from typing import Any, NamedTuple
from xml.sax.saxutils import escape

from openpyxl.utils import get_column_letter

from engine.exact import canonical
from engine.report.look import Style
from engine.report.text import cell_text, starts_a_formula

MOST_ROWS = 1_048_576
"""Rows that one sheet of an Office Open XML workbook can hold in the usual programs."""

MOST_DIGITS = 15
"""Significant decimal digits that survive in any spreadsheet number (IEEE 754 binary64)."""

FIRST_DAY = date(1899, 12, 30)  # day 0 of the date system that workbooks use from 1 March 1900 on
_FIRST_SAFE_DAY = date(1900, 3, 1)


class Formula(NamedTuple):
    """A live formula (without '=') and what it comes to today."""

    text: str
    result: "Decimal | int | float | str"


Value = None | str | Decimal | int | float | date | Formula
"""What a cell holds. A float must be the nearest one to a decimal of at most 15 digits."""


class Row(NamedTuple):
    """Values from column A on, and a style for each; missing styles are plain."""

    values: Sequence[Value]
    styles: Sequence[Style] = ()
    height: float | None = None
    outline: int = 0


@dataclass(frozen=True, eq=False)
class Sheet:
    """A sheet to be written.

    length:       how many rows `rows` will give
    frozen:       top-left cell of the part that scrolls, None for none
    filtered:     range with filter arrows, headings included
    repeated:     rows repeated on every printed page, such as "1:1"
    breaks:       rows after which a new page begins
    finish:       what else is done to the openpyxl sheet: charts, conditional formats
    """

    name: str
    widths: Sequence[float]
    rows: Iterable[Row]
    length: int
    frozen: str | None = None
    filtered: str | None = None
    repeated: str | None = None
    breaks: Sequence[int] = ()
    landscape: bool = True
    header: str = ""
    tab: str | None = None
    finish: Callable[[Any], None] | None = field(default=None)


def fits_a_number(decimal: Decimal) -> bool:
    """Whether a spreadsheet number keeps every digit of `decimal`."""
    digits = decimal.as_tuple().digits
    if len(digits) <= MOST_DIGITS:
        return abs(decimal.adjusted()) < 300
    return len("".join(map(str, digits)).strip("0")) <= MOST_DIGITS and abs(decimal.adjusted()) < 300


def render(rows: Iterable[Row], style_id: Callable[[Style], int]) -> Iterator[str]:
    """The rows as XML, one string a row.

    rows: at most `MOST_ROWS`.
    style_id: the number that the workbook's style sheet gives a style.
    Raises ValueError when there are more rows than a sheet can hold.
    """
    letters: list[str] = []
    known: dict[tuple[int, int], tuple[Sequence[Style], list[str], list[str], list[bool]]] = {}
    for number, row in enumerate(rows, 1):
        if number > MOST_ROWS:
            raise ValueError(
                f"A sheet holds at most {MOST_ROWS:,} rows: split the table over several sheets."
            )
        width = len(row.values)
        while len(letters) < width:
            letters.append(get_column_letter(len(letters) + 1))
        key = (id(row.styles), width)
        if key not in known or known[key][0] is not row.styles:  # ids are reused once a list is gone
            padded = [*row.styles, *[Style()] * (width - len(row.styles))]
            known[key] = (
                row.styles,
                [f' s="{style_id(style)}"' for style in padded],
                [f' s="{style_id(style._replace(quoted=True))}"' for style in padded],
                [style.kind != "plain" for style in padded],
            )
        _, plain, quoted, seen_empty = known[key]
        cells = []
        for place, value in enumerate(row.values):
            if value is None:
                if seen_empty[place]:
                    cells.append(f'<c r="{letters[place]}{number}"{plain[place]}/>')
            elif isinstance(value, str):
                style = quoted[place] if starts_a_formula(value) else plain[place]
                cells.append(f'<c r="{letters[place]}{number}"{style}{_text(value)}')
            else:
                cells.append(f'<c r="{letters[place]}{number}"{plain[place]}{_rest(value)}')
        yield f'<row r="{number}"{_of_row(row)}>{"".join(cells)}</row>'


def _of_row(row: Row) -> str:
    height = "" if row.height is None else f' ht="{row.height:g}" customHeight="1"'
    return f'{height} outlineLevel="{row.outline}"' if row.outline else height


def _rest(value: Value) -> str:
    """The rest of a cell's element, after its place and style."""
    match value:
        case float():
            return f"><v>{value:.15g}</v></c>"
        case Formula():
            return _formula(value)
        case Decimal():
            text = canonical(value)
            return f"><v>{text}</v></c>" if fits_a_number(value) else _text(text)
        case bool():
            raise TypeError("A cell says yes in words, not as a truth value.")
        case int():
            return f"><v>{value}</v></c>"
        case date():
            if value < _FIRST_SAFE_DAY:
                return _text(value.isoformat())
            return f"><v>{(value - FIRST_DAY).days}</v></c>"
    raise TypeError(f"A cell cannot hold {type(value).__name__}.")


@lru_cache(maxsize=65_536)
def _text(text: str) -> str:
    """The rest of a text cell: most names stand in very many cells."""
    safe = escape(cell_text(text))
    keep = ' xml:space="preserve"' if safe != safe.strip() or "\n" in safe else ""
    return f' t="inlineStr"><is><t{keep}>{safe}</t></is></c>'


def _formula(formula: Formula) -> str:
    text, result = escape(formula.text), formula.result
    if isinstance(result, str):
        return f' t="str"><f>{text}</f><v>{escape(cell_text(result))}</v></c>'
    shown = canonical(result) if isinstance(result, Decimal) else f"{result:.15g}"
    return f"><f>{text}</f><v>{shown}</v></c>"
