"""What there is to say of sheets as such: what was left out, what is hidden, which headings nobody knows."""

from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from engine.findings import Finding, Severity
from engine.intake.cells import Sheet, address, column_letters
from engine.intake.fields import text_of
from engine.intake.grids import Grid
from engine.intake.headings import COLUMNS_OF, TITLES, column_of, field_of
from engine.intake.names import folded
from engine.intake.numbers import is_blank
from engine.intake.products import product_column
from engine.intake.recognise import Found, Partial, Table
from engine.intake.remarks import Counts, counted

WHICH_COLUMN = "which column"
LEAVE_OUT = "none of these"

_STOPPED = frozenset(
    {"cancelled", "canceled", "closed", "blocked", "void", "on hold", "stopped", "deleted", "rejected"}
)
"""Words that say of a row that it does not count."""

Area = tuple[int, int, int, int]
"""First row, row after the last, first column, last column."""


def about_sheets(
    found: Found, grids: Sequence[Grid], no_rates: Sequence[Grid] = ()
) -> tuple[list[Finding], Counts]:
    """Findings on sheets and on cells that belong to no table, with the rows that they name.

    no_rates: grids whose titles say that they hold something else than rates
    """
    others = {id(grid.sheet): grid for grid in no_rates}
    findings = list(_plans(found.plans))
    counts = Counts()
    in_grids = {id(grid.sheet) for grid in grids}
    read_kinds = {table.kind for table in found.tables} | ({"rates"} if grids else set())
    partly: set[int] = set()
    for partial in found.partials:
        sheet = partial.sheet
        if id(sheet) in in_grids or partial.kind in read_kinds or id(sheet) in partly:
            continue
        partly.add(id(sheet))
        rows = sum(not _blank_row(row) for row in sheet.rows[partial.head + 1 :])
        findings.append(_missing_heading(partial, rows))
        counts = counts.plus(Counts(rows, 0, rows))
    for sheet in found.others:
        rows = 0 if id(sheet) in in_grids | partly else sum(not _blank_row(row) for row in sheet.rows)
        if rows:
            findings.append(
                _no_rates(others[id(sheet)], rows) if id(sheet) in others else _not_understood(sheet, rows)
            )
            counts = counts.plus(Counts(rows, 0, rows))
    areas: dict[int, tuple[Sheet, list[Area]]] = {}
    for table in found.tables:
        area = table.head, table.end, table.left, table.right
        areas.setdefault(id(table.sheet), (table.sheet, []))[1].append(area)
    for grid in grids:
        last = max((*grid.columns, grid.last_column))
        area = grid.head, max((*grid.rows, grid.last_row)) + 1, grid.side, last
        areas.setdefault(id(grid.sheet), (grid.sheet, []))[1].append(area)
    for sheet, here in areas.values():
        findings.extend(_hidden(sheet))
        findings.extend(_merged(sheet, here))
        outside, rows = _outside(sheet, here)
        findings.extend(outside)
        counts = counts.plus(Counts(rows, 0, rows))
    return findings, counts


def about_headings(tables: Iterable[Table]) -> Iterator[Finding]:
    """Columns that nobody knows: not read, and asked about where they hold anything."""
    for table in tables:
        for column in range(table.left, table.right + 1):
            if column in table.columns.values() or column in table.beside or column == product_column(table):
                continue
            if table.haulier and table.beside and column > min(*table.beside, table.columns["rate"]):
                continue  # said with the first haulier's list, if it is not known
            rows = table.sheet.rows[table.head + 1 : table.end]
            if all(is_blank(row[column]) for row in rows):
                continue
            text = table.headings.get(column, "")
            taken = field_of(table.kind, text)
            if taken is not None and taken in table.columns:
                yield _second_column(table, column, taken)
                continue
            words = {folded(text_of(row[column])) for row in rows if isinstance(row[column], str)}
            stopped = sorted(words & _STOPPED)
            free = tuple(c.heading for c in COLUMNS_OF[table.kind] if c.field not in table.columns)
            what = f"The column '{text}'" if text else "A column without a heading"
            yield Finding(
                Severity.CHECK if stopped else Severity.NOTE,
                WHICH_COLUMN,
                f"{what} on {TITLES[table.kind]} is none that is known; it was not read"
                + (f", though it says '{stopped[0]}' of some rows." if stopped else "."),
                "Say which column it is, or leave it." if text else "Give it a heading if it holds figures.",
                table.sheet.file,
                table.sheet.name,
                address(table.head, column),
                text,
                subject=f"{table.kind}: {text}" if text else "",
                options=(*free, LEAVE_OUT) if text else (),
            )


def _second_column(table: Table, column: int, field: str) -> Finding:
    heading = column_of(table.kind, field).heading
    first = table.headings.get(table.columns[field], heading)
    return Finding(
        Severity.CHECK,
        "two columns",
        f"Two columns on {TITLES[table.kind]} may be {heading}: '{first}' was read, and "
        f"'{table.headings[column]}' was not.",
        "Take one of them out, or give it a heading of its own.",
        table.sheet.file,
        table.sheet.name,
        address(table.head, column),
        table.headings[column],
    )


def _plans(sheets: Sequence[Sheet]) -> Iterator[Finding]:
    """One note for the sheets of each file that hold a plan."""
    for file in dict.fromkeys(sheet.file for sheet in sheets):
        here = [sheet for sheet in sheets if sheet.file == file]
        names = ", ".join(f"'{sheet.name}'" for sheet in here)
        many = (
            f"Sheets {names} hold a plan and were" if len(here) > 1 else f"Sheet {names} holds a plan and was"
        )
        yield _note(here[0], "plan left out", f"{many} not read.")


def _hidden(sheet: Sheet) -> Iterator[Finding]:
    if sheet.hidden:
        yield _note(sheet, "hidden sheet", f"Sheet '{sheet.name}' is hidden; it was read.")
    rows = sorted(
        row for row in sheet.hidden_rows if row < len(sheet.rows) and not _blank_row(sheet.rows[row])
    )
    columns = sorted(
        column
        for column in sheet.hidden_columns
        if column < sheet.width and any(not is_blank(row[column]) for row in sheet.rows)
    )
    if columns:
        which = ", ".join(column_letters(column) for column in columns[:5]) + (
            " …" if len(columns) > 5 else ""
        )
        message = f"Hidden columns of sheet '{sheet.name}' were read: {which}."
        yield _note(sheet, "hidden columns", message, address(0, columns[0]))
    if rows:
        which = ", ".join(str(row + 1) for row in rows[:5]) + (" …" if len(rows) > 5 else "")
        message = f"Hidden rows of sheet '{sheet.name}' were read: {which}."
        yield _note(sheet, "hidden rows", message, address(rows[0], 0))


def _merged(sheet: Sheet, areas: Sequence[Area]) -> Iterator[Finding]:
    """Numbers that are merged over several rows of a table: they were read for the first row only."""
    for (top, left), (bottom, _) in sheet.merged:
        inside = any(area[0] < top < area[1] and area[2] <= left <= area[3] for area in areas)
        cell = sheet.rows[top][left] if inside and left < sheet.width and top < len(sheet.rows) else ""
        if bottom > top and isinstance(cell, (int, float)) and not isinstance(cell, bool):
            yield Finding(
                Severity.CHECK,
                "merged figure",
                f"{text_of(cell)} is merged over {bottom - top + 1} rows and was read for the first only.",
                "Type a figure into each row.",
                sheet.file,
                sheet.name,
                address(top, left),
                text_of(cell),
            )


def _outside(sheet: Sheet, areas: Sequence[Area]) -> tuple[list[Finding], int]:
    """Cells beside and below the tables of a sheet, and numbers above them; titles are only titles."""
    top = min(area[0] for area in areas)
    places: list[tuple[int, int]] = []
    numbers = rows = 0
    whole = [area for area in areas if area[2] == 0 and area[3] >= sheet.width - 1]
    within = {number for area in whole for number in range(area[0], area[1])}
    for number in sorted(set(range(len(sheet.rows))) - within):
        row = sheet.rows[number]
        here = [area for area in areas if area[0] <= number < area[1]]
        cells = [
            (column, cell)
            for column, cell in enumerate(row)
            if cell != "" and not is_blank(cell) and not any(area[2] <= column <= area[3] for area in here)
        ]
        found = sum(isinstance(cell, (int, float)) for _, cell in cells)
        if not cells or (number < top and not found):
            continue
        numbers += found
        places.extend((number, column) for column, _ in cells[:1])
        rows += not here
    if not places:
        return [], 0
    cut = next((place for place in places if sheet.is_text and _is_cut(sheet, place, areas)), None)
    if cut is not None:
        places.insert(0, cut)
    first, column = places[0]
    text = text_of(sheet.rows[first][column])[:60]
    if cut is not None:
        message = f"Row {first + 1} has a cell more than there are headings, '{text}'."
        mend = "Where a comma within a figure cut it in two, save the file with semicolons or as .xlsx."
        where = sheet.file, sheet.name, address(first, column)
        return [Finding(Severity.STOPS, "too many cells", message, mend, *where, text, rows)], rows
    return [
        Finding(
            Severity.CHECK if numbers else Severity.NOTE,
            "cells left out",
            f"Cells of {counted(len(places), 'row')} on sheet '{sheet.name}' belong to no table and were "
            f"not read, first '{text}'.",
            "Give them a heading beside the others if they are figures." if numbers else "",
            sheet.file,
            sheet.name,
            address(first, column),
            text,
            rows,
        )
    ], rows


def _is_cut(sheet: Sheet, place: tuple[int, int], areas: Sequence[Area]) -> bool:
    """Whether digits stand right behind the last column of a table in a text file, below no heading."""
    row, column = place
    text = text_of(sheet.rows[row][column])
    return text.isdigit() and any(a[0] < row < a[1] and a[3] + 1 == column for a in areas)


def _missing_heading(partial: Partial, rows: int) -> Finding:
    missing = " and ".join(partial.missing)
    unknown = [text for column, text in partial.headings.items() if column not in partial.known]
    guess = f" Is it '{unknown[0]}'?" if len(unknown) == 1 else ""
    return Finding(
        Severity.STOPS,
        f"missing {partial.kind}",
        f"Sheet '{partial.sheet.name}' looks like {TITLES[partial.kind]}, but the heading {missing} "
        f"is missing.{guess}",
        f"Name the column {missing}.",
        partial.sheet.file,
        partial.sheet.name,
        address(partial.head, min(partial.headings)),
        ", ".join(partial.headings.values())[:100],
        rows,
        f"{partial.kind}: {unknown[0]}" if unknown else "",
        tuple(partial.missing) if unknown else (),
    )


def _no_rates(grid: Grid, rows: int) -> Finding:
    sheet = grid.sheet
    return Finding(
        Severity.CHECK,
        "no rates in the grid",
        f"By its title, '{grid.title[:60]}', the grid on '{sheet.name}' holds no rates; it was not read.",
        "Name the sheet Rates, or write Rate into the grid's corner, if it does.",
        sheet.file,
        sheet.name,
        address(grid.head, grid.side),
        grid.title[:60],
        rows=rows,
    )


def _not_understood(sheet: Sheet, rows: int) -> Finding:
    numbers = any(isinstance(cell, int | float) for row in sheet.rows for cell in row)
    return Finding(
        Severity.CHECK if numbers else Severity.NOTE,
        "sheet left out",
        f"On sheet '{sheet.name}' no table was recognised; it was not read ({counted(rows, 'row')}).",
        "Give it the headings of Depots, Customers, Rates or Rules if it holds figures.",
        sheet.file,
        sheet.name,
        rows=rows,
    )


def _note(sheet: Sheet, rule: str, message: str, cell: str = "") -> Finding:
    return Finding(Severity.NOTE, rule, message, "", sheet.file, sheet.name, cell)


def _blank_row(row: Sequence[Any]) -> bool:
    return all(is_blank(cell) for cell in row)
