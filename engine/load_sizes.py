"""What one vehicle carries on each rate row: the row's own load size, else the haulier's, else the week's."""

from decimal import Decimal

import numpy as np

from engine.exact import BLANK, DecimalColumn
from engine.rates import Flags, RateTable
from engine.week import Week


def load_sizes(week: Week) -> DecimalColumn:
    """(rows of `week.rates.flat`,) what a load on each row holds, blank where nothing says so."""
    flat = week.rates.flat
    own = flat.decimals.get("load_size", DecimalColumn.blank(len(flat)))
    names = (*flat.haulier_names, None)  # NO_CODE, used as an index, is the last
    hauliers = [week.hauliers.get(name) if name else None for name in names]
    theirs = DecimalColumn.of([None if one is None else one.load_size for one in hauliers])
    general = DecimalColumn.of([week.rules.load_size])
    places = max(own.places, theirs.places, general.places)
    sizes = own.rescaled(places)
    of_haulier = theirs.rescaled(places)[flat.haulier]
    sizes = np.where(sizes == BLANK, of_haulier, sizes)
    sizes = np.where(sizes == BLANK, general.rescaled(places)[0], sizes)
    return DecimalColumn(sizes, places)


def given(table: RateTable, name: str) -> Flags:
    """(rows,) where a column of figures holds anything but blank and 0."""
    column = table.decimals.get(name)
    if column is None:
        return np.zeros(len(table), dtype=bool)
    flags: Flags = (column.values != BLANK) & (column.values != 0)
    return flags


def needs_size(table: RateTable) -> Flags:
    """(rows,) where a row cannot be priced without a load size."""
    return table.per_load | given(table, "trip_minimum")


def counted_depots(week: Week) -> dict[str, bool]:
    """Depots with a limit of loads a day, and whether every open row from there says what a load is."""
    table = week.rates.flat
    unsized = (load_sizes(week).values == BLANK) & ~table.closed
    rows = np.bincount(table.depot[unsized], minlength=len(table.depot_names))
    without = {name for name, count in zip(table.depot_names, rows.tolist(), strict=True) if count}
    return {name: name not in without for name, d in week.depots.items() if d.loads_a_day is not None}


def loads_of(quantity: Decimal, size: Decimal | None) -> int | None:
    """How many vehicles a quantity takes, the last perhaps not full; None where no load size is given."""
    if size is None or size <= 0:
        return None
    whole, rest = divmod(quantity, size)
    return int(whole) + bool(rest)
