"""The figures as used: sheets *Depots*, *Customers*, *Rates* and *Rules*, reading back as the same week."""

from collections.abc import Iterable, Iterator, Sequence
from datetime import date
from decimal import Decimal
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter

from engine.columns import (
    CUSTOMER_COLUMNS,
    DEPOT_COLUMNS,
    GONE_COLUMNS,
    HAULIER_COLUMNS,
    HOLD_HEADINGS,
    RATE_COLUMNS,
    RULE_COLUMNS,
    Column,
    Kind,
)
from engine.exact import BLANK, DecimalColumn
from engine.figures import Customer, Hold, Order
from engine.rates import NO_CODE, RateTable
from engine.report.look import SHORE, Style, number_format, places_of
from engine.report.sheet import MOST_DIGITS, MOST_ROWS, Row, Sheet, Value, fits_a_number
from engine.week import Week

_WORDS = {Kind.NAME, Kind.TEXT, Kind.YES, Kind.PRIORITY, Kind.ONE_DEPOT, Kind.BASIS}
_ROWS_A_SHEET = MOST_ROWS - 1
HOLD, HOLD_REASON = HOLD_HEADINGS
RATE_HEADINGS = (*(column.heading for column in RATE_COLUMNS), HOLD, HOLD_REASON)
"""The headings of *Rates*, in order."""


def letter(place: int) -> str:
    """The letter of a column, counted from 0."""
    return get_column_letter(place + 1)


def rates_place(position: int) -> tuple[str, int]:
    """The sheet and the row of a rate row, by its position among the week's."""
    count, row = divmod(position, _ROWS_A_SHEET)
    return "Rates" if count == 0 else f"'Rates {count + 1}'", row + 2


def all_fit(week: Week) -> bool:
    """Whether spreadsheet numbers keep every digit of every quantity, rate and charge."""
    flat = week.rates.flat
    small = all(
        np.abs(np.where(column.values == BLANK, 0, column.values)).max(initial=0) < 10**MOST_DIGITS
        for column in (flat.rate, *flat.decimals.values())
    )
    others = [week.rules.fuel_surcharge, week.rules.charge_if_short]
    others += [figure for depot in week.depots.values() for figure in (depot.available, depot.must_move)]
    others += [depot.charge_if_unsent for depot in week.depots.values()]
    others += [order.quantity for customer in week.customers.values() for order in customer.orders]
    others += [customer.charge_if_short for customer in week.customers.values()]
    others += [figure for gone in week.gone.values() for figure in (gone.quantity, gone.rate)]
    others += [hold.quantity for hold in week.holds.values()]
    others += [depot.opening_charge for depot in week.depots.values()]
    others += [figure for one in week.hauliers.values() for figure in (one.at_most, one.load_size)]
    others += [week.rules.load_size, week.rules.days]
    return small and all(figure is None or fits_a_number(figure) for figure in others)


def figures_sheets(week: Week, header: str) -> list[Sheet]:
    """The sheets, *Gone* and *Hauliers* only where there is anything on them.

    *Rates* goes on in *Rates 2* and so on where one sheet cannot hold all rows.
    """
    return [
        _depots(week, header),
        _customers(week, header),
        *_rates(week, header),
        *([_gone(week, header)] if week.gone else []),
        *([_hauliers(week, header)] if week.hauliers else []),
        _rules(week, header),
    ]


def _depots(week: Week, header: str) -> Sheet:
    rows = [[_shown(getattr(depot, c.field)) for c in DEPOT_COLUMNS] for depot in week.depots.values()]
    return _sheet("Depots", DEPOT_COLUMNS, rows, header)


def _customers(week: Week, header: str) -> Sheet:
    rows = []
    for customer in week.customers.values():
        for place, order in enumerate(customer.orders or (Order(Decimal(0)),)):
            rows.append([_of_order(customer, order, column, place == 0) for column in CUSTOMER_COLUMNS])
    return _sheet("Customers", CUSTOMER_COLUMNS, rows, header)


def _gone(week: Week, header: str) -> Sheet:
    rows = [[_shown(getattr(gone, c.field)) for c in GONE_COLUMNS] for gone in week.gone.values()]
    return _sheet("Gone", GONE_COLUMNS, rows, header)


def _hauliers(week: Week, header: str) -> Sheet:
    rows = [[_shown(getattr(one, c.field)) for c in HAULIER_COLUMNS] for one in week.hauliers.values()]
    return _sheet("Hauliers", HAULIER_COLUMNS, rows, header)


def _of_order(customer: Customer, order: Order, column: Column, first: bool) -> Value:
    """One cell of an order row: what is the customer's own stands in its first row only."""
    match column.field:
        case "name":
            return customer.name
        case "ordered":
            return order.quantity
        case "number":
            return order.number
        case "day":
            return order.day
    return _shown(getattr(customer, column.field)) if first else None


def _shown(value: Any) -> Value:
    """A figure as a cell holds it; 'no' is left blank."""
    if isinstance(value, bool):
        return "yes" if value else None
    if value is None or isinstance(value, str | Decimal | date):
        return value
    raise TypeError(f"A figure cannot be {value!r}.")


def _rules(week: Week, header: str) -> Sheet:
    rows = [Row(["Rule", "Value"], [Style("heading")] * 2)]
    for column in RULE_COLUMNS:
        value = getattr(week.rules, column.field)
        number = number_format(places_of([value])) if isinstance(value, Decimal) else "General"
        rows.append(Row([column.heading, value], [Style(), Style("plain", number, "left")]))
    return Sheet("Rules", (24, 30), rows, len(rows), frozen="A2", landscape=False, header=header, tab=SHORE)


def _sheet(name: str, columns: Sequence[Column], rows: Sequence[Sequence[Value]], header: str) -> Sheet:
    styles = [_style(c, places_of(row[k] for row in rows)) for k, c in enumerate(columns)]
    return Sheet(
        name,
        [_width(c, any(row[k] is not None for row in rows)) for k, c in enumerate(columns)],
        (Row(values, style, height) for values, style, height in _with_headings(columns, rows, styles)),
        length=1 + len(rows),
        frozen="B2",
        repeated="1:1",
        header=header,
        tab=SHORE,
    )


def _with_headings(
    columns: Sequence[Column], rows: Iterable[Sequence[Value]], styles: Sequence[Style]
) -> Iterator[tuple[Sequence[Value], Sequence[Style], float | None]]:
    yield [column.heading for column in columns], [_heading_style(column.kind) for column in columns], 30
    for row in rows:
        yield row, styles, None


def _heading_style(kind: Kind) -> Style:
    return Style("heading", align="left" if kind in _WORDS else "right", wrap=True)


def _style(column: Column, places: int) -> Style:
    if column.kind in _WORDS:
        return Style()
    if column.kind is Kind.DATE:
        return Style("plain", "yyyy-mm-dd", "right")
    return Style("plain", number_format(places), "right")


def _width(column: Column, filled: bool) -> float:
    if not filled:
        return 10
    return 24 if column.kind is Kind.NAME else 14 if column.kind in _WORDS else 12


def _rates(week: Week, header: str) -> list[Sheet]:
    """Every rate row in sheet order, with what is held on it."""
    flat = week.rates.flat
    held = _held_at(week)
    hold_places = places_of(hold.quantity for hold in week.holds.values())
    styles = [_style(c, _places(flat, c.field)) for c in RATE_COLUMNS]
    styles += [Style("plain", number_format(hold_places), "right"), Style(wrap=True)]
    headings = Row(
        RATE_HEADINGS,
        [
            *(_heading_style(c.kind) for c in RATE_COLUMNS),
            _heading_style(Kind.QUANTITY),
            _heading_style(Kind.TEXT),
        ],
        height=30,
    )
    sheets = []
    for first in range(0, max(1, len(flat)), _ROWS_A_SHEET):
        last = min(len(flat), first + _ROWS_A_SHEET)
        sheets.append(
            Sheet(
                rates_place(first)[0].strip("'"),
                [*(_width(column, _filled(flat, column.field)) for column in RATE_COLUMNS), 12, 26],
                _rate_rows(headings, flat, held, styles, range(first, last)),
                length=1 + last - first,
                frozen="C2",
                repeated="1:1",
                header=header,
                tab=SHORE,
            )
        )
    return sheets


def _held_at(week: Week) -> dict[int, Hold]:
    """Holds by the position of their row among the week's rate rows."""
    ids, held = week.rates.ids_in_order, {}
    for key, hold in week.holds.items():
        number = week.rates.find(key)
        if number is not None:
            held[int(np.searchsorted(ids, number))] = hold
    return held


def _filled(flat: RateTable, field: str) -> bool:
    match field:
        case "haulier":
            return bool(flat.haulier_names)
        case "per":
            return bool(flat.per_load.any())
        case "closed":
            return bool(flat.closed.any())
        case "valid_from":
            return flat.valid_from is not None
    return field in flat.decimals or field in ("depot", "customer", "rate")


def _places(flat: RateTable, field: str) -> int:
    column = flat.rate if field == "rate" else flat.decimals.get(field)
    return 0 if column is None else column.places


def _rate_rows(
    headings: Row, flat: RateTable, held: dict[int, Hold], styles: Sequence[Style], positions: range
) -> Iterator[Row]:
    yield headings
    part = slice(positions.start, positions.stop)
    columns = [_rate_column(flat, column.field, part) for column in RATE_COLUMNS]
    for position, values in zip(positions, zip(*columns, strict=True), strict=True):
        hold = held.get(position)
        if hold is None:
            yield Row(values, styles)
        else:
            marked = [style._replace(kind="held") for style in styles]
            yield Row((*values, hold.quantity, hold.reason or None), marked)


def _rate_column(flat: RateTable, field: str, part: slice) -> list[Value]:
    """One column of *Rates*, as cells."""
    size = len(range(*part.indices(len(flat))))
    match field:
        case "depot" | "customer" | "haulier":
            names: list[Value] = [*getattr(flat, f"{field}_names"), None]  # NO_CODE is the last: blank
            return [names[code] for code in getattr(flat, field)[part].tolist()]
        case "per":
            return ["load" if load else None for load in flat.per_load[part].tolist()]
        case "closed":
            return ["yes" if closed else None for closed in flat.closed[part].tolist()]
        case "valid_from":
            if flat.valid_from is None:
                return [None] * size
            days = flat.valid_from[part].tolist()
            return [None if day == NO_CODE else date.fromordinal(day) for day in days]
    column = flat.rate if field == "rate" else flat.decimals.get(field)
    return [None] * size if column is None else _numbers(DecimalColumn(column.values[part], column.places))


def _numbers(column: DecimalColumn) -> list[Value]:
    """Decimals as cells: the nearest floats where those keep every digit, which is quick."""
    values = column.values
    blank = values == BLANK
    if column.places > 22 or np.abs(np.where(blank, 0, values)).max(initial=0) >= 10**MOST_DIGITS:
        return list(column.decimals())
    floats: list[Value] = (values / 10.0**column.places).tolist()
    for place in np.flatnonzero(blank).tolist():
        floats[place] = None
    return floats
