"""Sheets of raw cells to the figures of a week: recognise the tables, settle how to read, build each."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

from engine.findings import Finding, Severity
from engine.intake.about_sheets import LEAVE_OUT, WHICH_COLUMN, about_headings, about_sheets
from engine.intake.answers import Answers
from engine.intake.build_gone import build_gone
from engine.intake.build_hauliers import build_hauliers
from engine.intake.build_lists import Built, Unused, build_customers, build_depots, with_depot_spelling
from engine.intake.build_rates import build_rates
from engine.intake.build_rules import build_rules, stated_by
from engine.intake.cells import Sheet
from engine.intake.dittos import NAME_FIELDS, about_dittos
from engine.intake.fields import text_of
from engine.intake.grids import Grid, find_grid, may_be_rates
from engine.intake.headings import COLUMNS_OF, TITLES
from engine.intake.manner import in_words, manner_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, is_blank
from engine.intake.places import Places
from engine.intake.products import (
    SEVERAL,
    SUBJECT,
    named_among,
    no_such_product,
    of_product,
    other_products,
    products_in,
    week_of_product,
    which_product,
    without_product,
)
from engine.intake.recognise import Found, Table, find_tables, is_total, of_one_depot
from engine.intake.remarks import Counts
from engine.intake.side_by_side import about_hauliers, with_hauliers
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
    products: tuple[str, ...] = ()


def build_figures(
    sheets: Sequence[Sheet],
    answers: Answers,
    known: Week | None = None,
    decimal_mark: str = ".",
    product: str | None = None,
) -> Figures:
    """The figures on the sheets, and what there is to say of single cells, headings and sheets.

    product: the one to read where the sheets name several; with None an answer given earlier counts
    """
    taught = _taught(answers)
    columns = _said_of_rates(answers)
    found = _found(sheets, taught, columns, known)
    of = _by_kind(found)
    grids, no_rates = _grids(found, of, sheets, known)
    products, product, about_products, left = _products(sheets, found, grids, answers, product)
    if left is not sheets:
        sheets = left
        found = _found(sheets, taught, columns, known)
        of = _by_kind(found)
        grids, no_rates = _grids(found, of, sheets, known)
    stated = stated_by(of["rules"], answers)
    if known is not None:
        stated = {"unit": known.rules.unit, "currency": known.rules.currency, **stated}
    manner, asked = manner_of([*found.tables, *grids], stated, answers, decimal_mark)
    if product is not None:
        about_products = [*about_products, *without_product(found)]
    depots = build_depots(of["depots"], manner)
    customers = build_customers(of["customers"], manner)
    rules = build_rules(of["rules"], manner.base, answers)
    depots, customers, remembered = _with_places(depots, customers, known)
    spelled = with_depot_spelling(customers.records, depots.records)
    depot_names = [depot.name for depot in depots.records] or list(known.depots if known else ())
    customer_names = [customer.name for customer in spelled] or list(known.customers if known else ())
    rates = build_rates(of["rates"], grids, depot_names, customer_names, manner)
    gone = build_gone(of["gone"], depot_names, customer_names, manner)
    settings = rules.records[0]
    if product is not None:
        settings = replace(settings, week=week_of_product(settings.week, product))
    hauliers = build_hauliers(of["hauliers"], rates.rates.flat.haulier_names, manner)
    week = Week.of(
        depots.records,
        spelled,
        rates.rates,
        settings,
        rates.holds,
        gone.records,
        hauliers.records,
    )
    counts = depots.counts.plus(customers.counts).plus(rules.counts).plus(rates.counts).plus(gone.counts)
    counts = counts.plus(hauliers.counts)
    outside, left_out = about_sheets(found, grids, no_rates)
    return Figures(
        week,
        (
            *about_products,
            *remembered,
            *outside,
            *about_headings(found.tables),
            *_dittos(found),
            *about_hauliers(found.tables, columns),
            *asked,
            *depots.findings,
            *customers.findings,
            *rates.findings,
            *gone.findings,
            *hauliers.findings,
            *rules.findings,
        ),
        counts.plus(left_out),
        manner.base,
        in_words(manner.marks, manner.usual),
        Places(
            {**depots.spots, **customers.spots, **rules.spots, **gone.spots, **hauliers.spots}, rates.rows
        ),
        (*depots.unused, *customers.unused, *rates.unused, *rules.unused, *gone.unused, *hauliers.unused),
        frozenset(kind for kind, tables in of.items() if tables) | ({"rates"} if grids else set()),
        products,
    )


def _found(
    sheets: Sequence[Sheet],
    taught: Mapping[str, Mapping[str, str]],
    columns: Mapping[str, str],
    known: Week | None,
) -> Found:
    """The tables on the sheets, also those of one depot or with hauliers side by side."""
    return with_hauliers(_with_sheets_of_one_depot(find_tables(sheets, taught), known), columns)


def _said_of_rates(answers: Answers) -> dict[str, str]:
    """What the desk has said of columns on sheets of rates, by heading, folded; '' where it is left out."""
    said = {}
    for (rule, subject), answer in answers.given.items():
        kind, colon, heading = subject.partition(": ")
        if rule == WHICH_COLUMN and colon and kind == "rates":
            said[heading] = "" if answer == LEAVE_OUT else answer
    return said


def _by_kind(found: Found) -> dict[str, list[Table]]:
    return {kind: [table for table in found.tables if table.kind == kind] for kind in TITLES}


def _products(
    sheets: Sequence[Sheet], found: Found, grids: Sequence[Grid], answers: Answers, asked: str | None
) -> tuple[tuple[str, ...], str | None, list[Finding], Sequence[Sheet]]:
    """The products that are named, the one to read where they are several, and the sheets with its rows only.

    No sheets are left where it has to be asked first. An answer given earlier counts where nothing is asked
    for and the figures name that product.
    """
    products = products_in(found, grids)
    answered = answers.to(SEVERAL, SUBJECT)
    product = named_among(asked or answered or "", products)
    if asked is not None and product is None:
        return products, None, [no_such_product(asked, products)], []
    if len(products) < 2:
        return products, None, [], sheets
    if product is None:
        return products, None, [which_product(products)], []
    return products, product, [other_products(product, products)], of_product(sheets, found, product, grids)


def _with_places(depots: Built, customers: Built, known: Week | None) -> tuple[Built, Built, list[Finding]]:
    """The records with the places that an earlier week has for their names, where they have none."""
    if known is None:
        return depots, customers, []
    filled = 0
    both = []
    for built, earlier in ((depots, known.depots), (customers, known.customers)):
        places = {folded(name): record for name, record in earlier.items() if record.latitude is not None}
        records = []
        for record in built.records:
            place = places.get(folded(record.name))
            if place is not None and record.latitude is None and record.longitude is None:
                record = replace(record, latitude=place.latitude, longitude=place.longitude)
                filled += 1
            records.append(record)
        both.append(replace(built, records=tuple(records)))
    note = Finding(
        Severity.NOTE, "places remembered", f"Places of {filled} names were taken from an earlier week."
    )
    return both[0], both[1], [note] if filled else []


def _with_sheets_of_one_depot(found: Found, known: Week | None) -> Found:
    """What was recognised, with lists of rates that name their depot only by sheet or title."""
    names = list(_names([table for table in found.tables if table.kind == "depots"])) or list(
        known.depots if known else ()
    )
    depots = {folded(name): name for name in names}
    tables = [(partial, of_one_depot(partial, depots)) for partial in found.partials]
    more = tuple(table for _, table in tables if table is not None)
    if not more:
        return found
    sheets = {id(table.sheet) for table in more}
    return Found(
        (*found.tables, *more),
        tuple(partial for partial, _ in tables if id(partial.sheet) not in sheets),
        found.plans,
        tuple(sheet for sheet in found.others if id(sheet) not in sheets),
    )


def _dittos(found: Found) -> Iterator[Finding]:
    for table in found.tables:
        names = {table.columns[name] for name in NAME_FIELDS if name in table.columns}
        if not table.beside or table.columns["rate"] < min(table.beside):
            yield from about_dittos(table.sheet, range(table.head + 1, table.end), sorted(names))


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
) -> tuple[list[Grid], list[Grid]]:
    """The grids of rates on sheets without a list, and those whose titles speak of something else."""
    names = {kind: {folded(n) for n in _names(of[kind])} for kind in ("depots", "customers")}
    if known is not None:
        names["depots"] = names["depots"] or {folded(name) for name in known.depots}
        names["customers"] = names["customers"] or {folded(name) for name in known.customers}
    plans = {id(sheet) for sheet in found.plans}
    listed = {id(table.sheet) for table in found.tables}
    lists = {id(p.sheet): p.head for p in found.partials if {"depot", "customer"} <= set(p.columns)}
    grids: list[Grid] = []
    no_rates: list[Grid] = []
    for sheet in sheets:
        if id(sheet) in plans or id(sheet) in listed:
            continue
        grid = find_grid(sheet, names["depots"], names["customers"])
        # Below the headings of a list that lacks its rate, rows of names are rows of the list
        if grid is not None and grid.head <= lists.get(id(sheet), grid.head):
            (grids if may_be_rates(grid.title) else no_rates).append(grid)
    return grids, no_rates


def _names(tables: Sequence[Table]) -> Iterator[str]:
    for table in tables:
        for cell in table.cells("name"):
            if not is_blank(cell):
                text = text_of(cell)
                if not is_total(text):
                    yield text
