"""Rates from lists and grids: columns of the sheet become columns of the rate table, never row by row."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.columns import Column
from engine.exact import BLANK, DecimalColumn
from engine.figures import Hold, RateKey
from engine.findings import Finding, Severity
from engine.intake.build_lists import Unused
from engine.intake.cells import address
from engine.intake.column_reader import Problems, read_decimals, read_values
from engine.intake.conversion import converted
from engine.intake.dittos import AS_ABOVE, filled_down
from engine.intake.fields import CLOSED_WORDS, NUMBER_KINDS, text_of
from engine.intake.grids import Grid
from engine.intake.headings import column_of, heading_of
from engine.intake.manner import Manner
from engine.intake.names import folded
from engine.intake.numbers import ErrorCell, FormulaCell, is_blank, spoilt
from engine.intake.places import RateRows
from engine.intake.recognise import Table, is_total
from engine.intake.remarks import Counts, Remark, gathered
from engine.rates import DECIMAL_FIELDS, NO_CODE, Rates, RateTable

_CLOSED: Mapping[str, None] = dict.fromkeys(CLOSED_WORDS)
_NO_NAME, _TOTAL = -1, -2
_MOST_UNUSED = 1000

Codes = npt.NDArray[np.int32]


class Names:
    """Names in order of appearance, spelled as known, and the code of each way of writing them."""

    def __init__(self, known: Sequence[str], what: str, manner: Manner) -> None:
        self.spelled: list[str] = []
        self._known = {folded(name): name for name in known}
        self._codes: dict[str, int] = {}
        self._what, self._answers = what, manner.answers

    def code(self, raw: Any) -> int:
        """The code of a cell's name; negative where it is blank or that of a row of totals."""
        text = text_of(raw)
        if not text:
            return _NO_NAME
        key = folded(text)
        if key not in self._known:
            if is_total(text):
                return _TOTAL
            answer = self._answers.to("unknown name", f"{self._what}: {key}") if self._what else None
            key = folded(answer) if answer else key
        code = self._codes.get(key)
        if code is None:
            code = self._codes[key] = len(self.spelled)
            self.spelled.append(self._known.get(key, text))
        return code

    def codes(self, cells: Sequence[Any]) -> Codes:
        """The code of each cell of a column."""
        found: dict[Any, int] = {}
        for raw in dict.fromkeys(cells):
            found[raw] = self.code(raw)
        return np.fromiter(map(found.__getitem__, cells), dtype=np.int32, count=len(cells))


@dataclass(frozen=True, eq=False)
class BuiltRates:
    """The rates of all tables and what belongs to them."""

    rates: Rates
    holds: Mapping[RateKey, Hold]
    rows: tuple[RateRows, ...]
    findings: tuple[Finding, ...]
    counts: Counts
    unused: tuple[Unused, ...] = ()


@dataclass(frozen=True, eq=False)
class _Part:
    """The rate rows of one table, in columns."""

    depot: Codes
    customer: Codes
    haulier: Codes
    rate: DecimalColumn
    per_load: npt.NDArray[np.bool_]
    closed: npt.NDArray[np.bool_]
    decimals: Mapping[str, DecimalColumn]
    valid_from: Codes | None
    rows: RateRows
    findings: list[Finding]
    counts: Counts
    holds: list[tuple[int, Hold]] = field(default_factory=list)
    unused: list[Unused] = field(default_factory=list)


def build_rates(
    tables: Sequence[Table],
    grids: Sequence[Grid],
    depots: Sequence[str],
    customers: Sequence[str],
    manner: Manner,
) -> BuiltRates:
    """The rates of all lists and grids, names spelled as among the depots and customers."""
    names = Names(depots, "depot", manner), Names(customers, "customer", manner), Names((), "", manner)
    parts: list[_Part] = []
    start = 0
    for table in tables:
        parts.append(_list(table, start, names, manner))
        start += len(parts[-1].depot)
    for grid in grids:
        parts.append(_grid(grid, start, names, manner))
        start += len(parts[-1].depot)
    findings = list(dict.fromkeys(finding for part in parts for finding in part.findings))
    counts = Counts()
    for part in parts:
        counts = counts.plus(part.counts)
    rates = Rates(_stacked(parts, names)) if parts else Rates()
    holds = {
        rates.key_of(part.rows.start + position): hold for part in parts for position, hold in part.holds
    }
    unused = tuple(row for part in parts for row in part.unused)
    return BuiltRates(rates, holds, tuple(part.rows for part in parts), tuple(findings), counts, unused)


def _stacked(parts: Sequence[_Part], names: tuple[Names, Names, Names]) -> RateTable:
    """One table of the parts below each other."""
    rate = parts[0].rate
    for part in parts[1:]:
        rate = rate.joined(part.rate)
    decimals: dict[str, DecimalColumn] = {}
    for name in DECIMAL_FIELDS:
        if any(name in part.decimals for part in parts):
            columns = [part.decimals.get(name, DecimalColumn.blank(len(part.depot))) for part in parts]
            decimals[name] = columns[0]
            for column in columns[1:]:
                decimals[name] = decimals[name].joined(column)
    days = None
    if any(part.valid_from is not None for part in parts):
        none = [np.full(len(part.depot), NO_CODE, dtype=np.int32) for part in parts]
        days = np.concatenate(
            [n if p.valid_from is None else p.valid_from for n, p in zip(none, parts, strict=True)]
        )
    return RateTable(
        tuple(names[0].spelled),
        tuple(names[1].spelled),
        tuple(names[2].spelled),
        np.concatenate([part.depot for part in parts]),
        np.concatenate([part.customer for part in parts]),
        np.concatenate([part.haulier for part in parts]),
        rate=rate,
        per_load=np.concatenate([part.per_load for part in parts]),
        closed=np.concatenate([part.closed for part in parts]),
        decimals=decimals,
        valid_from=days,
    )


def _grid(grid: Grid, start: int, names: tuple[Names, Names, Names], manner: Manner) -> _Part:
    column = column_of("rates", "rate")
    down, across = (names[0], names[1]) if grid.depots_down else (names[1], names[0])
    side, top = down.codes(grid.names_down()), across.codes(grid.names_across())
    read = read_decimals(column, grid.cells, manner.style(grid, "rate"), _CLOSED)
    rate = converted(read.column, manner.factor(grid, "rate"))
    width = len(grid.columns)
    remarks = [
        Remark(position, "rate", finding, finding.severity is Severity.STOPS)
        for position, finding in read.problems
    ]
    sheet_rows, sheet_columns = np.array(grid.rows, dtype=np.int64), np.array(grid.columns, dtype=np.int64)
    findings, named = _gathered_cells(remarks, grid, width)
    there = np.flatnonzero(rate.values != BLANK)
    row, place = np.divmod(there, max(1, width))
    empty = _empty(grid.cells) if grid.has_text else 0
    counts = Counts(len(grid.cells) - empty, len(grid.cells) - empty - named, named)
    depot, customer = (side[row], top[place]) if grid.depots_down else (top[place], side[row])
    heading = heading_of(grid.title)
    per_load = heading.per_load or _says_per_load(grid.title)
    return _Part(
        depot,
        customer,
        np.full(len(there), NO_CODE, dtype=np.int32),
        rate.taken(there),
        np.full(len(there), per_load, dtype=bool),
        np.zeros(len(there), dtype=bool),
        {},
        None,
        RateRows(start, grid.sheet, sheet_rows[row], {}, sheet_columns[place]),
        [*findings, *_grid_notes(grid)],
        counts,
        unused=_unused_cells(grid, [remark.row for remark in remarks if remark.sets_aside][:_MOST_UNUSED]),
    )


def _empty(cells: Sequence[Any]) -> int:
    return sum(type(cell) is str and (cell == "" or is_blank(cell)) for cell in cells)


def _gathered_cells(remarks: list[Remark], grid: Grid, width: int) -> tuple[list[Finding], int]:
    """Remarks on grid cells, whose row in the remark is the position of the cell."""
    by_row = {remark.row: remark for remark in remarks}
    findings: list[Finding] = []
    named = sum(remark.sets_aside for remark in by_row.values())
    if remarks:
        placed = [
            (grid.rows[remark.row // width], grid.columns[remark.row % width], remark) for remark in remarks
        ]
        for column in sorted({column for _, column, _ in placed}):
            here = [remark._replace(row=row) for row, c, remark in placed if c == column]
            found, _ = gathered(here, grid.sheet, lambda _, column=column: column)  # type: ignore[misc]
            findings.extend(found)
    return findings, named


def _says_per_load(title: str) -> bool:
    words = folded(title).replace("/", " per ")
    return any(f"per {word}" in words for word in ("load", "truck", "trip", "vehicle", "lorry"))


def _unused_cells(grid: Grid, positions: Sequence[int]) -> list[Unused]:
    if not positions:
        return []
    down, across = grid.names_down(), grid.names_across()
    names = ("depot", "customer") if grid.depots_down else ("customer", "depot")
    return [
        Unused(
            "rates",
            {
                names[0]: down[position // len(across)],
                names[1]: across[position % len(across)],
                "rate": text_of(grid.cells[position]),
            },
        )
        for position in positions
    ]


def _grid_notes(grid: Grid) -> list[Finding]:
    if not grid.totals:
        return []
    return [
        Finding(
            Severity.NOTE,
            "total left out",
            f"Totals in the grid were left out: {', '.join(address(*place) for place in grid.totals[:5])}.",
            file=grid.sheet.file,
            sheet=grid.sheet.name,
            cell=address(*grid.totals[0]),
        )
    ]


def _list(table: Table, start: int, names: tuple[Names, Names, Names], manner: Manner) -> _Part:
    count = table.end - table.head - 1
    remarks: list[Remark] = []
    first = table.head + 1
    cells = {name: table.cells(name) for name in table.columns}
    for name in ("depot", "customer"):
        if manner.answers.to("no name", f"rates: {name} left blank") == AS_ABOVE and name in cells:
            whole = [any(not is_blank(cell) for cell in row) for row in table.sheet.rows[first : table.end]]
            cells[name] = filled_down(cells[name], whole)
    depot = (
        names[0].codes(cells["depot"])
        if "depot" in cells
        else np.full(count, names[0].code(table.depot), dtype=np.int32)
    )
    customer = names[1].codes(cells["customer"])
    haulier = (
        names[2].codes(cells["haulier"]) if "haulier" in cells else np.full(count, NO_CODE, dtype=np.int32)
    )
    haulier[haulier < 0] = NO_CODE
    if table.haulier:
        haulier[:] = names[2].code(table.haulier)
    numbers, values = _columns(table, cells, manner, remarks)
    rate = numbers["rate"]
    closed = np.array(values.get("closed", [False] * count), dtype=bool)
    per_load = _per_load(table, values, count)
    read, aside = _rows_read(table, cells, depot, customer, rate, closed, remarks)
    kept = np.flatnonzero(read & ~aside & (rate.values != BLANK))
    findings, named = gathered(
        remarks, table.sheet, lambda remark: table.columns.get(remark.field, table.left)
    )
    total = int(read.sum())
    decimals = {
        name: numbers[name].taken(kept)
        for name in DECIMAL_FIELDS
        if name in numbers and (numbers[name].values[kept] != BLANK).any()
    }
    days = [NO_CODE if day is None else day.toordinal() for day in values.get("valid_from", [])]
    return _Part(
        depot[kept],
        customer[kept],
        haulier[kept],
        rate.taken(kept),
        per_load[kept],
        closed[kept],
        decimals,
        np.array(days, dtype=np.int32)[kept] if any(day != NO_CODE for day in days) else None,
        RateRows(start, table.sheet, kept + first, table.columns),
        findings,
        Counts(total, total - named, named),
        _holds(numbers, values, kept),
        _unused(table, cells, np.flatnonzero(read & aside)),
    )


def _columns(
    table: Table, cells: Mapping[str, Sequence[Any]], manner: Manner, remarks: list[Remark]
) -> tuple[dict[str, DecimalColumn], dict[str, list[Any]]]:
    """The columns of numbers and of other values; names apart."""
    numbers: dict[str, DecimalColumn] = {}
    values: dict[str, list[Any]] = {}
    for name in table.columns:
        column: Column = column_of("rates", name)
        if name in ("depot", "customer", "haulier"):
            problems = _spoilt(cells[name])
        elif column.kind in NUMBER_KINDS:
            words = _CLOSED if name == "rate" else None
            found = read_decimals(column, cells[name], manner.style(table, name), words)
            numbers[name], problems = converted(found.column, manner.factor(table, name)), found.problems
        else:
            values[name], problems = read_values(column, cells[name], manner.style(table, name))
        needed = name in ("depot", "customer", "rate")
        for position, finding in problems:
            aside = needed and finding.severity is Severity.STOPS
            remarks.append(Remark(table.head + 1 + position, name, finding, aside))
    return numbers, values


def _spoilt(cells: Sequence[Any]) -> Problems:
    """What there is to say of the names in a column: that a cell holds an error instead."""
    if not {ErrorCell, FormulaCell} & set(map(type, cells)):
        return []
    return [(at, spoilt(raw)) for at, raw in enumerate(cells) if isinstance(raw, ErrorCell | FormulaCell)]


def _per_load(table: Table, values: Mapping[str, list[Any]], count: int) -> npt.NDArray[np.bool_]:
    """Rows priced per load: as *Per* says, or as the heading of *Rate* does where *Per* is blank."""
    heading = table.headings.get(table.columns["rate"], "")
    by_heading = heading_of(heading).per_load or _says_per_load(heading)
    if "per" not in values:
        return np.full(count, by_heading, dtype=bool)
    flags: npt.NDArray[np.bool_] = np.array([value == "load" for value in values["per"]], dtype=bool)
    if by_heading:
        column = table.columns["per"]
        rows = table.sheet.rows[table.head + 1 : table.end]
        flags |= np.array([is_blank(row[column]) for row in rows], dtype=bool)
    return flags


def _rows_read(
    table: Table,
    cells: Mapping[str, Sequence[Any]],
    depot: Codes,
    customer: Codes,
    rate: DecimalColumn,
    closed: npt.NDArray[np.bool_],
    remarks: list[Remark],
) -> tuple[npt.NDArray[np.bool_], npt.NDArray[np.bool_]]:
    """Which rows hold anything, and which of them cannot be used, each with a remark that says why."""
    first = table.head + 1
    aside = np.zeros(len(depot), dtype=bool)
    for remark in remarks:
        if remark.sets_aside:
            aside[remark.row - first] = True
    read = np.ones(len(depot), dtype=bool)
    no_rate = rate.values == BLANK
    for position in np.flatnonzero((depot < 0) | (customer < 0) | (no_rate & ~closed)).tolist():
        if aside[position]:
            continue
        cells_here = table.sheet.rows[first + position][table.left : table.right + 1]
        filled = [cell for cell in cells_here if not is_blank(cell)]
        if not filled:
            read[position] = False
            continue
        finding, name = _fault(
            int(depot[position]),
            int(customer[position]),
            cells["rate"][position],
            filled,
            bool(no_rate[position]),
        )
        if finding is not None and finding.rule == "no rate" and table.beside:
            row = table.sheet.rows[first + position]
            elsewhere = any(not is_blank(row[column]) for column in table.beside)
            if elsewhere or min(table.beside) < table.columns["rate"]:
                finding = None  # another haulier has the lane, or it was said with the first one
        if finding is not None:
            aside[position] = True
            remarks.append(Remark(first + position, name, finding, True))
    return read, aside


def _fault(
    depot: int, customer: int, raw: Any, filled: list[Any], no_rate: bool
) -> tuple[Finding | None, str]:
    """Why a row of a list of rates cannot be used, None where its rate says that there is no lane."""
    text = text_of(filled[0])[:60]
    if _TOTAL in (depot, customer):
        return Finding(
            Severity.NOTE, "total left out", f"'{text}' was taken as a row of totals and left out.", read=text
        ), "depot"
    if len(filled) == 1 and isinstance(filled[0], str):
        return Finding(
            Severity.NOTE, "remark left out", f"'{text}' was taken as a remark.", read=text
        ), "depot"
    if _NO_NAME in (depot, customer):
        what = "depot" if depot == _NO_NAME else "customer"
        return Finding(
            Severity.STOPS,
            "no name",
            f"A rate row names no {what}.",
            f"Type the {what}, clear the row, or say that it is the {what} of the row above.",
            read=text,
            subject=f"rates: {what} left blank",
            options=(AS_ABOVE,),
        ), what
    if no_rate and is_blank(raw):
        return Finding(
            Severity.CHECK,
            "no rate",
            "A row has no rate: the lane was left out, as if closed.",
            "Type the rate, or type closed to confirm.",
        ), "rate"
    return None, "rate"


def _holds(
    numbers: Mapping[str, DecimalColumn], values: Mapping[str, list[Any]], kept: npt.NDArray[np.int64]
) -> list[tuple[int, Hold]]:
    if "hold" not in numbers:
        return []
    reasons = values.get("hold_reason")
    found = []
    for place in np.flatnonzero(numbers["hold"].values[kept] != BLANK).tolist():
        row = int(kept[place])
        quantity = numbers["hold"].get(row)
        if quantity is not None:
            found.append((place, Hold(quantity, (reasons[row] if reasons else None) or "")))
    return found


def _unused(table: Table, cells: Mapping[str, Sequence[Any]], rows: npt.NDArray[np.int64]) -> list[Unused]:
    return [
        Unused(
            "rates",
            {name: text_of(column[row]) for name, column in cells.items() if not is_blank(column[row])},
        )
        for row in rows[:_MOST_UNUSED].tolist()
    ]
