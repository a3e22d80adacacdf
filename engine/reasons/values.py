"""What one unit more and one unit less would cost at every depot and customer, exactly.

The answers are shortest chains of exchanges in the plan's residual network (Tomizawa 1971; Edmonds &
Karp 1972), not prices: where a plan is degenerate the two sides differ, and no single price could say so.
"""

from collections.abc import Callable
from dataclasses import dataclass
from decimal import Decimal
from functools import cache

import numpy as np

from engine.exact import to_decimal
from engine.network.closure import NO_WAY, Closure, close
from engine.planning.model import EVEN_SHARE, Integers, Model
from engine.planning.plan import Plan
from engine.planning.prices import least_by_customer, limits_of


@dataclass(frozen=True, slots=True)
class UnitValue:
    """Cost after minus cost before, per unit, at today's figures; positive is dearer.

    `one_more_short` and `one_less_short` are the change in what goes short. None: the question has no
    answer (nothing there to take away, or no way to bring more), or was not asked.
    """

    name: str
    price: Decimal
    one_more: Decimal | None = None
    one_more_short: Decimal | None = None
    one_less: Decimal | None = None
    one_less_short: Decimal | None = None
    one_more_holds_for: Decimal | None = None
    one_less_holds_for: Decimal | None = None


@dataclass(frozen=True, slots=True)
class Values:
    """The values of a unit; `withheld` says in words why there are none, empty where there are."""

    depots: tuple[UnitValue, ...]
    customers: tuple[UnitValue, ...]
    withheld: str = ""


def values(plan: Plan) -> Values:
    """Values of a unit of stock at every depot and of a unit ordered by every customer."""
    prices = (plan.depot_prices, plan.customer_prices)
    if plan.week.rules.when_short == EVEN_SHARE and plan.short:
        bare = (tuple(UnitValue(p.name, p.price) for p in some) for some in prices)
        return Values(*bare, withheld="Goods are shared evenly: a unit more or less moves everybody's share.")
    model, closure = plan.model, close(plan.flow)
    found = (_depot_values(model, closure), _customer_values(model, closure))
    named = (
        tuple(_named(model, price.name, price.price, sides) for price, sides in zip(p, s, strict=True))
        for p, s in zip(prices, found, strict=True)
    )
    return Values(*named)


@dataclass(frozen=True, slots=True)
class _Side:
    """A change in cost, weights included, and in what goes short, in units."""

    cost: int
    short: int


_Sides = tuple[_Side | None, _Side | None]


def _named(model: Model, name: str, price: Decimal, sides: _Sides) -> UnitValue:
    more, less = sides
    return UnitValue(name, price, *_parts(model, more), *_parts(model, less))


def _parts(model: Model, side: _Side | None) -> tuple[Decimal | None, Decimal | None]:
    if side is None:
        return None, None
    return to_decimal(model.weights.split(side.cost).money, model.money_places), Decimal(side.short)


def _joined(model: Model, closure: Closure) -> Callable[[int, int], int]:
    """By how much the cheapest chain from one depot to another changes the row that joins the stand-ins.

    What goes short is the stand-in depot's stock less what goes on that row.
    """
    stand_in, customer = model.stand_in, len(model.customers)

    @cache
    def change(i: int, k: int) -> int:
        chain = closure.chain(i, k) or ()
        return sum(
            (e.to_depot == stand_in) - (e.from_depot == stand_in) for e in chain if e.customer == customer
        )

    return change


def _customer_values(model: Model, closure: Closure) -> list[_Sides]:
    """One more ordered: a chain from a row with room to the stand-in depot; one less: the way back."""
    problem, quantity, stand_in = model.problem, closure.flow.quantity, model.stand_in
    lower, upper = limits_of(model)
    joined = _joined(model, closure)
    to_stand_in = closure.cost[problem.depot, stand_in]
    from_stand_in = closure.cost[stand_in, problem.depot]
    more = np.where((quantity < upper) & (to_stand_in < NO_WAY), problem.cost + to_stand_in, NO_WAY)
    less = np.where((quantity > lower) & (from_stand_in < NO_WAY), from_stand_in - problem.cost, NO_WAY)
    found = []
    for j, (more_row, less_row) in enumerate(zip(_best_rows(model, more), _best_rows(model, less), strict=True)):
        if j == len(model.customers):
            break
        one_more = one_less = None
        if more[more_row] < NO_WAY:
            depot = int(problem.depot[more_row])
            one_more = _Side(int(more[more_row]), 1 - joined(depot, stand_in))
        if less[less_row] < NO_WAY:
            depot = int(problem.depot[less_row])
            one_less = _Side(int(less[less_row]), -1 - joined(stand_in, depot))
        found.append((one_more, one_less))
    return found


def _best_rows(model: Model, values: Integers) -> list[int]:
    """The row with the least value of each customer, the stand-in customer last."""
    start = model.problem.start
    least = np.repeat(least_by_customer(model, values), np.diff(start))
    rows = np.arange(len(values))
    return np.minimum.reduceat(np.where(values == least, rows, len(values)), start[:-1]).tolist()


def _depot_values(model: Model, closure: Closure) -> list[_Sides]:
    """One more available may simply stay, since what may stay grows with it; one less is the way back.

    Where all that may stay does stay, one less is taken from there. Where nothing may stay (all must
    move), one less would break *must move is part of available*: no answer.
    """
    problem, quantity = model.problem, closure.flow.quantity
    keeper, stand_in = len(model.customers), model.stand_in
    joined = _joined(model, closure)
    _, upper = limits_of(model)
    more, more_rows = closure.one_more(keeper)
    less, less_rows = closure.one_less(keeper)
    found: list[_Sides] = []
    for i, stay in enumerate(model.stay_rows.tolist()):
        charge = int(problem.cost[stay])
        one_more: _Side | None = _Side(charge, 0)
        if more[i] < charge:
            row = int(more_rows[i])
            depot = int(problem.depot[row])
            one_more = _Side(int(more[i]), -(joined(depot, i) + (depot == stand_in)))
        one_less = None
        if upper[stay] > 0 and quantity[stay] == upper[stay]:
            one_less = _Side(-charge, 0)
        elif upper[stay] > 0 and less[i] < NO_WAY:
            row = int(less_rows[i])
            depot = int(problem.depot[row])
            one_less = _Side(int(less[i]), -(joined(i, depot) - (depot == stand_in)))
        found.append((one_more, one_less))
    return found
