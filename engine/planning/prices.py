"""The prices of the proof in money: what a unit at a depot or a customer is worth.

A price is the cost of the cheapest chain of exchanges that leads to the stand-in depot. Such a chain
crosses the stand-ins once, so its sum of weights and money can be taken apart, and the money proves the
plan's money cost by the same identity as the whole sums do (with r = cost - depot price - customer price,
part by part).
"""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from engine.network import Flow, prove
from engine.network.closure import NO_WAY, Closure, close
from engine.network.problem import UNLIMITED
from engine.planning.model import Model

Integers = npt.NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class UnitPrices:
    """Money per unit as integers, by depot and by customer, and the money cost that they prove."""

    depot: list[int]
    customer: list[int]
    lower_bound: int
    closure: Closure


def unit_prices(model: Model, flow: Flow) -> UnitPrices:
    """The plan's prices in money, checked against every row, and the cost they prove.

    Raises:
        NotProved: the prices do not show the flow to be the best, which would be a fault of ours.
    """
    closure = close(flow)
    depot_price, customer_price = chain_prices(model, closure)
    prove(model.problem, flow.quantity, depot_price, customer_price)
    depot = [model.weights.split(price).money for price in depot_price.tolist()]
    customer = [model.weights.split(price).money for price in customer_price.tolist()]
    return UnitPrices(
        depot[:-1], customer[:-1], _lower_bound(model, depot_price, customer_price, depot, customer), closure
    )


def chain_prices(model: Model, closure: Closure) -> tuple[Integers, Integers]:
    """Prices of all depots and customers, stand-ins included, as costs of chains to the stand-in depot.

    A depot that has nothing it could shift gets the price at which its best row would begin to pay; a
    customer whose rows are all full, the price of its dearest.
    """
    problem, quantity = model.problem, closure.flow.quantity
    lower, upper = limits_of(model)
    has_room, may_give = quantity < upper, quantity > lower
    to_stand_in = closure.cost[:, model.stand_in]
    tied = to_stand_in < NO_WAY
    depot_price = np.where(tied, -to_stand_in, 0)
    rest = problem.cost - depot_price[problem.depot]
    customer_price = least_by_customer(model, np.where(has_room & tied[problem.depot], rest, NO_WAY))
    open_rows = has_room & ~tied[problem.depot] & (customer_price[problem.customer] < NO_WAY)
    begins = np.full(problem.depots, NO_WAY)
    np.minimum.at(
        begins,
        problem.depot[open_rows],
        problem.cost[open_rows] - customer_price[problem.customer[open_rows]],
    )
    depot_price = np.where(tied, depot_price, np.where(begins < NO_WAY, begins, 0))
    rest = problem.cost - depot_price[problem.depot]
    dearest = -least_by_customer(model, np.where(may_give, -rest, NO_WAY))
    full = np.where(dearest > -NO_WAY, dearest, 0)
    return depot_price, np.where(customer_price < NO_WAY, customer_price, full)


def limits_of(model: Model) -> tuple[Integers, Integers]:
    """(rows,) least and most that each row of the problem carries."""
    problem = model.problem
    lower = np.zeros(problem.rows, np.int64) if problem.at_least is None else problem.at_least
    upper = np.full(problem.rows, UNLIMITED) if problem.at_most is None else problem.at_most
    return lower, upper


def least_by_customer(model: Model, values: Integers) -> Integers:
    """(customers + 1,) the least value among each customer's rows; every customer has at least one."""
    return np.minimum.reduceat(values, model.problem.start[:-1])


def _lower_bound(
    model: Model, depot_price: Integers, customer_price: Integers, depot: list[int], customer: list[int]
) -> int:
    """The money cost that the prices prove, in grains of quantity times grains of money."""
    problem = model.problem
    lower, upper = limits_of(model)
    spare = problem.cost - depot_price[problem.depot] - np.repeat(customer_price, np.diff(problem.start))
    bound = sum(a * u for a, u in zip(problem.supply.tolist(), depot, strict=True))
    bound += sum(b * v for b, v in zip(problem.demand.tolist(), customer, strict=True))
    for row in np.flatnonzero((spare < 0) | ((spare > 0) & (lower > 0))).tolist():
        money = int(model.money[row]) - depot[problem.depot[row]] - customer[problem.customer[row]]
        bound += money * int(upper[row] if spare[row] < 0 else lower[row])
    return int(bound)
