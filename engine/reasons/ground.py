"""A plan as its reasons see it: the residual network, shrunk to the depots, and every row's room in it."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt

from engine.network.closure import NO_WAY, Closure, close
from engine.network.flow import Flow
from engine.network.problem import Problem
from engine.planning.aims import Weights
from engine.planning.model import EVEN_SHARE, Integers, Model
from engine.planning.plan import Plan
from engine.planning.prices import limits_of
from engine.reasons.kernels import Rows, Searched, second_exchanges

Flags = npt.NDArray[np.bool_]

SHARED = "Goods are shared evenly: a unit more or less moves everybody's share."
"""Why values are withheld."""


@dataclass(frozen=True, eq=False)
class Ground:
    """A plan's flow with the costs of all chains of exchanges between its depots.

    lower, upper: (rows,) least and most that each row of the problem may carry
    """

    model: Model
    closure: Closure
    lower: Integers
    upper: Integers

    @property
    def problem(self) -> Problem:
        return self.closure.flow.problem

    @property
    def quantity(self) -> Integers:
        """(rows,) what goes on each row, in grains."""
        return self.closure.flow.quantity

    @property
    def keeper(self) -> int:
        """Index of the stand-in customer, where goods stay."""
        return len(self.model.customers)

    @cached_property
    def has_room(self) -> Flags:
        """(rows,) whether a row could carry more."""
        return self.quantity < self.upper

    @cached_property
    def has_spare(self) -> Flags:
        """(rows,) whether a row could carry less."""
        return self.quantity > self.lower

    @cached_property
    def rows(self) -> Rows:
        """The rows as kernels take them."""
        problem = self.problem
        return Rows(problem.start, problem.depot, problem.cost, self.quantity, self.lower, self.upper)

    @cached_property
    def searched(self) -> Searched:
        """The exchanges as kernels take them, the second-best at another customer included."""
        return searched(self)


def ground_of(plan: Plan) -> Ground:
    """What all reasons of a plan start from.

    Raises:
        TooLarge: a chain's cost could leave the exact integers.
    """
    return grounded(plan.model, plan.flow, *limits_of(plan.model))


def grounded(model: Model, flow: Flow, lower: Integers, upper: Integers) -> Ground:
    """The same for any least-cost flow within these limits, which must be those of its problem."""
    return Ground(model, close(flow), lower, upper)


def searched(ground: Ground) -> Searched:
    """Cheapest exchanges, where each happens, and the cheapest that happens at another customer."""
    closure = ground.closure
    at = np.searchsorted(ground.problem.start, closure.less_on, side="right") - 1
    second = np.full_like(closure.direct, NO_WAY)
    second_exchanges(ground.rows, at, second)
    return Searched(closure.direct, second, at, ground.closure.flow.depot_price)


def is_shared(plan: Plan) -> bool:
    """Whether shares are even and somebody goes short, so that one unit moves everybody's share."""
    return plan.week.rules.when_short == EVEN_SHARE and bool(plan.short)


def money_of(weights: Weights, values: Integers) -> tuple[Integers, Flags]:
    """Sums of weights and money along paths, taken apart at once: the money, and whether no aim counts.

    values: any shape; NO_WAY and -NO_WAY are answered with False.
    """
    rest = values.copy()
    pure = np.abs(values) < NO_WAY
    for weight in weights.of.values():
        times = (2 * rest + weight) // (2 * weight)
        pure &= times == 0
        rest -= times * weight
    return rest, pure
