"""The prices of the proof in money: what a unit at a depot or a customer is worth.

A price is the cost of the cheapest chain of exchanges from the stand-in depot. Such a chain crosses the
stand-ins once, so its sum of weights and money can be taken apart, and the money alone proves the
plan's cost by the same identity as the sums do (r = c - u - v holds part by part).
"""

from dataclasses import dataclass

from engine.network import Flow
from engine.network.closure import prices_from
from engine.planning.model import Model


@dataclass(frozen=True, slots=True)
class UnitPrices:
    """Money per unit as integers, by depot and by customer, and the cost they prove."""

    depot: list[int]
    customer: list[int]
    lower_bound: int


def unit_prices(model: Model, flow: Flow) -> UnitPrices:
    """Money prices of the plan, and the least that any plan serving the aims as well can cost."""
    problem = model.problem
    depot_price, customer_price = prices_from(flow, model.stand_in)
    depot = [model.weights.split(int(price)).money for price in depot_price]
    customer = [model.weights.split(int(price)).money for price in customer_price]
    raise NotImplementedError(problem)
