"""What a question is about: an order or a stock that grows or shrinks, and how far it can."""

from dataclasses import dataclass
from decimal import Decimal
from functools import cached_property
from typing import Literal

import numpy as np

from engine.changes import Alter
from engine.planning.model import Integers
from engine.planning.plan import Plan
from engine.reasons.ground import Ground, grounded_again
from engine.reasons.tied import Tied, pushed_into, pushed_out_of, tied_from, tied_to

What = Literal["depot", "customer"]


@dataclass(frozen=True, slots=True)
class End:
    """One more (or less) ordered by a customer or available at a depot; `index`: its place in the model."""

    what: What
    index: int
    more: bool


def altered_by(plan: Plan, what: What, name: str, amount: Decimal, more: bool) -> Alter:
    """The change that lets a stock or an order grow or shrink by an amount, down to 0 at least."""
    today = plan.week.depots[name].available if what == "depot" else plan.week.customers[name].ordered
    new = today + amount if more else max(Decimal(0), today - amount)
    return Alter(what, name, "available" if what == "depot" else "ordered", new)


@dataclass(frozen=True, eq=False)
class Stretch:
    """A change of the figure over which one value holds.

    amount: in grains; cost: of one unit, weights included
    rows, change: what the rows gain, in grains
    before: the plan at the near end
    """

    amount: int
    cost: int
    rows: Integers
    change: Integers
    before: Ground
    end: End

    @cached_property
    def after(self) -> Ground:
        """The plan at the far end."""
        return moved(self.before, self.end, self.amount, self.rows, self.change)


def stretch(ground: Ground, end: End, at_most: int) -> Stretch | None:
    """The longest change of the figure, up to `at_most` grains, over which one value holds; None: no way."""
    if end.what == "customer":
        return _ordered(ground, end, at_most)
    stay = int(ground.model.stay_rows[end.index])
    stays = int(ground.quantity[stay])
    charge = int(ground.problem.cost[stay])
    if end.more and charge <= ground.to_keeper[end.index]:
        return _stretch(ground, end, at_most, charge, np.array([stay]), np.array([at_most]))
    if not end.more:
        at_most = min(at_most, int(ground.upper[stay]))
        if stays > 0:
            amount = min(at_most, stays)
            return _stretch(ground, end, amount, -charge, np.array([stay]), np.array([-amount]))
    return _available(ground, end, at_most)


def _ordered(ground: Ground, end: End, at_most: int) -> Stretch | None:
    chains, stand_in = ground.closure.cost, ground.model.stand_in
    if end.more:
        tied = tied_from(ground, chains[:, stand_in].copy())
        amount, change = pushed_into(tied, stand_in, end.index, at_most)
    else:
        tied = tied_to(ground, chains[stand_in].copy())
        amount, change = pushed_out_of(tied, end.index, stand_in, at_most)
    return _over(ground, end, tied, amount, change)


def _available(ground: Ground, end: End, at_most: int) -> Stretch | None:
    if end.more:
        tied = tied_to(ground, ground.to_keeper, ground.keeper)
        amount, change = pushed_into(tied, end.index, ground.keeper, at_most)
    else:
        tied = tied_from(ground, ground.from_keeper, ground.keeper)
        amount, change = pushed_out_of(tied, ground.keeper, end.index, at_most)
    return _over(ground, end, tied, amount, change)


def _over(ground: Ground, end: End, tied: Tied, amount: int, change: Integers) -> Stretch | None:
    if amount == 0:
        return None
    moved = change != 0
    rows, change = tied.rows[moved], change[moved]
    cost = sum(c * x for c, x in zip(ground.problem.cost[rows].tolist(), change.tolist(), strict=True))
    return _stretch(ground, end, amount, cost // amount, rows, change)


def _stretch(ground: Ground, end: End, amount: int, cost: int, rows: Integers, change: Integers) -> Stretch:
    return Stretch(amount, cost, rows, change, ground, end)


def moved(ground: Ground, end: End, amount: int, rows: Integers, change: Integers) -> Ground:
    """The plan after the figure has changed by `amount`; what may stay at a depot changes with its stock."""
    quantity, upper = ground.quantity.copy(), ground.upper
    quantity[rows] += change
    if end.what == "depot":
        upper = upper.copy()
        upper[ground.model.stay_rows[end.index]] += amount if end.more else -amount
    return grounded_again(ground, quantity, ground.lower, upper)
