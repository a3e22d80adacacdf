"""What changing lanes costs at the least, in integers: a price on every change, and the network solves it.

Let every changed lane cost an amount P on top. A lane that may carry from L to M and was issued q then costs
at least P * (x - q) / (M - q) more where it carries more, and P * (q - x) / (q - L) more where it carries
less, for a changed lane costs all of P (the linear relaxation of a fixed charge: Balinski 1961). With these
slopes rounded down the lanes' costs are convex and whole, each row split at q is a row of a transportation
problem, and the exact core proves its least cost R. So a plan that changes N lanes costs at least R - P * N,
whatever P is: every figure here is an integer, and nothing rests on a solver in floating point.
"""

from dataclasses import dataclass

import numpy as np

from engine.exact import TooLarge
from engine.network import Contradiction, Problem, least_cost
from engine.planning.aims import MUST_MOVE, Weights, weights
from engine.planning.steady_lanes import NO_LANE, Flags, Integers, Lanes, limits_of, money_of

STEEPEST = 64
"""A slope is at most so many times the largest rate: a lower one still bounds, and the aims' weights fit."""


@dataclass(frozen=True, eq=False)
class Relaxed:
    """The least that plans cost with a price on every change.

    price:    of one changed lane, in grains of money times grains of quantity
    value:    money above the least cost, prices of avoidable changes included, proved
    moved:    (lanes,) lanes that the relaxed plan changes
    """

    price: int
    value: int
    moved: Flags

    def at_least(self, avoidable: int) -> int:
        """What a plan that changes so many lanes, beside those that change anyway, costs at the least."""
        return max(0, self.value - self.price * avoidable)


def relaxed(lanes: Lanes, price: int) -> Relaxed | None:
    """The bound at one price; None where the figures do not allow it to be worked out in integers."""
    model, problem = lanes.model, lanes.problem
    on_lane = np.flatnonzero(lanes.row_lane != NO_LANE)
    lane = lanes.row_lane[on_lane]
    lower, upper = limits_of(problem)
    capped = np.minimum(
        upper, np.maximum(np.minimum(problem.supply[problem.depot], problem.demand[problem.customer]), lower)
    )
    single = np.bincount(lane, minlength=len(lanes.names)) == 1
    priced = single[lane] & ~lanes.changed[lane]
    rows = on_lane[priced]
    kink = lanes.earlier[lane[priced]]
    steepest = STEEPEST * max(1, int(np.abs(model.money).max(initial=0)))
    up = np.minimum(price // np.maximum(capped[rows] - kink, 1), steepest)
    down = np.minimum(price // np.maximum(kink - lower[rows], 1), steepest)
    try:
        aims = _wider(
            model.weights,
            int(np.abs(model.money).max(initial=0)) + max(int(up.max(initial=0)), int(down.max(initial=0))),
            len(model.depots),
        )
    except TooLarge:
        return None
    cost = model.money + _reweighted(lanes, aims)
    # Each priced row becomes two: up to what was issued, cheaper by `down`, and beyond, dearer by `up`.
    count = np.ones(problem.rows, dtype=np.int64)
    count[rows] = 2
    source = np.repeat(np.arange(problem.rows), count)
    first = np.concatenate([[0], np.cumsum(count)[:-1]])
    split_cost, split_lower, split_upper = cost[source], lower[source], upper[source]
    below, beyond = first[rows], first[rows] + 1
    split_cost[below] -= down
    split_upper[below] = kink
    split_cost[beyond] += up
    split_lower[beyond] = 0
    split_upper[beyond] = capped[rows] - kink
    start = np.concatenate([[0], np.cumsum(np.add.reduceat(count, problem.start[:-1]))]).astype(np.int64)
    split = Problem(
        problem.supply, problem.demand, start, problem.depot[source], split_cost, split_lower, split_upper
    )
    try:
        flow = least_cost(split)
    except Contradiction:
        return None
    quantity = np.zeros(problem.rows, dtype=np.int64)
    np.add.at(quantity, source, flow.quantity)
    value = money_of(split_cost - _reweighted(lanes, aims)[source], flow.quantity)
    value += sum(d * q for d, q in zip(down.tolist(), kink.tolist(), strict=True))
    value -= money_of(model.money, lanes.best)
    carried = np.zeros(len(lanes.names), dtype=np.int64)
    np.add.at(carried, lane, quantity[on_lane])
    return Relaxed(price, value, np.not_equal(carried, lanes.earlier))


def _wider(old: Weights, largest: int, depots: int) -> Weights:
    """Weights of the same aims that outweigh larger amounts."""
    return weights(largest, depots, [a for a in old.of if len(a) == 1], MUST_MOVE in old.of)


def _reweighted(lanes: Lanes, aims: Weights) -> Integers:
    """(rows,) what a unit counts against its aim by other weights."""
    model = lanes.model
    weight = model.problem.cost - model.money
    found = np.zeros_like(weight)
    for aim, value in model.weights.of.items():
        found[weight == value] = aims[aim]
    return found
