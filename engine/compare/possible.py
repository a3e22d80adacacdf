"""A mixed week made possible: what limits and holds force shrinks to what its other figures allow.

Orders of one week under the holds of another may contradict each other. The later holds then give way
first, the rate rows' *at least* after them, and everything that gave way is said.
"""

from collections import defaultdict
from collections.abc import Mapping
from dataclasses import dataclass, replace
from decimal import Decimal
from types import MappingProxyType

import numpy as np

from engine.exact import canonical, total_of
from engine.figures import ANY_SINGLE_DEPOT, Depot, Hold, RateKey
from engine.planning.gone import left, remaining, superseded
from engine.rates import Rates
from engine.week import Week, describe


@dataclass(slots=True)
class _Forced:
    """A quantity that a hold or an *at least* forces on a row; `row` is its id among the rates."""

    key: RateKey
    row: int
    was: Decimal
    quantity: Decimal
    held: bool
    gone: Decimal

    @property
    def rest(self) -> Decimal:
        """What of it has not gone yet."""
        return remaining(self.quantity, self.gone)


def made_possible(week: Week) -> tuple[Week, tuple[str, ...]]:
    """The week with everything forced shrunk to the possible, and what shrank, as sentences."""
    depots, said = _depots(week)
    forced = [*_holds(week), *_at_least(week)]
    for one in forced:
        _within_its_row(week, one)
    gone = left(week)
    for what, stated, used in (
        ("customer", {n: c.ordered for n, c in week.customers.items()}, gone.customer),
        ("depot", {n: d.available for n, d in week.depots.items()}, gone.depot),
    ):
        at: dict[str, list[_Forced]] = defaultdict(list)
        for one in forced:
            at[getattr(one.key, what)].append(one)
        for name, there in at.items():
            _shrink(there, remaining(stated.get(name), used.get(name)))
    unit = week.rules.unit
    said += [
        f"{'Hold' if one.held else 'At least'} on {describe(one.key)}: {canonical(one.was)} {unit} are not "
        f"possible here, {canonical(one.quantity)} {unit} are kept."
        for one in forced
        if one.quantity != one.was
    ]
    changed = replace(week, depots=depots, holds=_held(week, forced), rates=_rates(week, forced))
    return changed, tuple(said)


def _depots(week: Week) -> tuple[Mapping[str, Depot], list[str]]:
    """What must move is part of what is available."""
    over = {
        name: replace(depot, must_move=depot.available)
        for name, depot in week.depots.items()
        if depot.must_move is not None and depot.must_move > depot.available
    }
    said = [
        f"{name}: only {canonical(depot.available)} {week.rules.unit} are there to move."
        for name, depot in over.items()
    ]
    return MappingProxyType({**week.depots, **over}), said


def _holds(week: Week) -> list[_Forced]:
    """Holds, the earliest first; one whose row is not there has nothing to hold."""
    gone, found = left(week).row, []
    for key, hold in week.holds.items():
        number = week.rates.find(key)
        if number is not None:
            went = gone.get(key[:3], Decimal(0)) if key.number == 1 else Decimal(0)
            found.append(_Forced(key, number, hold.quantity, hold.quantity, True, went))
    return found


def _at_least(week: Week) -> list[_Forced]:
    flat = week.rates.flat
    if "at_least" not in flat.decimals:
        return []
    gone, dead, found = left(week).row, superseded(flat), []
    for position in np.flatnonzero((flat.decimals["at_least"].values > 0) & ~dead).tolist():
        number = int(week.rates.ids_in_order[position])
        key, least = week.rates.key_of(number), flat.decimals["at_least"].get(position)
        known = key.depot in week.depots and key.customer in week.customers
        if least is not None and known and key not in week.holds:
            went = gone.get(key[:3], Decimal(0)) if key.number == 1 else Decimal(0)
            found.append(_Forced(key, number, least, least, False, went))
    return found


def _within_its_row(week: Week, one: _Forced) -> None:
    """What is forced on a row stays within its own limit and goes only where it may."""
    row = week.rates.row(one.row)
    only = week.customers[one.key.customer].one_depot if one.key.customer in week.customers else None
    if row is None or row.closed or only not in (None, ANY_SINGLE_DEPOT, one.key.depot):
        one.quantity = Decimal(0)
    elif row.at_most is not None:
        one.quantity = min(one.quantity, row.at_most)
    if one.held and one.gone > one.quantity and row is not None and not row.closed:
        one.quantity = one.gone


def _shrink(there: list[_Forced], limit: Decimal) -> None:
    """Bring what is forced at one place down to a limit: the last gives way first."""
    excess = total_of([*(one.rest for one in there), -limit])
    ordered = [*(one for one in there if one.held), *(one for one in there if not one.held)]
    for one in reversed(ordered):
        if excess <= 0:
            return
        less = min(excess, one.rest)
        one.quantity = total_of((one.quantity, -less))
        excess = total_of((excess, -less))


def _held(week: Week, forced: list[_Forced]) -> Mapping[RateKey, Hold]:
    now = {one.key: one.quantity for one in forced if one.held}
    return MappingProxyType(
        {key: replace(hold, quantity=now[key]) for key, hold in week.holds.items() if key in now}
    )


def _rates(week: Week, forced: list[_Forced]) -> Rates:
    """The rates with every *at least* that gave way, on rows that are held too."""
    rates = week.rates
    for one in forced:
        row = rates.row(one.row)
        if row is None or row.at_least is None:
            continue
        least = min(row.at_least, one.quantity)
        if least != row.at_least:
            rates = rates.with_row(one.row, replace(row, at_least=least))
    return rates
