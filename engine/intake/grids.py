"""Rates as a grid, depots down and customers across or the other way round, found by the names in it."""

import re
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import chain
from typing import Any

from engine.intake.cells import Sheet
from engine.intake.fields import CLOSED_WORDS, text_of
from engine.intake.headings import PRODUCT_WORDS, heading_of, is_heading_word, names_what
from engine.intake.names import folded
from engine.intake.numbers import is_blank
from engine.intake.recognise import candidate_rows, is_total
from engine.intake.units import currencies_of

_RATES = re.compile(r"rate|price|tariff|freight|cost|haulage|charge|quote")
_NO_RATES = re.compile(
    r"\b(distances?|kms?|kilomet\w+|miles|mileage|transit|hours|minutes|lead ?times?|volumes?|tonnages?|"
    r"quantit\w+|shipped|delivered|sent|moved|last week|history)\b"
)
_SAMPLE = 2000
"""So many names are looked at to tell which way round a grid is."""


@dataclass(frozen=True, eq=False)
class Grid:
    """A grid of rates.

    head: row of the names across; side: column of the names down; columns: the columns with a name across;
    rows: the rows with a name down; depots_down: whether the names down are depots; title: texts above and
    in the corner, which may say what the rates are in; totals: the names of rows and columns of totals
    that were left out; last_row, last_column: where it ends, totals included; product: the column that names
    each row's product, where there is one. Rows and columns count from 0.
    """

    sheet: Sheet
    head: int
    side: int
    columns: tuple[int, ...]
    rows: tuple[int, ...]
    depots_down: bool
    title: str
    totals: tuple[tuple[int, int], ...] = ()
    sure: bool = True
    last_row: int = 0
    last_column: int = 0
    product: int | None = None

    @cached_property
    def cells(self) -> list[Any]:
        """The raw cells of the grid, row after row."""
        if not self.columns:
            return []
        first, last = self.columns[0], self.columns[-1]
        rows = (self.sheet.rows[row] for row in self.rows)
        if last - first + 1 == len(self.columns):
            return list(chain.from_iterable(row[first : last + 1] for row in rows))
        return [row[column] for row in rows for column in self.columns]

    @cached_property
    def has_text(self) -> bool:
        """Whether any cell of the grid holds text, an empty cell included."""
        return any(issubclass(kind, str) for kind in set(map(type, self.cells)))

    def names_across(self) -> list[str]:
        row = self.sheet.rows[self.head]
        return [text_of(row[column]) for column in self.columns]

    def names_down(self) -> list[str]:
        return [text_of(self.sheet.rows[row][self.side]) for row in self.rows]


def find_grid(
    sheet: Sheet, depots: Iterable[str], customers: Iterable[str], from_row: int = 0
) -> Grid | None:
    """The grid of rates on a sheet, None where there is none.

    depots, customers: the names that are known, folded; with none known the words in the corner decide
    """
    known = {"depot": frozenset(depots), "customer": frozenset(customers)}
    best: tuple[int, int, int, bool, bool] | None = None
    for head in candidate_rows(sheet):
        if head < from_row:
            continue
        found = _by_names(sheet, head, known) or _by_corner(sheet, head, known)
        if found is not None and (best is None or found[0] > best[0]):
            score, side, depots_down, sure = found
            best = score, head, side, depots_down, sure
            if sure and score > 3 * len(sheet.rows[head]):
                break
    return None if best is None else _grid(sheet, *best[1:])


def may_be_rates(title: str) -> bool:
    """Whether a grid with these words above and in its corner may hold rates, not distances or tonnes."""
    words = folded(title)
    if _RATES.search(words) or any(currencies_of(word) for word in re.split(r"[\s/()]+", words)):
        return True
    return _NO_RATES.search(words) is None


def _by_names(
    sheet: Sheet, head: int, known: Mapping[str, frozenset[str]]
) -> tuple[int, int, bool, bool] | None:
    """Score, column of the names down, whether those are depots, and whether that is certain."""
    row = sheet.rows[head]
    names = {column: folded(text_of(cell)) for column, cell in enumerate(row[:_SAMPLE]) if _is_name(cell)}
    best: tuple[int, int, bool, bool] | None = None
    for across, down in (("customer", "depot"), ("depot", "customer")):
        hits = [column for column, name in names.items() if name in known[across]]
        if not hits or 2 * len(hits) < len(names) - 2:
            continue
        first = min(hits)
        below = sheet.rows[head + 1 : head + 1 + _SAMPLE]
        counts = Counter[int]()
        for column in range(max(0, first - 30), first):
            counts[column] = sum(
                folded(text_of(r[column])) in known[down] for r in below if _is_name(r[column])
            )
        if not counts or not max(counts.values()):
            continue
        side = max(counts, key=lambda column: (counts[column], column))
        score = len(hits) + counts[side]
        if best is not None and score == best[0]:
            return (
                score,
                side,
                names_what(text_of(row[side])) != "customer",
                bool(names_what(text_of(row[side]))),
            )
        if best is None or score > best[0]:
            best = score, side, down == "depot", True
    return best


def _by_corner(
    sheet: Sheet, head: int, known: Mapping[str, frozenset[str]]
) -> tuple[int, int, bool, bool] | None:
    """As `_by_names`, by a corner that says Depot or Customer and numbers below and to the right of it."""
    row = sheet.rows[head]
    side = next((column for column, cell in enumerate(row) if not is_blank(cell)), None)
    if side is None or not isinstance(row[side], str):
        return None
    what = names_what(row[side])
    across = [column for column in range(side + 1, min(len(row), side + 51)) if _is_name(row[column])]
    below = sheet.rows[head + 1 : head + 21]
    if not what or len(across) < 2 or any(is_heading_word(text_of(row[column])) for column in across):
        return None
    down = [text_of(r[side]) for r in below if _is_name(r[side])]
    other = "customer" if what == "depot" else "depot"
    for kind, names in ((what, down), (other, [text_of(row[column]) for column in across])):
        if known[kind] and not any(folded(name) in known[kind] for name in names):
            return None
    body = [r[column] for r in below for column in across if not is_blank(r[column])]
    rates = sum(_is_rate(cell) for cell in body)
    return (1, side, what == "depot", True) if down and body and 2 * rates > len(body) else None


def _grid(sheet: Sheet, head: int, side: int, depots_down: bool, sure: bool) -> Grid:
    row = sheet.rows[head]
    end = _end(sheet, head, side)
    product = next((c for c in range(min(len(row), side + 10)) if _is_product(row[c])), None)
    columns = []
    totals: list[tuple[int, int]] = []
    last = far = side
    for column in range(side + 1, len(row)):
        if is_blank(row[column]):
            continue
        text = text_of(row[column])
        if not text:
            continue
        if is_total(text):
            totals.append((head, column))
            far = max(far, column)
            continue
        if column == product:
            continue
        if column > last + 1 and not _has_rates(sheet, head, end, column):
            continue
        if not _has_rates(sheet, head, end, column) and _has_words(sheet, head, end, column):
            continue
        columns.append(column)
        last = column
        far = max(far, column)
    rows = []
    for number in range(head + 1, end):
        text = text_of(sheet.rows[number][side])
        if not text:
            continue
        if is_total(text):
            totals.append((number, side))
            continue
        rows.append(number)
    titles = [
        text_of(cell) for r in sheet.rows[max(0, head - 3) : head] for cell in r[:50] if isinstance(cell, str)
    ]
    titles += [text_of(row[column]) for column in range(side + 1) if isinstance(row[column], str)]
    title = " ".join([sheet.name, *(text for text in titles if text)])
    return Grid(
        sheet, head, side, tuple(columns), tuple(rows), depots_down, title, tuple(totals), sure, end - 1, far,
        product,
    )  # fmt: skip


def _is_product(cell: Any) -> bool:
    return isinstance(cell, str) and heading_of(cell).words in PRODUCT_WORDS


def _end(sheet: Sheet, head: int, side: int) -> int:
    """Where the grid ends: below its last row that has a name and anything else."""
    rows = sheet.rows
    for number in range(len(rows) - 1, head, -1):
        row = rows[number]
        if not is_blank(row[side]) and any(not is_blank(cell) for cell in row[side + 1 :]):
            return number + 1
    return head + 1


def _is_name(cell: Any) -> bool:
    return not is_blank(cell) and not isinstance(cell, bool)


def _is_rate(cell: Any) -> bool:
    if isinstance(cell, (int, float)):
        return True
    return isinstance(cell, str) and (
        any(c.isdigit() for c in cell) or cell.strip().casefold() in CLOSED_WORDS
    )


def _column_cells(sheet: Sheet, head: int, end: int, column: int) -> Sequence[Any]:
    return [row[column] for row in sheet.rows[head + 1 : min(end, head + 201)]]


def _has_rates(sheet: Sheet, head: int, end: int, column: int) -> bool:
    return any(map(_is_rate, _column_cells(sheet, head, end, column)))


def _has_words(sheet: Sheet, head: int, end: int, column: int) -> bool:
    return any(not is_blank(cell) for cell in _column_cells(sheet, head, end, column))
