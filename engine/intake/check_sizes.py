"""Figures that are out of all proportion to the others of their kind: a wrong unit, or places swapped."""

from collections.abc import Iterator, Sequence
from decimal import Decimal
from statistics import median

import numpy as np

from engine.exact import BLANK, canonical
from engine.findings import Finding, Severity
from engine.intake.places import Where
from engine.week import Week

_FEWEST = 5
"""With fewer figures than this nothing can be said of what is usual."""

_TIMES = 500
"""Kilograms for tonnes are a thousand times; half of it leaves room for large and small customers."""

_FAR = 15
"""Degrees between a place and the middle of all places from which a swap is considered."""

_MOST = 20


def out_of_proportion(week: Week, where: Where) -> Iterator[Finding]:
    """Quantities and rates some five hundred times as large or as small as is usual in their column."""
    depots = [(depot.name, depot.available) for depot in week.depots.values()]
    customers = [(customer.name, customer.ordered) for customer in week.customers.values()]
    unit = week.rules.unit
    for table, field, heading, figures in (
        ("depots", "available", "Available", depots),
        ("customers", "ordered", "Ordered", customers),
    ):
        usual = _usual([float(figure) for _, figure in figures if figure])
        for name, figure in figures:
            times = _times(float(figure), usual)
            if figure and times:
                yield _odd(
                    where(table, name, field), f"{name}: {heading} {canonical(figure)} {unit}", figure, times
                )
    flat = week.rates.flat
    known = flat.rate.values[(flat.rate.values != BLANK) & (flat.rate.values != 0)]
    if len(known) < _FEWEST or flat.per_load.any():
        return
    usual = float(np.median(np.abs(known[:: max(1, len(known) // 20_000)])))
    size = np.abs(flat.rate.values)
    odd = (size != 0) & ((size > _TIMES * usual) | (size * float(_TIMES) < usual))
    for row in np.flatnonzero(odd)[:_MOST].tolist():
        depot, customer, _ = flat.named(row)
        rate = flat.rate.get(row) or Decimal(0)
        times = _times(float(abs(flat.rate.values[row])), usual)
        yield _odd(where("rates", row, "rate"), f"{depot} to {customer}: rate {canonical(rate)}", rate, times)


def swapped_places(week: Week, where: Where) -> Iterator[Finding]:
    """Places that lie far from all others, and among them once latitude and longitude change sides."""
    places = [
        (table, record.name, float(record.latitude), float(record.longitude))
        for table, records in (("depots", week.depots.values()), ("customers", week.customers.values()))
        for record in records
        if record.latitude is not None and record.longitude is not None
    ]
    if len(places) < _FEWEST:
        return
    middle = median(place[2] for place in places), median(place[3] for place in places)
    for table, name, latitude, longitude in places:
        far = max(abs(latitude - middle[0]), abs(longitude - middle[1]))
        swapped = max(abs(longitude - middle[0]), abs(latitude - middle[1]))
        if far > _FAR and swapped * 4 < far:
            file, sheet, cell = where(table, name, "latitude")
            yield Finding(
                Severity.CHECK,
                "places swapped",
                f"{name} lies far from all others; swapping latitude and longitude would put it among them.",
                "Swap the two, if that is so.",
                file,
                sheet,
                cell,
                f"{latitude:g}, {longitude:g}",
            )


def _usual(figures: Sequence[float]) -> float:
    return median(figures) if len(figures) >= _FEWEST else 0.0


def _times(figure: float, usual: float) -> str:
    """How many times the usual a figure is, in words; empty where it is not out of proportion."""
    if not usual or not figure:
        return ""
    if figure >= _TIMES * usual:
        return f"{figure / usual:.0f} times as large as"
    return f"{usual / figure:.0f} times as small as" if figure * _TIMES <= usual else ""


def _odd(place: tuple[str, str, str], what: str, figure: Decimal, times: str) -> Finding:
    file, sheet, cell = place
    return Finding(
        Severity.CHECK,
        "out of proportion",
        f"{what} is about {times} the usual one: another unit?",
        "Check the figure and its unit.",
        file,
        sheet,
        cell,
        canonical(figure),
    )
