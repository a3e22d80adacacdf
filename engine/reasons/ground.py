"""A plan as its reasons see it: the residual network, shrunk to the depots, and every row's room in it."""

from dataclasses import dataclass, replace
from decimal import Decimal
from functools import cached_property

import numpy as np
import numpy.typing as npt

from engine.network.closure import NO_WAY, Closure, close_chains, exchange_directly
from engine.network.problem import Problem
from engine.planning.aims import Weights
from engine.planning.gone import left
from engine.planning.model import EVEN_SHARE, Integers, Model, limits_of
from engine.planning.plan import Plan
from engine.reasons.kernels import Rows, Searched, second_exchanges, take_apart

Flags = npt.NDArray[np.bool_]

OVERRUN = "More has gone already than this figure: it changes nothing until what has gone fits."
"""Why a figure has no value and no curve."""

WHOLE = (
    "This plan has whole loads: a unit more or less may need another vehicle, or none, so that no single "
    "cost of a unit and no rate at which the plan would change can be told. Put the change up on Plan: "
    "its price is worked out there."
)
"""Why there are no reasons for a plan with whole loads."""

APART = (
    "The rates and charges have so many digits that the aims were solved one after the other. What a unit "
    "more would mean to all of them together is not told. Put the change up on Plan: its price is worked out "
    "there."
)
"""Why there are no reasons for a plan whose aims had to be solved one by one."""


class Withheld(ValueError):
    """A question that has no exact answer for this plan; the message says why."""


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
    def to_keeper(self) -> Integers:
        """(depots,) what one more at each depot costs that may stay anywhere."""
        rows = self._keeper_rows(self.has_room)
        return self._least(self.closure.cost[self.problem.depot[rows]], self.problem.cost[rows])

    @cached_property
    def from_keeper(self) -> Integers:
        """(depots,) what one less at each depot costs that may be taken from what stays anywhere."""
        rows = self._keeper_rows(self.has_spare)
        return self._least(self.closure.cost[:, self.problem.depot[rows]].T, -self.problem.cost[rows])

    def _keeper_rows(self, usable: Flags) -> Integers:
        rows = np.arange(self.problem.start[self.keeper], self.problem.start[self.keeper + 1])
        return rows[usable[rows]]

    def _least(self, chains: Integers, cost: Integers) -> Integers:
        if not len(cost):
            return np.full(self.problem.depots, NO_WAY)
        least: Integers = np.where(chains < NO_WAY, chains + cost[:, None], NO_WAY).min(axis=0)
        return least

    @cached_property
    def rows(self) -> Rows:
        """The rows as kernels take them."""
        problem = self.problem
        return Rows(problem.start, problem.depot, problem.cost, self.quantity, self.lower, self.upper)

    @cached_property
    def searched(self) -> Searched:
        """The exchanges as kernels take them, the second-best at another customer included."""
        return searched(self)


def why_withheld(plan: Plan) -> str:
    """Why the plan as a whole has no values, thresholds and chains; empty where it has them."""
    if plan.whole is not None:
        return WHOLE
    return APART if plan.model.apart else ""


def ground_of(plan: Plan) -> Ground:
    """What all reasons of a plan start from.

    Raises:
        Withheld: the plan has no reasons of this kind, see `why_withheld`.
        TooLarge: a chain's cost could leave the exact integers.
    """
    if because := why_withheld(plan):
        raise Withheld(because)
    return Ground(plan.model, plan.closure, *limits_of(plan.model))


def grounded_again(ground: Ground, quantity: Integers, lower: Integers, upper: Integers) -> Ground:
    """The same week with other quantities or limits; the quantities must be of least cost within them."""
    figures = ground.problem.figures._replace(at_least=lower, at_most=upper)
    shape = ground.closure.direct.shape
    direct = np.full(shape, NO_WAY, dtype=np.int64)
    less_on, more_on = np.full(shape, -1, dtype=np.int64), np.full(shape, -1, dtype=np.int64)
    exchange_directly(figures, quantity, direct, less_on, more_on)
    chains = direct.copy()
    close_chains(chains)
    flow = replace(ground.closure.flow, quantity=quantity)
    return Ground(ground.model, Closure(flow, direct, less_on, more_on, chains), lower, upper)


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


def overrun(plan: Plan) -> frozenset[tuple[str, str]]:
    """("depot" or "customer", name) of whose whole figure more has gone than it allows.

    One more or one less of such a figure changes nothing until what has gone fits it again.
    """
    week = plan.week
    if not week.gone:
        return frozenset()
    gone, zero = left(week), Decimal(0)
    depots = {("depot", d.name) for d in week.depots.values() if gone.depot.get(d.name, zero) > d.available}
    customers = {
        ("customer", c.name) for c in week.customers.values() if gone.customer.get(c.name, zero) > c.ordered
    }
    return frozenset(depots | customers)


def money_of(weights: Weights, values: Integers) -> tuple[Integers, Flags]:
    """Sums of weights and money along paths, taken apart at once: the money, and whether no aim counts.

    values: any shape; NO_WAY and -NO_WAY are answered with False.
    """
    flat = np.ascontiguousarray(values, dtype=np.int64).ravel()
    money, pure = np.empty_like(flat), np.empty(len(flat), dtype=np.bool_)
    take_apart(np.array(list(weights.of.values()), dtype=np.int64), flat, money, pure)
    return money.reshape(values.shape), pure.reshape(values.shape)
