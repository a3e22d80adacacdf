"""Rates per load spread over the load: what a unit would cost if vehicles could be sent in parts.

A week with whole loads costs at least what it costs with every load divisible, so the network plan of the
spread rates is what whole vehicles are compared with. Spread rates are rounded down to stay below.
"""

import numpy as np

from engine.exact import BLANK, LARGEST, DecimalColumn, TooLarge
from engine.figures import ANY_SINGLE_DEPOT
from engine.load_sizes import counted_depots, given, load_sizes
from engine.rates import RateTable
from engine.week import Week

SPREAD_PLACES = 4
"""Decimal places of a spread rate, at least: a tenth of a thousandth of the currency per unit."""


def has_whole_loads(week: Week) -> bool:
    """Whether any figure of the week makes its plan more than a network: whole loads, charges due once,
    smallest drops, one depot of several, limits on loads or on a haulier."""
    flat = week.rates.flat
    return bool(
        (flat.per_load & ~flat.closed).any()
        or given(flat, "trip_minimum").any()
        or given(flat, "charge_per_use").any()
        or any(depot.opening_charge for depot in week.depots.values())
        or any(counted_depots(week).values())
        or any(c.smallest_drop or c.one_depot == ANY_SINGLE_DEPOT for c in week.customers.values())
        or any(one.at_most is not None and one.name in flat.haulier_names for one in week.hauliers.values())
    )


def places_of_loads(week: Week) -> int:
    """Decimal places that load sizes, smallest drops and hauliers' limits need, where they count."""
    if not has_whole_loads(week):
        return 0
    others = [customer.smallest_drop for customer in week.customers.values()]
    others += [one.at_most for one in week.hauliers.values()]
    return max(load_sizes(week).places, DecimalColumn.of(others).places)


def spread_over_loads(flat: RateTable, rates: DecimalColumn, sizes: DecimalColumn) -> DecimalColumn:
    """(rows,) the least that a unit on each row can cost: as a part of a full load.

    rates: with the surcharge; sizes: what a load is on each row, which every row per load or with a trip
    minimum must have
    """
    trips = flat.decimals.get("trip_minimum", DecimalColumn.blank(len(flat)))
    loaded = np.flatnonzero((flat.per_load | given(flat, "trip_minimum")) & (sizes.values > 0))
    if not len(loaded):
        return rates
    places = max(rates.places, trips.places, SPREAD_PLACES)
    spread = rates.rescaled(places)
    trip = trips.rescaled(places)
    finer: int = 10**sizes.places
    for row in loaded.tolist():
        size, rate = int(sizes.values[row]), int(spread[row])
        least = 0 if trip[row] == BLANK else int(trip[row]) * finer // size
        spread[row] = max(rate * finer // size if flat.per_load[row] else rate, least)
    if np.abs(spread).max(initial=0) > LARGEST // 4:
        raise TooLarge("A rate spread over its load has too many digits: use fewer decimals.")
    return DecimalColumn(spread, places)
