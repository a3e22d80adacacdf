"""What else could be done: lanes swapped for little or nothing, lanes near to paying, lanes without a quote.

Each answer says how much the lane would carry: the most that goes back from its customer to its depot over
all chains tied with the cheapest, which is what the lane would take over.
"""

from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

import numpy as np

from engine.exact import to_decimal
from engine.figures import ANY_SINGLE_DEPOT, RateKey
from engine.network.closure import NO_WAY
from engine.network.problem import UNLIMITED
from engine.planning.model import NO_RATE, Integers
from engine.planning.plan import Plan
from engine.reasons.ground import Ground, ground_of, grounded_again, money_of
from engine.reasons.kernels import MANY
from engine.reasons.rates import RateInterval, rate_intervals, without_surcharge
from engine.reasons.rows import key_at
from engine.reasons.tied import most_out_of, tied_to


@dataclass(frozen=True, slots=True)
class NearLane:
    """An unused rate row, and what it would carry once its rate is a little below where it pays."""

    interval: RateInterval
    carries: Decimal


@dataclass(frozen=True, slots=True)
class Option:
    """More on a rate row than planned: a unit costs `extra` more, `quantity` of it `cost` in all.

    `now` is what the row carries in the plan. An extra of 0 is a swap for nothing.
    """

    key: RateKey
    now: Decimal
    extra: Decimal
    quantity: Decimal
    cost: Decimal


@dataclass(frozen=True, slots=True)
class Unquoted:
    """A lane without a rate row: a quote below `pays_below` (before the week's surcharge) would pay."""

    depot: str
    customer: str
    pays_below: Decimal
    carries: Decimal


def nearest_to_paying(plan: Plan, most: int = 50) -> tuple[NearLane, ...]:
    """The unused rate rows whose rate is least above where they would pay, to negotiate from."""
    intervals = rate_intervals(plan)
    rows = intervals.nearest_rows(most)
    return tuple(
        NearLane(intervals.at(row), _quantity(plan, carried))
        for row, carried in zip(rows.tolist(), would_carry(intervals.ground, rows), strict=True)
    )


def options(plan: Plan, within: Decimal = Decimal(0), most: int = 50) -> tuple[Option, ...]:
    """Rate rows that could carry more than planned at an extra cost per unit of at most `within`.

    With 0: what could be swapped for nothing. `quantity` is what the amount pays for, at most what the row
    can take over at that price; the cheapest come first.
    """
    intervals = rate_intervals(plan)
    model, ground = plan.model, intervals.ground
    rows = intervals.rows[intervals.has_low[intervals.rows]]
    extra = model.money[rows] - intervals.low[rows]
    limit = Fraction(within) * 10**model.money_places
    chosen = np.flatnonzero(extra <= min(int(limit), MANY))
    chosen = chosen[np.lexsort((model.rate_row[rows[chosen]], extra[chosen]))][:most]
    rows, extra = rows[chosen], extra[chosen]
    found = []
    for row, more, carried in zip(rows.tolist(), extra.tolist(), would_carry(ground, rows), strict=True):
        if more:
            carried = min(carried, int(limit * 10**model.quantity_places / more))
        if carried:
            found.append(
                Option(
                    key_at(plan, row),
                    _quantity(plan, int(ground.quantity[row])),
                    to_decimal(more, model.money_places),
                    _quantity(plan, carried),
                    to_decimal(more * carried, model.money_places + model.quantity_places),
                )
            )
    return tuple(found)


def unquoted(plan: Plan, depot: str | None = None, customer: str | None = None) -> tuple[Unquoted, ...]:
    """Lanes of a depot or a customer (or both) without a rate row, and below which quote each would pay.

    Raises:
        ValueError: neither is given, or one is not in the week.
    """
    model = plan.model
    if depot is None and customer is None:
        raise ValueError(
            "Say for which depot or customer: lanes without a quote are as many as pairs of them."
        )
    for name, known in ((depot, model.depots), (customer, model.customers)):
        if name is not None and name not in known:
            raise ValueError(f"There is no depot or customer '{name}' in the week.")
    ground = ground_of(plan)
    depots = range(len(model.depots)) if depot is None else [model.depots.index(depot)]
    customers = range(len(model.customers)) if customer is None else [model.customers.index(customer)]
    factor = 1 + Fraction(plan.week.rules.fuel_surcharge or 0) / 100
    found = []
    for i in depots:
        lanes = [j for j in customers if _is_unquoted(plan, i, j)]
        low = _quote_thresholds(ground, i, np.array(lanes, dtype=np.int64))
        money, pure = money_of(model.weights, low)
        paying = [n for n in range(len(lanes)) if pure[n]]
        ends = np.array([lanes[n] for n in paying], dtype=np.int64)
        carried = most_out_of(tied_to(ground, ground.closure.cost[i].copy()), ends, np.full(len(ends), i))
        for n, most in zip(paying, carried.tolist(), strict=True):
            below = without_surcharge(int(money[n]), model.money_places, factor, up=False)
            if below is not None:
                name = model.customers[lanes[n]]
                found.append(Unquoted(model.depots[i], name, below, _quantity(plan, most)))
    return tuple(found)


def would_carry(ground: Ground, rows: Integers) -> list[int]:
    """How much more each row would carry if its cost fell just below its lower threshold, in grains."""
    problem = ground.problem
    carried = np.zeros(len(rows), dtype=np.int64)
    idle = ~ground.has_spare[rows]
    for i in np.unique(problem.depot[rows[idle]]).tolist():
        places = np.flatnonzero(idle & (problem.depot[rows] == i))
        tied = tied_to(ground, ground.closure.cost[i].copy())
        carried[places] = most_out_of(tied, problem.customer[rows[places]], np.full(len(places), i))
    for place in np.flatnonzero(~idle).tolist():
        carried[place] = _beside_itself(ground, int(rows[place]))
    upper, quantity = ground.upper[rows], ground.quantity[rows]
    within = np.where(upper == UNLIMITED, carried, np.minimum(carried, upper - quantity))
    return [int(most) for most in within]


def _beside_itself(ground: Ground, row: int) -> int:
    """The same for a row that carries something already: chains must not lead over the row itself."""
    lower, upper = ground.lower.copy(), ground.upper.copy()
    lower[row] = upper[row] = ground.quantity[row]
    without = grounded_again(ground, ground.quantity, lower, upper)
    i, j = int(ground.problem.depot[row]), int(ground.problem.customer[row])
    tied = tied_to(without, without.closure.cost[i].copy())
    return int(most_out_of(tied, np.array([j]), np.array([i]))[0])


def _is_unquoted(plan: Plan, i: int, j: int) -> bool:
    model, problem = plan.model, plan.model.problem
    rows = slice(int(problem.start[j]), int(problem.start[j + 1]))
    only = plan.week.customers[model.customers[j]].one_depot
    barred = only not in (None, ANY_SINGLE_DEPOT, model.depots[i])
    return not barred and not bool(((problem.depot[rows] == i) & (model.rate_row[rows] != NO_RATE)).any())


def _quote_thresholds(ground: Ground, i: int, customers: Integers) -> Integers:
    """Below which cost a new row from depot i would pay, at each of these customers."""
    problem = ground.problem
    low = np.full(len(customers), -NO_WAY)
    for n, j in enumerate(customers.tolist()):
        rows = np.arange(problem.start[j], problem.start[j + 1])
        rows = rows[ground.has_spare[rows]]
        onward = ground.closure.cost[i, problem.depot[rows]]
        low[n] = np.where(onward < NO_WAY, problem.cost[rows] - onward, -NO_WAY).max(initial=-NO_WAY)
    return low


def _quantity(plan: Plan, grains: int) -> Decimal:
    return to_decimal(grains, plan.model.quantity_places)
