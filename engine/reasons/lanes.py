"""A chain as what each rate row gains and loses in all: what a map shows and a sum checks."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

from engine.exact import total_of
from engine.reasons.chains import Chain


def net_by_lane(changes: Iterable[LaneChange]) -> dict[tuple[str, str], Decimal]:
    """What each lane gains or loses over all its hauliers; lanes where that is nothing are left out."""
    net: dict[tuple[str, str], Decimal] = {}
    for one in changes:
        lane = (one.depot, one.customer)
        net[lane] = net.get(lane, Decimal(0)) + one.change
    return {lane: change for lane, change in net.items() if change}


def cost_of(changes: Iterable[LaneChange]) -> Decimal:
    """What some rate rows come to together."""
    return total_of(one.cost for one in changes)


@dataclass(frozen=True, slots=True)
class LaneChange:
    """What a rate row carries more (or less, where negative) once a change is made, and what that costs."""

    depot: str
    customer: str
    haulier: str | None
    change: Decimal
    rate: Decimal

    @property
    def cost(self) -> Decimal:
        return self.change * self.rate


def lane_changes(chain: Chain) -> tuple[LaneChange, ...]:
    """The rate rows that a chain changes, in order of their first move."""
    sums: dict[tuple[str, str, str | None, Decimal], Decimal] = {}
    for leg in chain.legs:
        for move in leg.moves:
            if move.depot is not None and move.customer is not None:
                lane = (move.depot, move.customer, move.haulier, move.cost)
                sums[lane] = sums.get(lane, Decimal(0)) + move.change * leg.quantity
    return tuple(
        LaneChange(depot, customer, haulier, change, rate)
        for (depot, customer, haulier, rate), change in sums.items()
        if change
    )
