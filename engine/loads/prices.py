"""Prices on what couples the customers, and the bound that they prove, in integers.

At any prices the week falls apart into customers and depots; what these cost least, less what the limits are
worth at the prices, no plan can cost less than (Lagrange; Geoffrion 1974). Prices may come from anywhere,
floating-point numbers included: they are rounded to integers first, and the bound holds for those.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers, total
from engine.loads.arrays import NEVER, Answers, Priced, Rows
from engine.loads.problem import NO_LIMIT
from engine.loads.stage import LARGEST_PRICED, Node, Stage, most_counted
from engine.loads.turns import cheapest, regrets_of

Floats = NDArray[np.float64]

AT_ONCE = 50
"""Customers between two looks at whether to stop."""


class Prices(NamedTuple):
    """Per unit of what is short, in units of cost; all but `depot` are 0 or more.

    depot:   (depots,) of a unit taken from the depot
    load:    (depots,) of a load, where loads are limited
    haulier: (hauliers,) of a unit carried, where the haulier is limited
    cap:     (caps of the stage,) of a unit short beyond the cap
    must:    (1,) of a unit that must move and stays, beyond what may
    use:     (rows,) of using a row of a depot that may be closed
    """

    depot: Floats
    load: Floats
    haulier: Floats
    cap: Floats
    must: Floats
    use: Floats


def no_prices(stage: Stage) -> Prices:
    """All 0."""
    problem = stage.problem
    sizes = (problem.depots, problem.depots, len(problem.haulier_most), len(stage.caps), 1, problem.rows)
    return Prices(*(np.zeros(size) for size in sizes))


def between(one: Prices, other: Prices, share: float) -> Prices:
    """`share` of the one and the rest of the other."""
    return Prices(*(share * a + (1 - share) * b for a, b in zip(one, other, strict=True)))


def in_integers(stage: Stage, prices: Prices) -> list[Integers]:
    """Prices as whole numbers of the stage's scale, none so large that sums could wrap."""
    units, loads = most_counted(stage.problem)
    counted = (units, loads, units, units, units, loads)
    whole = []
    for part, most in zip(prices, counted, strict=True):
        # on one row at most five prices add up
        largest = LARGEST_PRICED // (8 * most)
        whole.append(np.clip(np.rint(part * stage.scale), -largest, largest).astype(np.int64))
    return [whole[0], *(np.maximum(part, 0) for part in whole[1:])]


def answers_for(stage: Stage) -> Answers:
    """Room for the customers' answers; nothing is known yet."""
    problem = stage.problem
    never = np.full(problem.customers, NEVER, dtype=np.int64)
    return Answers(np.zeros(problem.rows, dtype=np.int64), problem.demand.copy(), never, never.copy())


def priced_by(stage: Stage, node: Node, whole: list[Integers]) -> Priced:
    """What rows and customers cost at integer prices."""
    problem, scale = stage.problem, stage.scale
    depot, load, haulier, cap, _, use = whole
    unit = depot[problem.depot]
    if len(haulier):
        unit = unit + np.where(problem.haulier_limited, haulier[problem.haulier], 0)
    short = problem.short_cost * scale
    for (group, _), price in zip(stage.caps, cap.tolist(), strict=True):
        short = short + price * group
    load = np.where(problem.most_loads != NO_LIMIT, load, 0)
    use = np.where((node.opened == -1)[problem.depot], use, 0)
    return Priced(
        np.ascontiguousarray(unit),
        problem.per_load * scale + load[problem.depot],
        problem.charge_per_use * scale + use,
        np.ascontiguousarray(short),
    )


def bound_at(stage: Stage, node: Node, rows: Rows, prices: Prices, answers: Answers) -> int | None:
    """What no plan of the node can cost less than, in scaled units; None if there is no plan.

    answers: receives each customer's cheapest way at the prices
    """
    problem = stage.problem
    whole = in_integers(stage, prices)
    _, load, haulier, cap, must, _ = whole
    priced = priced_by(stage, node, whole)
    cheapest(rows, priced, np.arange(problem.customers, dtype=np.int64), answers)
    if (answers.lower == NEVER).any():
        return None
    use = np.where((node.opened == -1)[problem.depot], whole[5], 0)
    bound = total(answers.lower) + _at_depots(stage, node, (whole[0], must, use))
    for price, most in ((load, problem.most_loads), (haulier, problem.haulier_most)):
        limited = most != NO_LIMIT
        bound -= sum(a * b for a, b in zip(price[limited].tolist(), most[limited].tolist(), strict=True))
    bound -= sum(one * most for one, (_, most) in zip(cap.tolist(), stage.caps, strict=True))
    if stage.must_most is not None:
        bound -= int(must[0]) * stage.must_most
    return int(bound)


def _at_depots(stage: Stage, node: Node, prices: tuple[Integers, Integers, Integers]) -> int:
    """The least that the depots cost at the prices: each sends what suits it, or is closed."""
    problem, scale = stage.problem, stage.scale
    depot, must, use = prices
    must_price = (
        int(must[0]) + stage.must_cost * scale if stage.must_most is not None else (stage.must_cost * scale)
    )
    opened_by = np.zeros(problem.depots, dtype=np.int64)
    np.add.at(opened_by, problem.depot, use)
    worth = 0
    for i in range(problem.depots):
        supply, needed = int(problem.supply[i]), int(problem.must_move[i])

        def kept(sent: int, i: int = i, supply: int = supply, needed: int = needed) -> int:
            return (
                int(problem.unsent_cost[i]) * scale * (supply - sent)
                - int(depot[i]) * sent
                + must_price * max(0, needed - sent)
            )

        least = needed if stage.must_most == 0 else 0
        state = int(node.opened[i])
        opening = int(problem.opening_charge[i]) * scale
        open_cost = min(kept(sent) for sent in {least, needed, supply}) + opening
        if state == 1:
            worth += open_cost
        elif state == 0:
            worth += kept(0)
        elif least > 0:
            worth += open_cost - int(opened_by[i])
        else:
            worth += min(kept(0), open_cost - int(opened_by[i]))
    return worth


def regrets(
    stage: Stage, rows: Rows, priced: Priced, answers: Answers, most: int, should_stop: Callable[[], bool]
) -> Integers:
    """(rows,) by how much the bound rises, at least, where a row must be used; in scaled units.

    answers: the customers' cheapest ways at the same prices; rows not reached before a stop get 0
    most:    larger regrets may be given as any number from there
    """
    problem = stage.problem
    regret = np.zeros(problem.rows, dtype=np.int64)
    everybody = np.arange(problem.customers, dtype=np.int64)
    for which in np.array_split(everybody, max(1, -(-problem.customers // AT_ONCE))):
        if should_stop():
            break
        found = regrets_of(rows, priced, which, answers, most)
        regret[problem.start[which[0]] : problem.start[which[-1] + 1]] = found[
            problem.start[which[0]] : problem.start[which[-1] + 1]
        ]
    return regret
