"""Sheets of raw cells to the figures of a week: recognise the tables, settle how to read, build each."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from engine.findings import Finding, Severity
from engine.intake.answers import Answers
from engine.intake.build_lists import Unused, build_customers, build_depots, with_depot_spelling
from engine.intake.build_rates import build_rates
from engine.intake.build_rules import build_rules, stated_by
from engine.intake.cells import Sheet, address
from engine.intake.fields import text_of
from engine.intake.grids import Grid, find_grid
from engine.intake.headings import COLUMNS_OF, TITLES
from engine.intake.manner import in_words, manner_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, is_blank
from engine.intake.places import Places
from engine.intake.recognise import Found, Partial, Table, find_tables, is_total
from engine.intake.remarks import Counts
from engine.week import Week

WHICH_COLUMN = "which column"
LEAVE_OUT = "none of these"


@dataclass(frozen=True, eq=False)
class Figures:
    """A week as it stands on the sheets, before it is checked as a whole."""

    week: Week
    findings: tuple[Finding, ...]
    counts: Counts
    style: NumberStyle
    marks: str
    places: Places
    unused: tuple[Unused, ...]
    tables: frozenset[str]


def build_figures(
    sheets: Sequence[Sheet], answers: Answers, known: Week | None = None, decimal_mark: str = "."
) -> Figures:
    """The figures on the sheets, and what there is to say of single cells, headings and sheets."""
    found = find_tables(sheets, _taught(answers))
    of: dict[str, list[Table]] = {kind: [t for t in found.tables if t.kind == kind] for kind in TITLES}
    grids = _grids(found, of, sheets, known)
    in_grids = {id(grid.sheet) for grid in grids}
    manner, asked = manner_of([*found.tables, *grids], stated_by(of["rules"], answers), answers, decimal_mark)
    depots = build_depots(of["depots"], manner)
    customers = build_customers(of["customers"], manner)
    rules = build_rules(of["rules"], manner.base, answers)
    spelled = with_depot_spelling(customers.records, depots.records)
    depot_names = [depot.name for depot in depots.records] or list(known.depots if known else ())
    customer_names = [customer.name for customer in spelled] or list(known.customers if known else ())
    rates = build_rates(of["rates"], grids, depot_names, customer_names, manner)
    week = Week.of(depots.records, spelled, rates.rates, rules.records[0], rates.holds)
    counts = depots.counts.plus(customers.counts).plus(rules.counts).plus(rates.counts)
    outside, left_out = _outside(found, in_grids, of, grids)
    return Figures(
        week,
        (
            *outside,
            *_headings(found.tables),
            *asked,
            *depots.findings,
            *customers.findings,
            *rates.findings,
            *rules.findings,
        ),
        counts.plus(left_out),
        manner.base,
        in_words(manner.marks, manner.usual),
        Places({**depots.spots, **customers.spots, **rules.spots}, rates.rows),
        (*depots.unused, *customers.unused, *rates.unused, *rules.unused),
        frozenset(kind for kind, tables in of.items() if tables) | ({"rates"} if grids else set()),
    )


def _taught(answers: Answers) -> dict[str, dict[str, str]]:
    """The desk's own headings from its answers, for each kind of table."""
    taught: dict[str, dict[str, str]] = {kind: {} for kind in TITLES}
    for (rule, subject), answer in answers.given.items():
        kind, colon, heading = subject.partition(": ")
        if (rule == WHICH_COLUMN or rule == f"missing {kind}") and colon and kind in taught:
            column = next((c for c in COLUMNS_OF[kind] if c.heading == answer), None)
            taught[kind][heading] = column.field if column else ""
    return taught


def _grids(
    found: Found, of: Mapping[str, Sequence[Table]], sheets: Sequence[Sheet], known: Week | None
) -> list[Grid]:
    """Grids on sheets without a list, and below or beside the lists of depots and customers."""
    names = {kind: {folded(n) for n in _names(of[kind])} for kind in ("depots", "customers")}
    if known is not None:
        names["depots"] = names["depots"] or {folded(name) for name in known.depots}
        names["customers"] = names["customers"] or {folded(name) for name in known.customers}
    plans = {id(sheet) for sheet in found.plans}
    listed = {id(table.sheet) for table in found.tables}
    grids = []
    for sheet in sheets:
        if id(sheet) in plans or id(sheet) in listed:
            continue
        grid = find_grid(sheet, names["depots"], names["customers"])
        if grid is not None:
            grids.append(grid)
    return grids


def _names(tables: Sequence[Table]) -> Iterator[str]:
    for table in tables:
        for cell in table.cells("name"):
            if not is_blank(cell):
                text = text_of(cell)
                if not is_total(text):
                    yield text


def _outside(
    found: Found, in_grids: set[int], of: Mapping[str, Sequence[Table]], grids: Sequence[Grid]
) -> tuple[list[Finding], Counts]:
    """What there is to say of sheets, and of rows that belong to no table."""
    findings = [
        Finding(
            Severity.NOTE, "plan left out", f"Sheet '{sheet.name}' holds a plan and was not read.",
            file=sheet.file, sheet=sheet.name,
        )
        for sheet in found.plans
    ]  # fmt: skip
    counts = Counts()
    read_kinds = {kind for kind, tables in of.items() if tables} | ({"rates"} if grids else set())
    used = [*(table.sheet for table in found.tables), *(grid.sheet for grid in grids)]
    partial_sheets: set[int] = set()
    for partial in found.partials:
        if id(partial.sheet) in in_grids or partial.kind in read_kinds or id(partial.sheet) in partial_sheets:
            continue
        partial_sheets.add(id(partial.sheet))
        rows = sum(not _blank_row(row) for row in partial.sheet.rows[partial.head + 1 :])
        findings.append(_missing_heading(partial, rows))
        counts = counts.plus(Counts(rows, 0, rows))
    for sheet in found.others:
        if id(sheet) in in_grids or id(sheet) in partial_sheets:
            continue
        rows = sum(not _blank_row(row) for row in sheet.rows)
        if rows:
            findings.append(_not_understood(sheet, rows))
            counts = counts.plus(Counts(rows, 0, rows))
    for sheet in dict.fromkeys(used):
        if sheet.hidden:
            findings.append(_note(sheet, "hidden sheet", f"Sheet '{sheet.name}' is hidden; it was read."))
        hidden = sorted(
            row for row in sheet.hidden_rows if row < len(sheet.rows) and not _blank_row(sheet.rows[row])
        )
        if hidden:
            which = ", ".join(str(row + 1) for row in hidden[:5]) + (" …" if len(hidden) > 5 else "")
            findings.append(
                _note(
                    sheet,
                    "hidden rows",
                    f"Hidden rows of sheet '{sheet.name}' were read: {which}.",
                    f"A{hidden[0] + 1}",
                )
            )
    return findings, counts


def _headings(tables: Sequence[Table]) -> Iterator[Finding]:
    """Columns that nobody knows: not read, and asked about where they hold anything."""
    for table in tables:
        for column in table.unread:
            text = table.headings[column]
            rows = table.sheet.rows[table.head + 1 : table.end]
            if all(is_blank(row[column]) for row in rows):
                continue
            free = tuple(c.heading for c in COLUMNS_OF[table.kind] if c.field not in table.columns)
            yield Finding(
                Severity.NOTE,
                WHICH_COLUMN,
                f"The column '{text}' on {TITLES[table.kind]} is none that is known; it was not read.",
                "Say which column it is, or leave it.",
                table.sheet.file,
                table.sheet.name,
                address(table.head, column),
                text,
                subject=f"{table.kind}: {text}",
                options=(*free, LEAVE_OUT),
            )


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


def _not_understood(sheet: Sheet, rows: int) -> Finding:
    numbers = any(isinstance(cell, int | float) for row in sheet.rows for cell in row)
    return Finding(
        Severity.CHECK if numbers else Severity.NOTE,
        "sheet left out",
        f"On sheet '{sheet.name}' no table was recognised; it was not read ({rows} rows).",
        "Give it the headings of Depots, Customers, Rates or Rules if it holds figures.",
        sheet.file,
        sheet.name,
        rows=rows,
    )


def _note(sheet: Sheet, rule: str, message: str, cell: str = "") -> Finding:
    return Finding(Severity.NOTE, rule, message, "", sheet.file, sheet.name, cell)


def _blank_row(row: Sequence[Any]) -> bool:
    return all(is_blank(cell) for cell in row)
