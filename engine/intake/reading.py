"""Spreadsheets to a week: the public way in."""

import gc
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field, replace
from decimal import Decimal

import numpy as np

from engine.exact import TooLarge
from engine.findings import Finding, by_gravity
from engine.intake.answers import Answers
from engine.intake.build import Figures, build_figures
from engine.intake.build_lists import Unused
from engine.intake.cells import Source, is_single, named_bytes, read_sheets
from engine.intake.check import check_week
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle
from engine.intake.places import Places
from engine.intake.products import SEVERAL
from engine.intake.refusal import Limits, Unreadable, refused
from engine.intake.remarks import Counts, counted
from engine.week import Week

__all__ = ["Answers", "Limits", "Reading", "Unreadable", "read_week"]


@dataclass(frozen=True, eq=False)
class Reading:
    """A week as read from spreadsheets, and everything that there is to say about it.

    counts: rows below headings (in a grid: cells) read, used, and named in findings; read = used + named
    summary: what was understood, in words
    style: the number style that the figures were read by
    unused: the texts of rows that are not in the week, and of cells that nobody could read
    places: where each figure stands
    tables: which tables were on the sheets
    on_sheets: the findings on cells, headings and sheets, without those on the week as a whole
    lasting: the findings that neither the figures in the grids nor `check_week` will bring up again: they
        stay until they are answered, accepted, or the sheets are uploaded anew
    accepted: findings that were accepted earlier, for the notes of a plan
    products: the products that the sheets name
    """

    week: Week
    findings: tuple[Finding, ...]
    counts: Counts
    summary: str
    style: NumberStyle = field(default_factory=NumberStyle)
    unused: tuple[Unused, ...] = ()
    places: Places = field(default_factory=Places)
    tables: frozenset[str] = frozenset()
    lasting: tuple[Finding, ...] = ()
    on_sheets: tuple[Finding, ...] = ()
    accepted: tuple[Finding, ...] = ()
    products: tuple[str, ...] = ()

    @property
    def rows_read(self) -> int:
        return self.counts.read

    @property
    def rows_used(self) -> int:
        return self.counts.used

    @property
    def rows_named(self) -> int:
        return self.counts.named


def read_week(
    source: Source | Iterable[Source],
    *,
    limits: Limits | None = None,
    answers: Answers | None = None,
    known: Week | None = None,
    decimal_mark: str = ".",
    product: str | None = None,
) -> Reading:
    """The week in one spreadsheet or several files, with findings; nothing is dropped without a word.

    source: a path, an open file, bytes, or (name, bytes); or several of these
    limits: what a file may cost
    answers: what the desk has answered before
    known: an earlier week, whose names help to recognise a grid when only rates are uploaded
    decimal_mark: '.' or ',', assumed where the figures do not tell, and then asked
    product: the one to read where a column Product names several; without it the reading only asks

    Raises:
        Unreadable: a file that is no spreadsheet, is damaged, protected or too large.
        OSError: a path that cannot be opened.
    """
    with _collecting_later():
        return _read(source, limits, answers or Answers(), known, decimal_mark, product)


@contextmanager
def _collecting_later() -> Iterator[None]:
    """Cells make no cycles; looking for some after every few thousand of them takes a tenth of the time."""
    was = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was:
            gc.enable()


def _read(
    source: Source | Iterable[Source],
    limits: Limits | None,
    answers: Answers,
    known: Week | None,
    decimal_mark: str,
    product: str | None,
) -> Reading:
    sheets = read_sheets(source, limits)
    try:
        figures = build_figures(sheets, answers, known, decimal_mark, product)
        asks_product = any(finding.rule in (SEVERAL, "no such product") for finding in figures.findings)
        found = () if asks_product else check_week(figures.week, figures.places.where)
    except TooLarge as error:
        raise refused("too large", str(error), "Mend the figure and upload again.", sheets[0].file) from error
    on_sheets = frozenset(figures.findings)
    findings, accepted = answers.parted(by_gravity([*figures.findings, *_not_said_yet(found, figures)]))
    return Reading(
        figures.week,
        tuple(findings),
        figures.counts,
        summary_of(figures),
        figures.style,
        figures.unused,
        figures.places,
        figures.tables,
        tuple(f for f in findings if f in on_sheets and (f.options or f.rule not in _IN_GRIDS)),
        tuple(f for f in findings if f in on_sheets),
        tuple(accepted),
        figures.products,
    )


_IN_GRIDS = frozenset(
    {
        "not a number",
        "date for number",
        "shortened number",
        "too many digits",
        "decimal mark",
        "money for number",
        "percent for number",
        "error cell",
        "formula without value",
        "negative",
        "not whole",
        "out of range",
        "percent",
        "small percent",
        "read as blank",
        "not yes or no",
        "not a priority",
        "not a basis",
        "not a date",
        "long name",
        "figure missing",
        "same depot twice",
        "no name",
        "rule",
        "other unit",
        "other currency",
        "unclear unit",
    }
)
"""Rules on single cells whose text is in the draft of a grid, where the same reader says it again."""


def read_weeks(
    source: Source | Iterable[Source],
    *,
    limits: Limits | None = None,
    answers: Answers | None = None,
    decimal_mark: str = ".",
) -> dict[str, Reading]:
    """One reading for each product that a column Product names; under '' where there is no such column.

    The arguments and what is raised are those of `read_week`.
    """
    sources = [source] if is_single(source) else list(source)  # type: ignore[arg-type]
    kept = [named_bytes(one, limits or Limits()) for one in sources]  # type: ignore[arg-type]
    first = read_week(kept, limits=limits, answers=answers, decimal_mark=decimal_mark)
    if len(first.products) < 2:
        return {next(iter(first.products), ""): first}
    return {
        product: read_week(kept, limits=limits, answers=answers, decimal_mark=decimal_mark, product=product)
        for product in first.products
    }


def _not_said_yet(found: Iterable[Finding], figures: Figures) -> list[Finding]:
    """Findings on the week without those that only follow from one on its sheets."""
    missing = {finding.rule for finding in figures.findings}
    aside = {
        f"{unused.table.removesuffix('s')}: {folded(unused.texts.get('name', ''))}"
        for unused in figures.unused
        if unused.key is None
    }
    return [
        replace(finding, mend="Fill in the rows below its headings.")
        if finding.rule.removeprefix("no ") in figures.tables
        else finding
        for finding in found
        if f"missing {finding.rule.removeprefix('no ')}" not in missing
        and not (finding.rule == "unknown name" and finding.subject in aside)
    ]


def summary_of(figures: Figures) -> str:
    """What was understood, in one line of words."""
    week = figures.week
    table = week.rates.flat
    lanes = _open_lanes(week)
    possible = len(week.depots) * len(week.customers)
    parts = [counted(len(week.depots), "depot"), counted(len(week.customers), "customer")]
    rates = f" ({len(table)} rates)" if len(table) > lanes else ""
    parts.append(f"{counted(lanes, 'lane')} of {possible}{rates}")
    ordered = sum((customer.ordered for customer in week.customers.values()), Decimal(0))
    available = sum((depot.available for depot in week.depots.values()), Decimal(0))
    unit, by_load = week.rules.unit, " or load" if table.per_load.any() else ""
    return (
        f"{', '.join(parts)}; {ordered:,f} {unit} ordered, {available:,f} {unit} available; "
        f"rates in {week.rules.currency} per {unit}{by_load}; {figures.marks}"
    )


def _open_lanes(week: Week) -> int:
    """How many lanes between depots and customers of the week have a rate that is not closed."""
    table = week.rates.flat
    if not len(table):
        return 0
    depots = np.array([name in week.depots for name in table.depot_names], dtype=bool)[table.depot]
    customers = np.array([name in week.customers for name in table.customer_names], dtype=bool)[
        table.customer
    ]
    rows = depots & customers & ~table.closed
    seen = np.zeros(len(table.depot_names) * len(table.customer_names), dtype=bool)
    seen[table.customer[rows].astype(np.int64) * len(table.depot_names) + table.depot[rows]] = True
    return int(seen.sum())
