"""The aims solved one after the other, where their weights do not fit the exact integers.

Each aim counts one for every unit on its rows and is solved and proved by the core on what the aims before
leave free: where a row's cost less its prices is not 0, no plan that serves the aim as well moves it from
its limit (complementary slackness: Dantzig 1963), so there it stays. What is left is a problem in money.
"""

from dataclasses import replace

import numpy as np

from engine.network import Flow, least_cost
from engine.planning.model import AimPrices, Decided, Model, limits_of


def decided(model: Model) -> Model:
    """The model with every row fixed that the aims decide; itself where the aims are weights in its costs.

    Raises:
        Contradiction: no plan keeps all limits.
    """
    if not model.apart:
        return model
    problem = model.problem
    stated = limits_of(model)
    at_least, at_most = (limits.copy() for limits in stated)
    prices: list[AimPrices] = []
    flow: Flow | None = None
    for aim, rows in model.counted:
        cost = np.zeros(problem.rows, dtype=np.int64)
        cost[rows] = 1
        flow = least_cost(replace(problem, cost=cost, at_least=at_least, at_most=at_most), flow)
        spare = cost - flow.depot_price[problem.depot] - flow.customer_price[problem.customer]
        at_least, at_most = (
            np.where(spare < 0, at_most, at_least),
            np.where(spare > 0, at_least, at_most),
        )
        prices.append(AimPrices(aim, rows, flow.depot_price, flow.customer_price))
    return replace(
        model,
        problem=replace(problem, at_least=at_least, at_most=at_most),
        decided=Decided(*stated, tuple(prices)),
    )
