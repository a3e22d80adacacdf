"""How far it is along each rate row of a week: the kilometres given, else from the coordinates."""

from decimal import Decimal
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from engine.exact import BLANK
from engine.figures import RateKey
from engine.planning.model import NO_RATE, Model
from engine.week import Week

Floats = npt.NDArray[np.float64]

EARTH_RADIUS_KM = 6371.0088
"""Mean radius of the Earth (International Union of Geodesy and Geophysics)."""


class Distances(NamedTuple):
    """Distances in the order of a model's rows.

    km: (rows,) infinite where nothing is known, and on stand-in rows
    given, straight, unknown: how many rate rows have kilometres, only coordinates, neither
    """

    km: Floats
    given: int
    straight: int
    unknown: int


def distances(week: Week, model: Model) -> Distances:
    """How far each rate row leads: its *Km*, else the straight line between the places.

    Coordinates are degrees where all of them can be, and the line is a great circle (haversine; at most
    0.56 % off a geodesic, from memory); otherwise they are taken for a plane.
    """
    rows = np.flatnonzero(model.rate_row != NO_RATE)
    km = np.full(model.problem.rows, np.inf)
    customer_of = np.repeat(np.arange(model.problem.customers), np.diff(model.problem.start))
    from_depot = _places([(d.latitude, d.longitude) for d in week.depots.values()])
    to_customer = _places([(c.latitude, c.longitude) for c in week.customers.values()])
    here, there = from_depot[model.problem.depot[rows]], to_customer[customer_of[rows]]
    km[rows] = _great_circle(here, there) if _are_degrees(from_depot, to_customer) else _plane(here, there)
    known = ~np.isnan(km[rows])
    column = week.rates.flat.decimals.get("km")
    given = np.zeros(len(rows), dtype=bool)
    if column is not None:
        values = column.values[model.rate_row[rows]]
        given = values != BLANK
        km[rows[given]] = values[given] / 10.0**column.places
    known |= given
    km[rows[~known]] = np.inf
    return Distances(km, int(given.sum()), int((known & ~given).sum()), int((~known).sum()))


def _places(pairs: list[tuple[object, object]]) -> Floats:
    """(places, 2) latitude and longitude, not a number where one is missing."""
    return np.array(
        [[np.nan if None in pair else float(str(value)) for value in pair] for pair in pairs], dtype=float
    ).reshape(-1, 2)


def _are_degrees(*places: Floats) -> bool:
    return all(
        bool(np.all((np.abs(place[:, 0]) <= 90) | np.isnan(place[:, 0])))
        and bool(np.all((np.abs(place[:, 1]) <= 180) | np.isnan(place[:, 1])))
        for place in places
    )


def _great_circle(here: Floats, there: Floats) -> Floats:
    """Kilometres over a sphere; the haversine formula (Sinnott 1984) keeps short ones right."""
    latitude, longitude = np.radians(here).T
    other_latitude, other_longitude = np.radians(there).T
    bow = (
        np.sin((other_latitude - latitude) / 2) ** 2
        + np.cos(latitude) * np.cos(other_latitude) * np.sin((other_longitude - longitude) / 2) ** 2
    )
    found: Floats = 2 * EARTH_RADIUS_KM * np.arcsin(np.sqrt(np.minimum(1.0, bow)))
    return found


def _plane(here: Floats, there: Floats) -> Floats:
    found: Floats = np.hypot(*(there - here).T)
    return found


def km_along(week: Week, key: RateKey) -> Decimal | None:
    """Kilometres of a lane: the *Km* of its rate row, else the straight line to a tenth, None if unknown."""
    number = week.rates.find(key)
    row = None if number is None else week.rates.row(number)
    if row is not None and row.km is not None:
        return row.km
    depot, customer = week.depots.get(key.depot), week.customers.get(key.customer)
    if depot is None or customer is None:
        return None
    here, there = (_places([(one.latitude, one.longitude)]) for one in (depot, customer))
    line = (_great_circle if _are_degrees(here, there) else _plane)(here, there)
    return None if np.isnan(line[0]) else Decimal(f"{float(line[0]):.1f}")
