"""Where the tables stand: lists found by their headings, wherever they start, however sheets are called."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from engine.intake.cells import Sheet
from engine.intake.dittos import NAME_FIELDS, written_out
from engine.intake.fields import text_of
from engine.intake.headings import (
    COLUMNS_OF,
    field_of,
    heading_of,
    is_heading_word,
    is_plan_heading,
    is_unit_mark,
)
from engine.intake.names import folded
from engine.intake.numbers import is_blank

_TOP_ROWS = 60
"""Headings are looked for in so many rows from the top, and below every blank row."""

_MOST_HEADINGS = 200
_ORDER = ("gone", "rates", "depots", "customers", "hauliers", "rules")
_OF_LANES = ("depot", "customer", "rate")
"""Fields of rate rows: a list with one of them is none of hauliers."""
_FROM = re.compile(r"^(rates?\b[ :]*)?((from|ex|of|depot)\b[ :]*)?|[ :]*\brates?$", re.IGNORECASE)
_TOTAL = re.compile(r"(grand |sub-?|sub )?totals?\b.*|sums?\b.*|all (depots|customers)|.* totals?|σ|∑|Σ")


@dataclass(frozen=True, eq=False)
class Table:
    """A list with headings: which column fills which field, and the rows that belong to it.

    head: row of the headings; end: first row after the table; left, right: its columns, the last included;
    columns: column of each field; unread: columns whose headings nobody knows; depot: the depot that all
    rows are of, where the list has no column for it; haulier: whose rates these are, where each haulier has
    a column of rates of its own; beside: the columns of the others. Rows and columns count from 0.
    """

    kind: str
    sheet: Sheet
    head: int
    end: int
    left: int
    right: int
    columns: Mapping[str, int]
    headings: Mapping[int, str]
    unread: tuple[int, ...] = ()
    depot: str = ""
    haulier: str = ""
    beside: frozenset[int] = frozenset()

    def cells(self, field_name: str) -> list[Any]:
        """The raw cells of a field, one for each row below the headings; ditto marks are written out."""
        column = self.columns[field_name]
        cells = [row[column] for row in self.sheet.rows[self.head + 1 : self.end]]
        return written_out(cells) if field_name in NAME_FIELDS else cells


@dataclass(frozen=True, eq=False)
class Partial:
    """A row that has some headings of a table and lacks a needed one."""

    kind: str
    sheet: Sheet
    head: int
    missing: tuple[str, ...]
    headings: Mapping[int, str]
    columns: Mapping[str, int] = field(default_factory=dict)

    @property
    def known(self) -> frozenset[int]:
        return frozenset(self.columns.values())


@dataclass(frozen=True, eq=False)
class Found:
    """What was recognised on the sheets, and the sheets that hold a plan and are left alone."""

    tables: tuple[Table, ...] = ()
    partials: tuple[Partial, ...] = ()
    plans: tuple[Sheet, ...] = ()
    others: tuple[Sheet, ...] = field(default=())


def find_tables(sheets: Sequence[Sheet], taught: Mapping[str, Mapping[str, str]] | None = None) -> Found:
    """The lists on the sheets.

    taught: for each kind of table the desk's own words, folded, and the field that each stands for
    """
    taught = taught or {}
    tables: list[Table] = []
    partials: list[Partial] = []
    plans: list[Sheet] = []
    others: list[Sheet] = []
    for sheet in sheets:
        heads = _heads(sheet, taught)
        if any(is_plan_heading(text) for _, texts in heads for text in texts.values()):
            plans.append(sheet)
            continue
        found = [table for head, texts in heads for table in _tables_at(sheet, head, texts, taught)]
        tables.extend(_ended(found))
        if not found:
            partials.extend(
                partial for head, texts in heads for partial in _partials_at(sheet, head, texts, taught)
            )
            others.append(sheet)
    return Found(tuple(tables), tuple(partials), tuple(plans), tuple(others))


def of_one_depot(partial: Partial, depots: Mapping[str, str]) -> Table | None:
    """A list of rates without a column for the depot, where the sheet's name or a title says which it is.

    depots: the names that are known, by their folded form
    """
    if partial.kind != "rates" or partial.missing != ("Depot",):
        return None
    sheet = partial.sheet
    titles = [
        sheet.name,
        *(text_of(c) for row in sheet.rows[: partial.head] for c in row if isinstance(c, str)),
    ]
    for title in titles:
        for text in (title, title.rpartition(":")[2], _FROM.sub("", title)):
            depot = depots.get(folded(text))
            if depot is not None:
                left, right = min(partial.headings), max(partial.headings)
                unread = tuple(column for column in partial.headings if column not in partial.known)
                return Table(
                    "rates",
                    sheet,
                    partial.head,
                    len(sheet.rows),
                    left,
                    right,
                    partial.columns,
                    partial.headings,
                    unread,
                    depot,
                )
    return None


def candidate_rows(sheet: Sheet) -> list[int]:
    """Rows that may hold headings: those near the top and those that follow a blank row."""
    rows = sheet.rows
    top = min(_TOP_ROWS, len(rows))
    blank_before = [
        number + 1
        for number in range(top - 1, len(rows) - 1)
        if not rows[number][0] and not any(map(_filled, rows[number]))
    ]
    return [*range(top), *(number for number in blank_before if number >= top)]


def is_total(text: str) -> bool:
    """Whether a name in a list is that of a row of totals."""
    name = folded(text)
    if "total" not in name and name[:1] not in "saσ∑(":
        return False
    return _TOTAL.fullmatch(name.strip(" :.")) is not None


def _filled(cell: Any) -> bool:
    return cell != "" and not is_blank(cell)


def _heads(sheet: Sheet, taught: Mapping[str, Mapping[str, str]]) -> list[tuple[int, dict[int, str]]]:
    """Rows with two or more known headings, and the headings in them.

    A heading cell left blank takes the text above it: headings merged over two rows.
    """
    own_words = {word for words in taught.values() for word in words}
    heads: list[tuple[int, dict[int, str]]] = []
    whole: set[int] = set()
    for number in candidate_rows(sheet):
        row = sheet.rows[number]
        texts = {
            column: text_of(cell)
            for column, cell in enumerate(row)
            if isinstance(cell, str) and cell != "" and not is_blank(cell)
        }
        if len(texts) > _MOST_HEADINGS:
            continue
        known = {
            column for column, text in texts.items() if is_heading_word(text) or folded(text) in own_words
        }
        if len(known) < 2 and not (known and number and _heading_above(sheet.rows[number - 1])):
            continue
        if number and number - 1 in whole and _second_row(sheet.rows[number], texts, known):
            texts = dict(sorted((heads.pop()[1] | texts).items()))
        elif number and number - 1 not in whole:
            texts |= _from_above(sheet, number, texts)
        if any(_complete(kind, _matched(kind, list(texts), texts, taught)) for kind in _ORDER):
            whole.add(number)
        units = _units_below(sheet, number, texts)
        texts |= {column: f"{texts[column]} ({unit})" for column, unit in units.items()}
        heads.append((number + bool(units), dict(sorted(texts.items()))))
    return heads


def _units_below(sheet: Sheet, number: int, texts: Mapping[int, str]) -> dict[int, str]:
    """The units in the row below headings, where that row holds nothing else; {} where it is no such row."""
    if number + 1 >= len(sheet.rows):
        return {}
    cells = {c: cell for c, cell in enumerate(sheet.rows[number + 1]) if not is_blank(cell)}
    if not cells or not all(isinstance(cell, str) and is_unit_mark(cell) for cell in cells.values()):
        return {}
    if not all(c in texts and not heading_of(texts[c]).unit for c in cells):
        return {}
    return {c: text_of(cell).strip(" ()[]") for c, cell in cells.items()}


def _second_row(row: Sequence[Any], texts: Mapping[int, str], known: set[int]) -> bool:
    """Whether a row below headings holds nothing but headings: the second row of merged ones."""
    filled = sum(not is_blank(cell) for cell in row)
    return len(known) == len(texts) == filled and len(known) >= 2


def _from_above(sheet: Sheet, number: int, texts: Mapping[int, str]) -> dict[int, str]:
    """Heading texts of the row above, for cells that are blank in a row of headings and beside it."""
    above, row = sheet.rows[number - 1], sheet.rows[number]
    first, last = min(texts), max(texts)
    found = {}
    for column in range(max(0, first - 1), min(len(above), last + 2)):
        cell = above[column]
        if column in texts or not is_blank(row[column]) or not isinstance(cell, str) or is_blank(cell):
            continue
        if first <= column <= last or is_heading_word(text_of(cell)):
            found[column] = text_of(cell)
    return found


def _heading_above(row: Sequence[Any]) -> bool:
    return (
        sum(isinstance(cell, str) and cell != "" and is_heading_word(text_of(cell)) for cell in row[:50]) >= 1
    )


def _runs(texts: Mapping[int, str]) -> list[list[int]]:
    """Columns with headings, cut where a column has none."""
    runs: list[list[int]] = []
    for column in texts:
        if runs and column == runs[-1][-1] + 1:
            runs[-1].append(column)
        else:
            runs.append([column])
    return runs


def _tables_at(
    sheet: Sheet, head: int, texts: Mapping[int, str], taught: Mapping[str, Mapping[str, str]]
) -> list[Table]:
    runs = _runs(texts)
    tables: list[Table] = []
    for run in runs:
        kinds = [kind for kind in _ORDER if _complete(kind, _matched(kind, run, texts, taught))]
        if "hauliers" in kinds and set(_OF_LANES) & set(_matched("rates", run, texts, taught)):
            kinds.remove("hauliers")
        if kinds:
            if kinds[0] in ("gone", "rates") or len(kinds) == 1:
                kinds = kinds[:1]
            tables.extend(_split(sheet, head, texts, run, kinds, taught))
        elif tables:  # headings past a blank column go with the list on their left
            last = tables.pop()
            tables.extend(
                _split(sheet, head, texts, [*range(last.left, last.right + 1), *run], [last.kind], taught)
            )
    if not tables:
        whole = list(texts)
        for kind in _ORDER:
            if kind != "hauliers" and _complete(kind, _matched(kind, whole, texts, taught)):
                return _split(sheet, head, texts, whole, [kind], taught)
    return tables


def _split(
    sheet: Sheet,
    head: int,
    texts: Mapping[int, str],
    run: Sequence[int],
    kinds: Sequence[str],
    taught: Mapping[str, Mapping[str, str]],
) -> list[Table]:
    """The tables of a run of headings; two that touch part where the second one's names begin."""
    starts = sorted((_matched(kind, run, texts, taught)[COLUMNS_OF[kind][0].field], kind) for kind in kinds)
    tables = []
    for number, (start, kind) in enumerate(starts):
        first = run[0] if number == 0 else start
        last = run[-1] if number == len(starts) - 1 else starts[number + 1][0] - 1
        part = [column for column in run if first <= column <= last]
        columns = _matched(kind, part, texts, taught)
        if not _complete(kind, columns):
            continue
        headings = {column: texts[column] for column in part if column in texts}
        unread = tuple(column for column in headings if column not in columns.values())
        tables.append(Table(kind, sheet, head, len(sheet.rows), first, last, columns, headings, unread))
    return tables


def _matched(
    kind: str, run: Sequence[int], texts: Mapping[int, str], taught: Mapping[str, Mapping[str, str]]
) -> dict[str, int]:
    """The column of each field; our own heading goes before other words for the same field."""
    exact = {folded(column.heading): column.field for column in COLUMNS_OF[kind]}
    matched: dict[str, int] = {}
    for column in run:
        name = exact.get(folded(texts.get(column, "")))
        if name is not None:
            matched.setdefault(name, column)
    for column in run:
        name = field_of(kind, texts.get(column, ""), taught.get(kind))
        if name is not None and column not in matched.values():
            matched.setdefault(name, column)
    return matched


def _complete(kind: str, matched: Mapping[str, int]) -> bool:
    if kind == "hauliers" and not {"at_most", "load_size"} & set(matched):
        return False  # a list of names alone says nothing
    return all(column.field in matched for column in COLUMNS_OF[kind] if column.needed)


def _partials_at(
    sheet: Sheet, head: int, texts: Mapping[int, str], taught: Mapping[str, Mapping[str, str]]
) -> list[Partial]:
    partials = []
    for kind in _ORDER:
        matched = _matched(kind, list(texts), texts, taught)
        needed = [column for column in COLUMNS_OF[kind] if column.needed]
        missing = tuple(column.heading for column in needed if column.field not in matched)
        if kind == "gone" and "quantity" not in matched:
            continue  # a depot, a customer and a haulier are in many lists
        if missing and len(missing) < len(needed) and len(matched) >= 2:
            partials.append(Partial(kind, sheet, head, missing, texts, matched))
    return partials


def _ended(tables: list[Table]) -> list[Table]:
    """The tables, each ending where the next one below it in the same columns has its headings."""
    ended = []
    for table in tables:
        below = [
            other.head
            for other in tables
            if other.head > table.head and other.left <= table.right and table.left <= other.right
        ]
        ended.append(replace(table, end=min([table.end, *below])))
    return ended
