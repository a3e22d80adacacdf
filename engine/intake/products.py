"""Uploads that hold several products: a column *Product*, in a list or beside a grid, splits them."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from typing import NamedTuple

from engine.findings import Finding, Severity
from engine.intake.cells import Sheet
from engine.intake.fields import text_of
from engine.intake.grids import Grid
from engine.intake.headings import PRODUCT_WORDS, heading_of
from engine.intake.names import folded
from engine.intake.recognise import Found, Table, is_total

SEVERAL = "several products"
SUBJECT = "product"


def product_column(table: Table) -> int | None:
    """The column of a list that names the product, None where it has none."""
    return next((c for c in table.unread if heading_of(table.headings[c]).words in PRODUCT_WORDS), None)


class _Area(NamedTuple):
    """Rows of a list or grid, its columns, and the column that names their product."""

    sheet: Sheet
    rows: range
    columns: range
    column: int


def _areas(found: Found, grids: Sequence[Grid]) -> Iterator[_Area]:
    for table in found.tables:
        column = product_column(table)
        if column is not None:
            yield _Area(
                table.sheet, range(table.head + 1, table.end), range(table.left, table.right + 1), column
            )
    for grid in grids:
        if grid.product is not None:
            left = min(grid.side, grid.product)
            last = max((*grid.columns, grid.last_column, grid.product))
            yield _Area(
                grid.sheet, range(grid.head + 1, grid.last_row + 1), range(left, last + 1), grid.product
            )


def products_in(found: Found, grids: Sequence[Grid] = ()) -> tuple[str, ...]:
    """The products that lists and grids name, in order of appearance."""
    names: dict[str, str] = {}
    for area in _areas(found, grids):
        for number in area.rows:
            text = text_of(area.sheet.rows[number][area.column])
            if text and not is_total(text):
                names.setdefault(folded(text), text)
    return tuple(names.values())


def named_among(product: str, products: Sequence[str]) -> str | None:
    """The product as the figures spell it, None where they do not name it."""
    return next((one for one in products if folded(one) == folded(product)), None)


def week_of_product(week: str, product: str) -> str:
    """What a week is called that is of one product among several."""
    return week if folded(product) in folded(week) else f"{week}, {product}"


def of_product(
    sheets: Sequence[Sheet], found: Found, product: str, grids: Sequence[Grid] = ()
) -> list[Sheet]:
    """The sheets with the rows of all other products blank, so that every cell keeps its address.

    Rows that name no product, and totals, which are of all products together, belong to none and all: the
    former stay, the latter go.
    """
    wanted = folded(product)
    rows = {id(sheet): sheet.rows for sheet in sheets}
    for area in _areas(found, grids):
        kept = list(rows[id(area.sheet)])
        for number in area.rows:
            row = list(kept[number])
            here = slice(area.columns.start, area.columns.stop)
            other = text_of(row[area.column])
            total = any(isinstance(cell, str) and is_total(cell) for cell in row[here])
            if total or (other and folded(other) != wanted):
                row[here] = [""] * len(area.columns)
                kept[number] = row
        rows[id(area.sheet)] = kept
    return [replace(sheet, rows=rows[id(sheet)]) for sheet in sheets]


def which_product(products: Sequence[str]) -> Finding:
    """The question which of several products the week is about."""
    return Finding(
        Severity.STOPS,
        SEVERAL,
        f"The figures are of {len(products)} products: {', '.join(products[:8])}"
        f"{' …' if len(products) > 8 else ''}. A week is of one product.",
        "Choose one; each product is a week of its own.",
        subject=SUBJECT,
        options=tuple(products),
    )


def no_such_product(product: str, products: Sequence[str]) -> Finding:
    """That the figures do not name the product that was asked for."""
    return Finding(
        Severity.STOPS,
        "no such product",
        f"No row is of the product {product}; the figures are of {', '.join(products[:8])}"
        f"{' …' if len(products) > 8 else ''}."
        if products
        else f"The figures name no product, so none of them can be said to be of {product}.",
        "Name one of these." if products else "Leave the product out, or add a column Product.",
        read=product,
        subject=SUBJECT if products else "",
        options=tuple(products),
    )


def other_products(product: str, products: Sequence[str]) -> Finding:
    """That only the rows of one of several products were read."""
    others = [one for one in products if one != product]
    return Finding(
        Severity.NOTE,
        "one product read",
        f"This week is of {product}; rows of {', '.join(others[:8])}{' …' if len(others) > 8 else ''} "
        "were left for weeks of their own.",
        subject=product,
    )


def without_product(found: Found) -> list[Finding]:
    """Lists that do not say which product they are of, where others do."""
    return [
        Finding(
            Severity.CHECK,
            "no product named",
            f"Sheet '{table.sheet.name}' names no product; all its rows were used for every product.",
            "Add a column Product, or a file for each product.",
            table.sheet.file,
            table.sheet.name,
        )
        for table in found.tables
        if table.kind in ("depots", "customers") and product_column(table) is None
    ]
