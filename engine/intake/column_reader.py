"""Whole columns of cells to values: the same rules as for one cell, fast where cells are plain numbers.

A workbook's plain numbers that no rule could object to are turned into exact integers all at once;
every other cell goes through `read_field`.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.columns import Column, Kind
from engine.exact import BLANK, LARGEST, DecimalColumn, places_needed, to_integer
from engine.findings import Finding, Severity
from engine.intake.fields import NOT_NEGATIVE, blank_value, read_field
from engine.intake.numbers import NumberStyle, is_blank

_PLACES = 9
"""Decimal places tried for all numbers of a column at once."""

_SAFE = 1e15
"""Below this, an integer over a power of ten is the only decimal of 15 digits that prints the number."""

Problems = list[tuple[int, Finding]]
"""What there is to say of single cells, with their position in the column."""


@dataclass(frozen=True, eq=False)
class Decimals:
    """A column of decimals as read: `column` with BLANK where a cell gave none, and what was found."""

    column: DecimalColumn
    problems: Problems


def read_values(column: Column, cells: Sequence[Any], style: NumberStyle) -> tuple[list[Any], Problems]:
    """The values of a column of any kind, one for each cell, and what there is to say of single cells."""
    known: dict[tuple[type, Any], tuple[Any, Finding | None]] = {}
    blank = blank_value(column)
    values: list[Any] = []
    problems: Problems = []
    for position, raw in enumerate(cells):
        if raw == "" and type(raw) is str:
            values.append(blank)
            continue
        key = type(raw), raw
        found = known.get(key)
        if found is None:
            found = known[key] = read_field(column, raw, style)
        values.append(found[0])
        if found[1] is not None:
            problems.append((position, found[1]))
    return values, problems


def read_decimals(
    column: Column, cells: Sequence[Any], style: NumberStyle, words: Mapping[str, None] | None = None
) -> Decimals:
    """A column of numbers as exact integers at one number of places.

    column: what the cells are; its kind says which rules hold
    words: texts, small letters, that stand for no number without a remark (closed lanes)
    """
    plain, others = _plain_numbers(column, cells)
    values, places = _as_integers(plain)
    slow = [int(position) for position in np.flatnonzero(others | (values == BLANK) & ~np.isnan(plain))]
    decimals, problems = _read_one_by_one(column, cells, slow, style, words or {})
    return Decimals(*_joined(column, values, places, decimals, problems, cells))


def _plain_numbers(
    column: Column, cells: Sequence[Any]
) -> tuple[npt.NDArray[np.float64], npt.NDArray[np.bool_]]:
    """The cells that are a workbook's plain numbers (NaN elsewhere), and which cells need a closer look."""
    types = set(map(type, cells))
    if types <= {float}:
        plain = np.array(cells, dtype=np.float64)
        others = np.zeros(len(cells), dtype=bool)
    else:
        raw = np.empty(len(cells), dtype=object)
        raw[:] = cells
        kinds = np.array([type(cell) is float for cell in cells], dtype=bool)
        plain = np.full(len(cells), np.nan)
        plain[kinds] = raw[kinds].astype(np.float64)
        others = ~kinds
        if str in types:
            others &= np.array([not (type(cell) is str and cell == "") for cell in cells], dtype=bool)
    doubtful = ~np.isfinite(plain) & ~np.isnan(plain)
    nan = np.isnan(plain)
    if types <= {float}:
        doubtful |= nan
    else:
        doubtful |= nan & np.array([type(cell) is float for cell in cells], dtype=bool)
    if column.kind in NOT_NEGATIVE:
        doubtful |= plain < 0
    elif column.kind is Kind.PERCENT:
        doubtful |= ~((plain >= 1) | (plain == 0)) & ~nan
    elif column.kind in (Kind.LATITUDE, Kind.LONGITUDE):
        doubtful |= np.abs(plain) > 90
    if column.kind is Kind.COUNT:
        doubtful |= (plain != np.rint(plain)) & ~nan
    plain[doubtful] = np.nan
    return plain, others | doubtful


def _as_integers(plain: npt.NDArray[np.float64]) -> tuple[npt.NDArray[np.int64], int]:
    """Numbers as integers at the fewest places that keep them all; BLANK where that is not certain.

    An integer below 1e15 over a power of ten up to 1e22 is divided with one correct rounding (IEEE 754), so
    where the quotient is the number itself, that decimal is the shortest one which prints it.
    """
    known = ~np.isnan(plain)
    left = np.flatnonzero(known)
    usual = _usual_places(plain[left[:500]])
    if len(left) == len(plain):
        scaled = np.rint(plain * 10.0**usual)
        if (scaled / 10.0**usual == plain).all() and np.abs(scaled).max(initial=0) < _SAFE:
            return scaled.astype(np.int64), usual
    values = np.full(len(plain), BLANK, dtype=np.int64)
    found: list[tuple[npt.NDArray[np.int64], npt.NDArray[np.int64], int]] = []
    for places in sorted(range(_PLACES + 1), key=lambda places: (places != usual, places)):
        if not len(left):
            break
        numbers = plain[left]
        scaled = np.rint(numbers * 10.0**places)
        sure = (np.abs(scaled) < _SAFE) & (scaled / 10.0**places == numbers)
        if sure.all():
            found.append((left, scaled.astype(np.int64), places))
            break
        found.append((left[sure], scaled[sure].astype(np.int64), places))
        left = left[~sure]
    places = max((p for where, _, p in found if len(where)), default=0)
    for where, integers, at in found:
        factor = 10 ** (places - at)
        fits = np.abs(integers) <= LARGEST // factor
        values[where[fits]] = integers[fits] * np.int64(factor)
    return values, places


def _usual_places(numbers: npt.NDArray[np.float64]) -> int:
    """The fewest places that keep the first numbers of a column."""
    for places in range(_PLACES + 1):
        if (np.rint(numbers * 10.0**places) / 10.0**places == numbers).all():
            return places
    return _PLACES


def _read_one_by_one(
    column: Column, cells: Sequence[Any], slow: list[int], style: NumberStyle, words: Mapping[str, None]
) -> tuple[list[tuple[int, Decimal]], Problems]:
    known: dict[tuple[type, Any], tuple[Any, Finding | None]] = {}
    decimals: list[tuple[int, Decimal]] = []
    problems: Problems = []
    for position in slow:
        raw = cells[position]
        key = type(raw), raw
        found = known.get(key)
        if found is None:
            silent = isinstance(raw, str) and (is_blank(raw) or " ".join(raw.casefold().split()) in words)
            found = known[key] = (None, None) if silent else read_field(column, raw, style)
        value, finding = found
        if value is not None:
            decimals.append((position, value))
        if finding is not None:
            problems.append((position, finding))
    return decimals, problems


def _joined(
    column: Column,
    values: npt.NDArray[np.int64],
    places: int,
    decimals: list[tuple[int, Decimal]],
    problems: Problems,
    cells: Sequence[Any],
) -> tuple[DecimalColumn, Problems]:
    """Both sorts of cells at one number of places; what cannot stand beside the others is refused."""
    known = values[values != BLANK]
    largest = int(np.abs(known).max(initial=0))
    distinct = list(dict.fromkeys(number for _, number in decimals))
    most = max([places, *map(places_needed, distinct)])
    reach = max([Decimal(largest).scaleb(-places), *map(abs, distinct)])
    while most > places and int(reach.scaleb(most)) > LARGEST // 4:
        most -= 1
    if most > places:
        values = DecimalColumn(values, places).rescaled(most)
    column_values = values.copy()
    integers = {number: to_integer(number, most) for number in distinct if _fits(number, most)}
    for position, number in decimals:
        integer = integers.get(number)
        if integer is None:
            problems.append((position, _too_fine(column, number)))
        else:
            column_values[position] = integer
    problems.sort(key=lambda problem: problem[0])
    return DecimalColumn(column_values, most), problems


def _fits(number: Decimal, places: int) -> bool:
    return places_needed(number) <= places and abs(number.scaleb(places)) <= LARGEST


def _too_fine(column: Column, number: Decimal) -> Finding:
    return Finding(
        Severity.STOPS,
        "too many digits",
        f"{number}: {column.heading} cannot hold so many decimals beside its other figures.",
        "Round it where it comes from.",
        read=str(number),
    )


def placed(finding: Finding, file: str, sheet: str, cell: str, rows: int = 0) -> Finding:
    """The finding with the place where it was made."""
    return replace(finding, file=file, sheet=sheet, cell=cell, rows=rows)
