"""Holds as acts of a desk: what each costs today, many at once, and a quantity typed for a whole lane."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

from engine.changes import Change, Lift, SetHold, Together
from engine.figures import Hold, RateKey
from engine.planning.differences import outcome
from engine.planning.lanes import Lane, lanes
from engine.planning.plan import Plan


@dataclass(frozen=True, slots=True)
class PricedHold:
    """A hold and what it costs today: what freight and charges would fall by if it alone were lifted."""

    key: RateKey
    hold: Hold
    freight: Decimal | None
    charges: Decimal | None


def priced_holds(plan: Plan) -> tuple[PricedHold, ...]:
    """Every hold with its price; None where the week could not be planned without it."""
    found = []
    for key, hold in plan.week.holds.items():
        lifted = outcome(plan, Lift(key)).difference
        freight = None if lifted is None else -lifted.freight_payable
        charges = None if lifted is None else -lifted.charges
        found.append(PricedHold(key, hold, freight, charges))
    return tuple(found)


def held_as_planned(shown: Iterable[Lane], reason: str = "") -> Change | None:
    """Holds on all these rows at what the plan sends there; rows held already keep their hold."""
    changes = tuple(SetHold(lane.key, lane.quantity, reason) for lane in shown if lane.hold is None)
    return Together(changes, "hold what is shown") if changes else None


def all_lifted(keys: Iterable[RateKey]) -> Change | None:
    """These holds lifted as one act."""
    changes = tuple(Lift(key) for key in keys)
    return Together(changes, "lift holds") if changes else None


class NoSingleRow(ValueError):
    """A quantity for a whole lane that is not clear about its rate row; the message says what to do."""


def hold_on_lane(plan: Plan, depot: str, customer: str, quantity: Decimal) -> SetHold:
    """A hold of a quantity on a lane: on the row that is used, or the cheapest open one.

    Raises:
        NoSingleRow: no rate is quoted on the lane, or several rows share it already.
    """
    rows = [lane for lane in lanes(plan, depot=depot, customer=customer, unused=True) if not lane.closed]
    if not rows:
        raise NoSingleRow(f"No open rate leads from {depot} to {customer}: give one on Figures first.")
    used = [lane for lane in rows if lane.quantity]
    if len(used) > 1:
        raise NoSingleRow(
            f"Several rates share the lane from {depot} to {customer}: show one depot and type there."
        )
    row = used[0] if used else min(rows, key=lambda lane: lane.per_unit)
    return SetHold(row.key, quantity)
