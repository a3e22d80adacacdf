"""The quantities of a plan that was handed out earlier, read back from its workbook."""

from collections import Counter
from collections.abc import Mapping, Sequence
from decimal import Decimal
from types import MappingProxyType
from typing import Any

from engine.columns import SEND
from engine.figures import RateKey
from engine.findings import Finding, Severity
from engine.intake.cells import Sheet, Source, address, read_sheets
from engine.intake.fields import text_of
from engine.intake.names import folded
from engine.intake.numbers import NumberStyle, read_number
from engine.intake.refusal import Unreadable

Quantities = Mapping[RateKey, Decimal]
"""What went, or was to go, on each rate row."""

_QUANTITY = (folded(SEND.heading), "quantity")
"""What the quantity is headed by: in a workbook of ours, and in a plain list."""


def read_quantities(source: Source, style: NumberStyle | None = None) -> Quantities:
    """What an earlier plan sends on each rate row.

    source: a workbook that `engine.write_workbook` wrote, or any sheet with the headings Depot, Customer
        and Send or Quantity (Haulier besides)

    Raises:
        Unreadable: the file cannot be read, or no sheet in it has these headings.
    """
    sheets = read_sheets(source)
    for quantity in _QUANTITY:
        for sheet in sheets:
            for number, row in enumerate(sheet.rows):
                places = {
                    folded(text_of(cell)): place for place, cell in enumerate(row) if cell not in (None, "")
                }
                if all(heading in places for heading in ("depot", "customer", quantity)):
                    column = places[quantity]
                    return _quantities(sheet, number, places, column, style or NumberStyle())
    raise Unreadable(
        Finding(
            Severity.STOPS,
            "no plan",
            "There is no plan in this file: no sheet has the headings Depot, Customer, Send.",
            "Give a workbook that this tool wrote, or a list with these (Quantity will do for Send).",
        )
    )


def _quantities(
    sheet: Sheet, head: int, places: Mapping[str, int], column: int, style: NumberStyle
) -> Quantities:
    found: dict[RateKey, Decimal] = {}
    seen: Counter[tuple[str, str, str | None]] = Counter()
    haulier_at = places.get("haulier")
    for number, row in enumerate(sheet.rows[head + 1 :], start=head + 1):
        depot, customer = (_text(row, places[what]) for what in ("depot", "customer"))
        if not depot or not customer:
            continue
        lane = (depot, customer, (None if haulier_at is None else _text(row, haulier_at)) or None)
        seen[lane] += 1
        quantity, finding = read_number(row[column], style, "quantity")
        if quantity is None:
            read = text_of(row[column])
            message = finding.message if finding else "This row of the plan has no quantity."
            raise Unreadable(
                Finding(
                    Severity.STOPS, "no quantity", message, "Type the quantity, 0 for nothing.",
                    sheet.file, sheet.name, address(number, column), read,
                )
            )  # fmt: skip
        found[RateKey(*lane, seen[lane])] = quantity
    return MappingProxyType(found)


def _text(row: Sequence[Any], place: int) -> str:
    cell = row[place] if place < len(row) else None
    return "" if cell is None else " ".join(text_of(cell).split())
