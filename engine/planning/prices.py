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
from engine.planning.aims import OUT_OF_REACH
from engine.planning.model import Model, limits_of

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

    Where no chain leads there, one is thought of that costs more than all aims together: the prices of
    such places agree among themselves, and the mark is taken off with the aims. A depot that has nothing
    it could shift gets the price at which its best row would begin to pay.
    """
    problem, quantity = model.problem, closure.flow.quantity
    lower, upper = limits_of(model)
    has_room, may_give = quantity < upper, quantity > lower
    chain = closure.cost[:, model.stand_in]
    out_of_reach = model.weights[OUT_OF_REACH] + closure.cost.min(axis=1)
    chain = np.where(chain < NO_WAY, chain, out_of_reach)
    rest = problem.cost + chain[problem.depot]
    cheapest = least_by_customer(model, np.where(has_room, rest, NO_WAY))
    dearest = -least_by_customer(model, np.where(may_give, -rest, NO_WAY))
    full = np.where(dearest > -NO_WAY, dearest, 0)  # a customer whose rows are all full: its dearest row
    customer_price = np.where(cheapest < NO_WAY, cheapest, full)
    begins = np.full(problem.depots, NO_WAY)
    spare = problem.cost - customer_price[problem.customer]
    np.minimum.at(begins, problem.depot[has_room], spare[has_room])
    shifts = np.bincount(problem.depot[may_give], minlength=problem.depots) > 0
    return np.where(shifts | (begins == NO_WAY), -chain, begins), customer_price


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
