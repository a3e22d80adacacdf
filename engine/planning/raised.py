"""A haulier's rates raised or lowered by a percentage, as one change to the week."""

from decimal import Decimal

import numpy as np

from engine.changes import Alter, Change, Together
from engine.exact import canonical, places_needed, to_decimal, to_integer
from engine.week import Week


def haulier_rates(week: Week, haulier: str) -> int:
    """How many rate rows a haulier has."""
    return len(_positions(week, haulier))


def raised(week: Week, haulier: str, percent: Decimal) -> Together:
    """All rates of a haulier changed by a percentage, exactly; trip minimums and charges per use stay.

    A percentage of -5 lowers them. Without any rate of theirs the change is empty.
    """
    places = places_needed(percent)
    numerator = 100 * 10**places + to_integer(percent, places)
    ids, flat = week.rates.ids_in_order, week.rates.flat
    changes: list[Change] = []
    for position in _positions(week, haulier):
        rate = flat.rate.get(position)
        if rate is None or not rate or not percent:
            continue
        of_rate = places_needed(rate)
        now = to_decimal(to_integer(rate, of_rate) * numerator, of_rate + places + 2)
        changes.append(Alter("rate", week.rates.key_of(int(ids[position])), "rate", now))
    way = "up" if percent >= 0 else "down"
    return Together(tuple(changes), f"rates of {haulier} {way} {canonical(abs(percent))} %")


def _positions(week: Week, haulier: str) -> list[int]:
    """Where a haulier's rows stand in sheet order."""
    flat = week.rates.flat
    if haulier not in flat.haulier_names:
        return []
    found: list[int] = np.flatnonzero(flat.haulier == flat.haulier_names.index(haulier)).tolist()
    return found
