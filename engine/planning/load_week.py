"""A week with whole vehicles in integers: what `engine.loads` solves.

Gone goods are facts: they count against orders, stock and limits, and what they cost, a charge per use
included, is what their own rate says. So a row or a depot that something has gone on is open already.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from engine.exact import BLANK, DecimalColumn, Integers, to_integer, total_of
from engine.figures import ANY_SINGLE_DEPOT, PRIORITIES, Gone, RateKey
from engine.load_sizes import counted_depots, load_sizes, loads_of
from engine.loads import NO_LIMIT, LoadProblem
from engine.planning.gone import left, remaining
from engine.planning.model import (
    Model,
    charge_if_short,
    charge_if_unsent,
    priority_of,
    rates_with_surcharge,
)
from engine.rates import Flags, RateTable
from engine.week import Week


@dataclass(frozen=True, eq=False)
class LoadWeek:
    """The problem, and how it belongs to the week's model.

    rows:         (rate rows,) their rows in the model
    per_load:     (rate rows,) whether a row is charged by the load
    rate:         (rate rows,) with the surcharge, per load or per unit, at `money_places`
    fixed_short:  (customers,) what even shares leave short before anything is planned
    money_places: of costs per unit; costs have `quantity_places` more
    """

    problem: LoadProblem
    rows: Integers
    per_load: Flags
    rate: Integers
    fixed_short: Integers
    quantity_places: int
    money_places: int


def load_week(week: Week, model: Model) -> LoadWeek:
    """The week's problem with whole vehicles; `model` has even shares worked in.

    Raises:
        TooLarge: costs together do not fit the exact integers.
    """
    flat, network = week.rates.flat, model.problem
    rows = np.flatnonzero(model.rate_row >= 0)
    at = model.rate_row[rows]
    columns = _Money(week, flat)
    q, m = model.quantity_places, columns.places
    rate = columns.rate.rescaled(m)[at]
    per_load = flat.per_load[at]
    trips = _filled(columns.trip.rescaled(m + q)[at])
    loaded_rate = columns.rate.rescaled(m + q)[at]
    none = np.zeros(len(model.customers), dtype=np.int64)
    fixed_short = none if network.at_least is None else network.at_least[model.short_rows]
    lower, upper, drop = _limits(week, model, rows)
    names = {name: place for place, name in enumerate(week.hauliers)}
    haulier_code = np.array([*(names.get(name, -1) for name in flat.haulier_names), -1], dtype=np.int64)
    customers = list(week.customers.values())
    used = left(week)
    once = _filled(columns.once.rescaled(m + q)[at])
    once[[place for place, lane in enumerate(_lanes(flat, at)) if lane in used.row]] = 0
    opening = _filled(columns.opening.rescaled(m + q))
    opening[[place for place, depot in enumerate(week.depots) if depot in used.depot]] = 0
    problem = LoadProblem(
        supply=network.supply[:-1],
        must_move=_must_move(model),
        unsent_cost=columns.unsent.rescaled(m),
        opening_charge=opening,
        most_loads=_most_loads(week),
        demand=network.demand[:-1] - fixed_short,
        short_cost=columns.short.rescaled(m),
        rank=np.array([PRIORITIES.index(priority_of(c)) for c in customers], dtype=np.int64),
        may_decline=np.array([c.may_decline for c in customers], dtype=np.bool_),
        one_depot=np.array([c.one_depot == ANY_SINGLE_DEPOT for c in customers], dtype=np.bool_),
        start=network.start[:-1] - np.arange(len(customers) + 1),
        depot=network.depot[rows],
        haulier=haulier_code[flat.haulier[at]],
        per_unit=np.where(per_load, 0, rate),
        per_load=np.where(per_load, np.maximum(loaded_rate, trips), 0),
        load_size=_filled(load_sizes(week).rescaled(q)[at]),
        trip_minimum=np.where(per_load, 0, trips),
        charge_per_use=once,
        at_least=lower,
        at_most=upper,
        smallest_drop=drop,
        haulier_most=_haulier_most(week, q),
    )
    return LoadWeek(problem, rows, per_load, rate, fixed_short, q, m)


class _Money:
    """Rates and charges as columns, and the decimal places that all of them fit in."""

    def __init__(self, week: Week, flat: RateTable) -> None:
        blank = DecimalColumn.blank(len(flat))
        self.rate = rates_with_surcharge(flat, week.rules)
        self.trip = flat.decimals.get("trip_minimum", blank)
        self.once = flat.decimals.get("charge_per_use", blank)
        self.unsent = DecimalColumn.of([charge_if_unsent(d) for d in week.depots.values()])
        self.short = DecimalColumn.of([charge_if_short(c, week.rules) for c in week.customers.values()])
        self.opening = DecimalColumn.of([d.opening_charge for d in week.depots.values()])
        columns = (self.rate, self.trip, self.once, self.unsent, self.short, self.opening)
        self.places = max(column.places for column in columns)


def _filled(column: Integers) -> Integers:
    """Blanks as 0."""
    return np.where(column == BLANK, 0, column)


def _must_move(model: Model) -> Integers:
    must = np.zeros(len(model.depots), dtype=np.int64)
    there = np.flatnonzero(model.must_row >= 0)
    if model.problem.at_most is not None:
        must[there] = model.problem.at_most[model.must_row[there]]
    return must


def _limits(week: Week, model: Model, rows: Integers) -> tuple[Integers, Integers, Integers]:
    """Least, most and smallest drop on each rate row, what has gone taken off."""
    flat, network, places = week.rates.flat, model.problem, model.quantity_places
    lower = np.zeros(len(rows), dtype=np.int64) if network.at_least is None else network.at_least[rows]
    upper = lower + network.supply[-1] if network.at_most is None else network.at_most[rows].copy()
    customer = network.customer[rows]
    drops = DecimalColumn.of([c.smallest_drop for c in week.customers.values()])
    drop = _filled(drops.rescaled(places))[customer]
    used = left(week)
    gone_from = {name: {g.depot for g in week.gone.values() if g.customer == name} for name in used.customer}
    single = {
        j: gone_from[c.name]
        for j, c in enumerate(week.customers.values())
        if c.one_depot == ANY_SINGLE_DEPOT and gone_from.get(c.name)
    }
    for place, lane in enumerate(_lanes(flat, model.rate_row[rows])) if used.row else ():
        if lane in used.row and drop[place]:
            drop[place] = max(0, drop[place] - to_integer(used.row[lane], places))
        depots = single.get(int(customer[place]))
        if depots is not None and lane[0] not in depots and not lower[place]:
            upper[place] = 0
    beyond = upper < drop
    drop[beyond] = 0
    upper[beyond & (lower == 0)] = 0  # less than the smallest drop could go there: nothing does
    return lower, upper, drop


def _lanes(flat: RateTable, at: Integers) -> Iterator[tuple[str, str, str | None]]:
    return (flat.named(int(position)) for position in at.tolist())


def _most_loads(week: Week) -> Integers:
    """(depots,) how many loads may still leave, NO_LIMIT where no limit can be counted."""
    counted = counted_depots(week)
    gone: dict[str, int] = {}
    for one in week.gone.values():
        gone[one.depot] = gone.get(one.depot, 0) + loads_gone(week, one)
    most = []
    for name, depot in week.depots.items():
        if not counted.get(name) or depot.loads_a_day is None:
            most.append(NO_LIMIT)
        else:
            most.append(max(0, int(depot.loads_a_day * week.rules.loading_days) - gone.get(name, 0)))
    return np.array(most, dtype=np.int64)


def loads_gone(week: Week, one: Gone) -> int:
    """How many loads something that has gone was: by the load size of its row, else one."""
    number = week.rates.find(RateKey(one.depot, one.customer, one.haulier))
    row = None if number is None else week.rates.row(number)
    size = row.load_size if row is not None else None
    haulier = week.hauliers.get(one.haulier or "")
    size = size or (haulier.load_size if haulier else None) or week.rules.load_size
    return 1 if not size else loads_of(one.quantity, size) or 0


def _haulier_most(week: Week, places: int) -> Integers:
    gone: dict[str, list[Gone]] = {}
    for one in week.gone.values():
        gone.setdefault(one.haulier or "", []).append(one)
    most = []
    for name, haulier in week.hauliers.items():
        carried = total_of(one.quantity for one in gone.get(name, ()))
        most.append(
            NO_LIMIT if haulier.at_most is None else to_integer(remaining(haulier.at_most, carried), places)
        )
    return np.array(most, dtype=np.int64)
