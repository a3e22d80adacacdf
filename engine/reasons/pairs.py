"""Where more costs less: one more at a depot and one more for a customer that together make the week cheaper.

Known since the sixties as the paradox of the transportation problem (Charnes & Klingman 1971; Szwarc 1971):
where stock and orders are tied up in dear chains, one more on both ends can undo such a chain.
"""

from dataclasses import dataclass
from decimal import Decimal

import numpy as np

from engine.exact import to_decimal
from engine.network.closure import NO_WAY
from engine.planning.model import EVEN_SHARE
from engine.planning.plan import Plan
from engine.reasons.ground import Withheld, ground_of, money_of, why_withheld
from engine.reasons.kernels import more_at_both_ends
from engine.reasons.sides import more_available, more_ordered

AT_ONCE = 1_000
"""How many customers are looked at together, so that memory stays small."""


@dataclass(frozen=True, slots=True)
class Pair:
    """One more available at `depot` and one more ordered by `customer` change the cost by `cost` in all."""

    depot: str
    customer: str
    cost: Decimal


def pairs(plan: Plan, most: int = 20) -> tuple[Pair, ...]:
    """Pairs where one more at both ends costs less than nothing, the largest saving first.

    A pair is left out where the two apart would save as much; where shares are even there are none to tell.

    Raises:
        TooLarge: a chain's cost could leave the exact integers.
    """
    if because := why_withheld(plan):
        raise Withheld(because)
    model = plan.model
    if plan.week.rules.when_short == EVEN_SHARE:
        return ()
    ground = ground_of(plan)
    stock, order = more_available(ground, False).cost, more_ordered(ground, False).cost
    charge = ground.problem.cost[model.stay_rows]
    found: list[tuple[int, int, int]] = []
    for first in range(0, len(model.customers), AT_ONCE):
        last = min(first + AT_ONCE, len(model.customers))
        both = np.empty((last - first, ground.problem.depots), dtype=np.int64)
        more_at_both_ends(ground.rows, ground.closure.cost, first, both)
        apart = order[first:last, None] + np.minimum(charge, stock)
        apart = np.where(order[first:last, None] < NO_WAY, apart, NO_WAY)
        cost, pure = money_of(model.weights, np.minimum(both[:, :-1], NO_WAY))
        news = pure & (cost < 0) & (both[:, :-1] < apart)
        js, i_s = np.nonzero(news)
        found += zip(cost[js, i_s].tolist(), i_s.tolist(), (js + first).tolist(), strict=True)
        found = sorted(found)[:most]
    return tuple(
        Pair(model.depots[i], model.customers[j], to_decimal(cost, model.money_places))
        for cost, i, j in found
    )
