"""Planned shipments that left as they were planned, as one change."""

from collections.abc import Iterable
from datetime import date
from decimal import Decimal

from engine.changes import Add, Change, Together
from engine.exact import total_of
from engine.figures import Gone, RateKey
from engine.planning.gone import paid_per_unit, unused_name
from engine.planning.plan import Plan
from engine.week import describe


class NoRateThatDay(ValueError):
    """A lane on which no rate was valid on the day that is named."""


def gone_as_shipped(plan: Plan, keys: Iterable[RateKey], day: date | None) -> Together:
    """Planned shipments as gone, whole, each at the rate valid on its day, under the next free load numbers.

    Raises:
        NoRateThatDay: on one of the lanes none was.
    """
    week = plan.week
    changes: list[Change] = []
    going: dict[RateKey, list[Decimal]] = {}
    for one in plan.shipments:
        if not one.gone:
            going.setdefault(one.key, []).append(one.quantity)
    for key in keys:
        quantity = total_of(going.get(key, ()))
        if not quantity:
            continue
        rate = paid_per_unit(week, key.depot, key.customer, key.haulier, day, quantity)
        if rate is None:
            raise NoRateThatDay(f"No rate was valid on {describe(key)} that day: give one on Figures first.")
        name = unused_name(week)
        change = Add(Gone(name, key.depot, key.customer, quantity, rate, key.haulier, day))
        week = week.apply(change)
        changes.append(change)
    return Together(tuple(changes), f"{len(changes)} gone as planned")
