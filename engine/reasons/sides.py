"""One more and one less at every depot and customer, in integers: what it costs, and what goes short.

The answers are shortest paths in the residual network between a depot or customer and the stand-ins:
what is ordered on top comes from the stand-in depot, what a depot has on top ends at the stand-in customer.
"""

from typing import NamedTuple

import numpy as np

from engine.network.closure import NO_WAY
from engine.planning.model import Integers
from engine.reasons.ground import Ground
from engine.reasons.kernels import MANY
from engine.reasons.tied import (
    brought_less,
    brought_more,
    most_into,
    most_out_of,
    tied_from,
    tied_to,
)


class Side(NamedTuple):
    """One more, or one less, at each of many places.

    cost:  weights and money, NO_WAY where it cannot be done
    short: change in what goes short
    holds: in grains, MANY: without limit; None: not asked
    """

    cost: Integers
    short: Integers
    holds: Integers | None


def customer_sides(ground: Ground, holds: bool) -> tuple[Side, Side]:
    """One more and one less ordered, (customers,) each: chains from and to the stand-in depot."""
    return more_ordered(ground, holds), less_ordered(ground, holds)


def more_ordered(ground: Ground, holds: bool) -> Side:
    """(customers,) one more ordered by each."""
    chains, stand_in, count = ground.closure.cost, ground.model.stand_in, ground.keeper
    distance = chains[:, stand_in].copy()
    cost, by = brought_more(ground, distance)
    joined = _joined(ground, distance, _just(ground, stand_in), forward=True)
    short = 1 - joined[ground.problem.depot[by]]
    most = None
    if holds:
        ends = np.arange(count)
        most = most_into(tied_from(ground, distance), np.full(count, stand_in), ends)
    return Side(cost[:count], short[:count], most)


def less_ordered(ground: Ground, holds: bool) -> Side:
    """(customers,) one less ordered by each."""
    chains, stand_in, count = ground.closure.cost, ground.model.stand_in, ground.keeper
    distance = chains[stand_in].copy()
    cost, by = brought_less(ground, distance)
    joined = _joined(ground, distance, _just(ground, stand_in), forward=False)
    short = -1 - joined[ground.problem.depot[by]]
    most = None
    if holds:
        ends = np.arange(count)
        most = most_out_of(tied_to(ground, distance), ends, np.full(count, stand_in))
    return Side(cost[:count], short[:count], most)


def depot_sides(ground: Ground, holds: bool) -> tuple[Side, Side]:
    """One more and one less available, (depots,) each.

    One more may simply stay, since what may stay grows with it. Where all that may stay does stay, one less
    is taken from there. Where nothing may stay (all must move), one less would break *must move is part of
    available*: no answer.
    """
    return more_available(ground, holds), less_available(ground, holds)


def more_available(ground: Ground, holds: bool) -> Side:
    """(depots,) one more available at each."""
    problem, stand_in, keeper = ground.problem, ground.model.stand_in, ground.keeper
    stays = ground.model.stay_rows
    distance = ground.to_keeper
    charge, path = problem.cost[stays], distance[:stand_in]
    sent = path < charge
    joined = _joined(ground, distance, (_first(ground, 1), 1), forward=False)[:stand_in]
    most = None
    if holds:
        ends = np.arange(stand_in)
        over = most_into(tied_to(ground, distance, keeper), ends, np.full(stand_in, keeper))
        most = np.where(sent, over, MANY)
    return Side(np.where(sent, path, charge), np.where(sent, -joined, 0), most)


def less_available(ground: Ground, holds: bool) -> Side:
    """(depots,) one less available at each."""
    problem, stand_in, keeper = ground.problem, ground.model.stand_in, ground.keeper
    stays = ground.model.stay_rows
    distance = ground.from_keeper
    may_stay, full = ground.upper[stays], ground.quantity[stays] == ground.upper[stays]
    cost = np.where(full, -problem.cost[stays], distance[:stand_in])
    joined = _joined(ground, distance, (_first(ground, -1), -1), forward=True)[:stand_in]
    most = None
    if holds:
        ends = np.arange(stand_in)
        over = most_out_of(tied_from(ground, distance, keeper), np.full(stand_in, keeper), ends)
        most = np.minimum(np.where(full, may_stay, over), may_stay)
    return Side(np.where(may_stay > 0, cost, NO_WAY), np.where(full, 0, -joined), most)


def _just(ground: Ground, depot: int) -> tuple[Integers, int]:
    """A chain's end that is one depot, at no cost."""
    first = np.full(ground.problem.depots, NO_WAY)
    first[depot] = 0
    return first, 0


def _first(ground: Ground, sign: int) -> Integers:
    """(depots,) what one more (sign 1) or one less (-1) directly at the stand-in customer costs."""
    problem, keeper = ground.problem, ground.keeper
    rows = np.arange(problem.start[keeper], problem.start[keeper + 1])
    rows = rows[(ground.has_room if sign > 0 else ground.has_spare)[rows]]
    first = np.full(problem.depots, NO_WAY)
    np.minimum.at(first, problem.depot[rows], sign * problem.cost[rows])
    return first


def _joined(ground: Ground, distance: Integers, end: tuple[Integers, int], forward: bool) -> Integers:
    """(depots,) by how much each cheapest chain changes the row that joins the stand-ins.

    What goes short is the stand-in depot's stock less what goes on that row.

    Args:
        distance: (depots,) what the chains cost
        end: (depots,) what a depot costs that needs no exchange, and what the row gains if that depot is
            the stand-in
        forward: whether the chains hand over from the depot in question, or to it
    """
    closure, stand_in = ground.closure, ground.model.stand_in
    at_keeper = closure.less_on >= ground.problem.start[ground.keeper]
    change = np.zeros_like(closure.direct)
    change[:, stand_in] += at_keeper[:, stand_in]
    change[stand_in] -= at_keeper[stand_in]
    hops, change = (closure.direct, change) if forward else (closure.direct.T, change.T)
    first, base = end
    seen = (first == distance) & (distance < NO_WAY)
    joined = np.where(seen & (np.arange(len(seen)) == stand_in), base, 0)
    line = np.flatnonzero(seen).tolist()
    for here in line:
        hop = hops[:, here]
        found = ~seen & (hop < NO_WAY) & (hop + distance[here] == distance)
        joined[found] = joined[here] + change[found, here]
        seen |= found
        line.extend(np.flatnonzero(found).tolist())
    return joined
