"""Uploads that hold several products: a column *Product* splits them into one week each."""

from collections.abc import Sequence
from dataclasses import replace

from engine.findings import Finding, Severity
from engine.intake.cells import Sheet
from engine.intake.fields import text_of
from engine.intake.headings import heading_of
from engine.intake.names import folded
from engine.intake.recognise import Found, Table, is_total

PRODUCT_WORDS = frozenset({
    "product", "products", "product name", "material", "item", "article", "commodity", "grade", "goods",
})  # fmt: skip
SEVERAL = "several products"
SUBJECT = "product"


def product_column(table: Table) -> int | None:
    """The column of a list that names the product, None where it has none."""
    return next((c for c in table.unread if heading_of(table.headings[c]).words in PRODUCT_WORDS), None)


def products_in(found: Found) -> tuple[str, ...]:
    """The products that the lists name, in order of appearance."""
    names: dict[str, str] = {}
    for table in found.tables:
        column = product_column(table)
        if column is None:
            continue
        for row in table.sheet.rows[table.head + 1 : table.end]:
            text = text_of(row[column])
            if text and not is_total(text):
                names.setdefault(folded(text), text)
    return tuple(names.values())


def of_product(sheets: Sequence[Sheet], found: Found, product: str) -> list[Sheet]:
    """The sheets with the rows of all other products blank, so that every cell keeps its address.

    Rows that name no product, and totals, which are of all products together, belong to none and all: the
    former stay, the latter go.
    """
    wanted = folded(product)
    rows = {id(sheet): sheet.rows for sheet in sheets}
    for table in found.tables:
        column = product_column(table)
        if column is None:
            continue
        kept = list(rows[id(table.sheet)])
        for number in range(table.head + 1, table.end):
            row = list(kept[number])
            other = text_of(row[column])
            total = any(
                isinstance(cell, str) and is_total(cell) for cell in row[table.left : table.right + 1]
            )
            if total or (other and folded(other) != wanted):
                row[table.left : table.right + 1] = [""] * (table.right + 1 - table.left)
                kept[number] = row
        rows[id(table.sheet)] = kept
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
