"""What one unit more and one unit less would cost at every depot and customer, exactly.

The answers are shortest chains of exchanges in the plan's residual network (Tomizawa 1971; Edmonds &
Karp 1972), not prices: where a plan is degenerate the two sides differ, and no single price could say so.
"""

from dataclasses import dataclass
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.exact import to_decimal
from engine.network.closure import NO_WAY
from engine.planning.model import EVEN_SHARE, Model
from engine.planning.plan import Plan, UnitPrice
from engine.reasons.ground import SHARED, Ground, ground_of, is_shared, money_of, overrun, why_withheld
from engine.reasons.kernels import MANY
from engine.reasons.sides import Side, customer_sides, depot_sides


class UnitValue(NamedTuple):
    """Cost after minus cost before, per unit, at today's figures; positive is dearer.

    `one_more_short` and `one_less_short` are the change in what goes short. None: the question has no
    answer (nothing there to take away, no way to bring more, shares would move, more has gone already).
    `…_holds_for` is up to which quantity the value holds; None: it was not asked, or holds without limit
    (see `Values.held`).
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
    """The values of a unit; `withheld` says in words why there are none, empty where there are.

    `held` says whether it was asked how far they hold.
    """

    depots: tuple[UnitValue, ...]
    customers: tuple[UnitValue, ...]
    withheld: str = ""
    held: bool = False


def values(plan: Plan, holds: bool = False) -> Values:
    """Values of a unit of stock at every depot and of a unit ordered by every customer.

    Args:
        plan: the plan that is asked.
        holds: whether to work out up to which quantity each value holds as well.

    Raises:
        TooLarge: a chain's cost could leave the exact integers.
    """
    if because := why_withheld(plan):
        return Values((), (), withheld=because)
    if is_shared(plan):
        depots, customers = (
            tuple(UnitValue(p.name, p.price) for p in some)
            for some in (plan.depot_prices, plan.customer_prices)
        )
        return Values(depots, customers, withheld=SHARED)
    return values_on(plan, ground_of(plan), holds)


def values_on(plan: Plan, ground: Ground, holds: bool = False) -> Values:
    """The same, where the chains are known already and nobody's share would move at once."""
    shares = plan.week.rules.when_short == EVEN_SHARE
    depots = _named(plan.model, plan.depot_prices, depot_sides(ground, holds), shares)
    customers = _named(plan.model, plan.customer_prices, customer_sides(ground, holds), shares)
    if void := overrun(plan):
        depots = tuple(_bare(one) if ("depot", one.name) in void else one for one in depots)
        customers = tuple(_bare(one) if ("customer", one.name) in void else one for one in customers)
    return Values(depots, customers, held=holds)


def _bare(one: UnitValue) -> UnitValue:
    return UnitValue(one.name, one.price)


def _named(
    model: Model, prices: tuple[UnitPrice, ...], sides: tuple[Side, Side], shares: bool
) -> tuple[UnitValue, ...]:
    more, less = (_columns(model, side, shares) for side in sides)
    return tuple(
        UnitValue(price.name, price.price, m, m_short, le, le_short, m_holds, le_holds)
        for price, (m, m_short, m_holds), (le, le_short, le_holds) in zip(prices, more, less, strict=True)
    )


_Cell = tuple[Decimal | None, Decimal | None, Decimal | None]


def _columns(model: Model, side: Side, shares: bool) -> list[_Cell]:
    """Value, change in what goes short, and how far it holds; where shares are even, none that moves them."""
    known = side.cost < NO_WAY
    if shares:
        known &= side.short == 0
    money, _ = money_of(model.weights, side.cost)
    holds = np.full(len(money), MANY) if side.holds is None else side.holds
    amounts = {amount: to_decimal(amount, model.money_places) for amount in set(money[known].tolist())}
    holds_for = {most: to_decimal(most, model.quantity_places) for most in set(holds[known].tolist())}
    units = {number: Decimal(number) for number in set(side.short.tolist())}
    return [
        (
            amounts[cost],
            units[short],
            None if most >= MANY else holds_for[most],
        )
        if there
        else (None, None, None)
        for there, cost, short, most in zip(
            known.tolist(), money.tolist(), side.short.tolist(), holds.tolist(), strict=True
        )
    ]
