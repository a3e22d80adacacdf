"""Sheets of raw cells to the figures of a week: recognise the tables, settle how to read, build each."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from engine.findings import Finding
from engine.intake.about_sheets import WHICH_COLUMN, about_headings, about_sheets
from engine.intake.answers import Answers
from engine.intake.build_lists import Unused, build_customers, build_depots, with_depot_spelling
from engine.intake.build_rates import build_rates
from engine.intake.build_rules import build_rules, stated_by
from engine.intake.cells import Sheet
from engine.intake.fields import text_of
from engine.intake.grids import Grid, find_grid
from engine.intake.headings import COLUMNS_OF, TITLES
from engine.intake.manner import in_words, manner_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, is_blank
from engine.intake.places import Places
from engine.intake.recognise import Found, Table, find_tables, is_total
from engine.intake.remarks import Counts
from engine.week import Week


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
    outside, left_out = about_sheets(found, grids)
    return Figures(
        week,
        (
            *outside,
            *about_headings(found.tables),
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
