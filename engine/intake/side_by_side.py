"""Hauliers side by side: a list of lanes with a column of rates for each haulier, its name as the heading."""

import re
from collections.abc import Mapping, Sequence
from dataclasses import replace

from engine.findings import Finding, Severity
from engine.intake.cells import address
from engine.intake.fields import CLOSED_WORDS, text_of
from engine.intake.headings import COLUMNS_OF, PRODUCT_WORDS, field_of, heading_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, is_blank, read_number
from engine.intake.recognise import Found, Partial, Table

A_HAULIER = "a haulier's rate"
WHICH_COLUMN = "which column"
_HAULIER = "haulier's rate"
_STYLES = NumberStyle("."), NumberStyle(",")
_SAMPLE = 200
_RATE_WORDS = re.compile(
    r"^(rates?|prices?|tariff|freight)\b[ :\-]*|[ :\-]*\b(rates?|prices?|tariff|freight)$", re.IGNORECASE
)


def with_hauliers(found: Found, taught: Mapping[str, str]) -> Found:
    """What was recognised, with lists of rates that have a column, or several, for each haulier.

    taught: what the desk has said of columns of rates, by heading, folded; `A_HAULIER` for a haulier's
    """
    tables = [part for table in found.tables for part in _by_block(table)]
    used: set[int] = set()
    for partial in found.partials:
        if partial.kind == "rates" and partial.missing == ("Rate",) and id(partial.sheet) not in used:
            columns = _haulier_columns(partial, taught)
            if columns:
                tables.extend(_tables(partial, columns))
                used.add(id(partial.sheet))
    return Found(
        tuple(tables),
        tuple(partial for partial in found.partials if id(partial.sheet) not in used),
        found.plans,
        tuple(sheet for sheet in found.others if id(sheet) not in used),
    )


def about_hauliers(tables: Sequence[Table], taught: Mapping[str, str]) -> list[Finding]:
    """That columns were read as hauliers, each asked about until the desk has answered."""
    return [
        Finding(
            Severity.CHECK,
            WHICH_COLUMN,
            f"The column '{table.headings[column]}' on Rates was read as what the haulier "
            f"{table.haulier} charges on each lane.",
            "Say so if it is another column.",
            table.sheet.file,
            table.sheet.name,
            address(table.head, column),
            table.headings[column],
            subject=f"rates: {table.headings[column]}",
            options=(
                A_HAULIER,
                *(
                    c.heading
                    for c in COLUMNS_OF["rates"]
                    if c.field == "rate" or c.field not in table.columns
                ),
                "none of these",
            ),
        )
        for table in tables
        if table.haulier
        and field_of("rates", table.headings[table.columns["rate"]]) is None
        and taught.get(folded(table.headings[column := table.columns["rate"]])) != A_HAULIER
    ]


def _by_block(table: Table) -> list[Table]:
    """A list of rates with several headings Rate, each below a haulier's name, as one list each."""
    if table.kind != "rates" or "haulier" in table.columns or not table.head:
        return [table]
    starts = [column for column, text in table.headings.items() if field_of("rates", text) == "rate"]
    above = table.sheet.rows[table.head - 1]
    names = []
    for place, start in enumerate(starts):
        first = starts[place - 1] + 1 if place else max(0, start - 1)
        named = [text_of(above[column]) for column in range(first, start + 1) if not is_blank(above[column])]
        names.append(named[-1] if named else "")
    if len(starts) < 2 or not all(names) or len(set(names)) < len(names):
        return [table]
    if any(field_of("rates", name) for name in names):
        return [table]
    blocks = []
    for place, start in enumerate(starts):
        end = starts[place + 1] if place + 1 < len(starts) else table.right + 1
        own = {}
        for column in range(start, end):
            name = field_of("rates", table.headings.get(column, ""))
            if name is not None and name not in own:
                own[name] = column
        shared = {name: column for name, column in table.columns.items() if column < starts[0]}
        unread = table.unread if place == 0 else ()
        known = {*own.values(), *shared.values()}
        blocks.append(
            replace(
                table, columns={**shared, **own}, haulier=names[place],
                unread=tuple(c for c in unread if c < starts[0]),
                beside=frozenset(c for c in range(starts[0], table.right + 1) if c not in known),
            )
        )  # fmt: skip
    return blocks


def _haulier_columns(partial: Partial, taught: Mapping[str, str]) -> list[int]:
    """The columns with a name for a heading and nothing but rates below; two at least, unless taught."""
    if "haulier" in partial.columns:
        return []
    columns = []
    sure = False
    for column, text in partial.headings.items():
        said = taught.get(folded(text))
        if column in partial.known or said == "" or heading_of(text).words in PRODUCT_WORDS:
            continue
        if said == A_HAULIER:
            sure = True
            columns.append(column)
        elif said is None and field_of("rates", text) is None and _holds_rates(partial, column):
            columns.append(column)
    return columns if sure or len(columns) > 1 else []


def _holds_rates(partial: Partial, column: int) -> bool:
    rows = partial.sheet.rows[partial.head + 1 : partial.head + 1 + _SAMPLE]
    cells = [row[column] for row in rows if not is_blank(row[column])]
    rates = sum(_is_rate(cell) for cell in cells)
    return bool(cells) and 10 * rates >= 8 * len(cells)


def _is_rate(cell: object) -> bool:
    if isinstance(cell, str) and folded(cell) in CLOSED_WORDS:
        return True
    return any(read_number(cell, style, "money")[0] is not None for style in _STYLES)


def _tables(partial: Partial, columns: list[int]) -> list[Table]:
    left, right = min(partial.headings), max(partial.headings)
    known = {*partial.known, *columns}
    unread = tuple(column for column in partial.headings if column not in known)
    return [
        Table(
            "rates", partial.sheet, partial.head, len(partial.sheet.rows), left, right,
            {**partial.columns, "rate": column}, partial.headings, unread if column == columns[0] else (),
            haulier=name_in(partial.headings[column]), beside=frozenset(columns) - {column},
        )
        for column in columns
    ]  # fmt: skip


def name_in(heading: str) -> str:
    """The haulier that a heading names, without the unit, the currency and the word Rate beside the name."""
    text = " ".join(re.sub(r"[(\[{][^)\]}]*[)\]}]", " ", text_of(heading)).split())
    words = text.split()
    while len(words) > 1 and heading_of(" ".join(words)).words != folded(" ".join(words)):
        words.pop()
    name = _RATE_WORDS.sub("", " ".join(words)).strip(" :-,/")
    return name or text
