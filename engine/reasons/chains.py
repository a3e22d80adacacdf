"""What a change would displace, chain by chain, as data: who gives up what, where, and who takes it.

A change of a figure, or of what is held on a row, is worked out as the cheapest chain of exchanges at a
time (successive shortest paths; Tomizawa 1971), each as far as its narrowest row lets it go. The costs of a
chain's moves add up to the value shown, and the chains to what planning the changed week anew would cost.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import NamedTuple

import numpy as np

from engine.changes import Alter, Change, SetHold
from engine.exact import to_decimal, to_integer, total_of
from engine.figures import RateKey
from engine.network.closure import NO_WAY, Exchange
from engine.planning.model import EVEN_SHARE, NO_RATE, Integers
from engine.planning.plan import Plan
from engine.reasons.ends import End, moved
from engine.reasons.ground import (
    OVERRUN,
    SHARED,
    Ground,
    Withheld,
    ground_of,
    grounded_again,
    is_shared,
    overrun,
    why_withheld,
)
from engine.reasons.rows import gone_on, key_at, row_of

MOST_LEGS = 200
"""A change that takes more chains than this is not told to its end; `Chain.ends_early` says so."""


@dataclass(frozen=True, slots=True)
class Move:
    """What one row gains (or gives up, where negative) for each unit of the change.

    `depot` None: goes short; `customer` None: stays at the depot. `cost` is what a unit on the row costs.
    """

    depot: str | None
    customer: str | None
    haulier: str | None
    change: int
    cost: Decimal


@dataclass(frozen=True, slots=True)
class Step:
    """At `at` (None: where goods stay), `gives` brings less and `takes` brings more (None: goes short)."""

    gives: str | None
    takes: str | None
    at: str | None


@dataclass(frozen=True, slots=True)
class Leg:
    """A part of the change that displaces the same things: `by` is who brings or keeps the unit first.

    `cost` is per unit, charges included; `short` the change in what goes short per unit, `kept` the change
    in what stays although it must move.
    """

    quantity: Decimal
    cost: Decimal
    short: int
    kept: int
    by: str | None
    by_haulier: str | None
    steps: tuple[Step, ...]
    moves: tuple[Move, ...]


@dataclass(frozen=True, slots=True)
class Chain:
    """What a change displaces. `asked` is its size, positive for more; `note` says what it rests on."""

    what: str
    depot: str | None
    customer: str | None
    haulier: str | None
    asked: Decimal
    legs: tuple[Leg, ...]
    ends_early: str = ""
    note: str = ""

    @property
    def cost(self) -> Decimal:
        """What the change costs in all, as far as the legs go."""
        return total_of(leg.cost * leg.quantity for leg in self.legs)

    @property
    def quantity(self) -> Decimal:
        """How far the legs go."""
        return total_of(leg.quantity for leg in self.legs)


@dataclass(frozen=True, eq=False)
class _Way:
    """One unit's way: the rows that gain and give up, in order, and what it costs with weights.

    first: the row that the unit comes by; NO_RATE where the depot keeps it
    """

    rows: Integers
    change: Integers
    exchanges: tuple[Exchange, ...]
    first: int
    takes_over: bool


class _Start(NamedTuple):
    """The row that a way begins with, and the exchanges that follow."""

    row: int
    exchanges: tuple[Exchange, ...]


def chain(plan: Plan, change: Change) -> Chain:
    """What a change would displace, in chains from the cheapest on.

    Args:
        plan: the plan that is asked.
        change: another quantity ordered by a customer or available at a depot (`Alter`), or a quantity held
            on a rate row (`SetHold`).

    Raises:
        ValueError: the change is of another kind, or names what is not in the plan.
        TooLarge: a chain's cost could leave the exact integers.
    """
    match change:
        case Alter(what="customer", key=str(name), field="ordered", value=figure) if (
            name in plan.week.customers
        ):
            asked = figure - plan.week.customers[name].ordered
            end = End("customer", plan.model.customers.index(name), asked > 0)
            return _of_end(plan, end, Chain("ordered", None, name, None, asked, ()))
        case Alter(what="depot", key=str(name), field="available", value=figure) if name in plan.week.depots:
            asked = figure - plan.week.depots[name].available
            end = End("depot", plan.model.depots.index(name), asked > 0)
            return _of_end(plan, end, Chain("available", name, None, None, asked, ()))
        case SetHold(key=RateKey() as key, quantity=quantity):
            return _of_row(plan, key, quantity)
    raise ValueError(
        "A chain is asked for another ordered or available quantity, or for a hold, of what is in the plan; "
        f"got {change!r}."
    )


def _of_end(plan: Plan, end: End, asked: Chain) -> Chain:
    if because := why_withheld(plan):
        raise Withheld(because)
    if is_shared(plan):
        return replace(asked, note=SHARED)
    if (end.what, asked.depot or asked.customer) in overrun(plan):
        return replace(asked, note=OVERRUN)

    def follow(ground: Ground, left: int) -> tuple[_Way, int] | None:
        way = _way_of_customer(ground, end) if end.what == "customer" else _way_of_depot(ground, end)
        if way is None:
            return None
        if end.what == "depot" and not end.more:
            left = min(left, int(ground.upper[ground.model.stay_rows[end.index]]))
        return way, _narrowest(ground, way, left, widening=end.what == "depot" and end.more)

    def after(ground: Ground, way: _Way, amount: int) -> Ground:
        return moved(ground, end, amount, way.rows, way.change * amount)

    return _followed(plan, ground_of(plan), asked, follow, after)


def _of_row(plan: Plan, key: RateKey, quantity: Decimal) -> Chain:
    """More or less on one rate row: the row itself is held while the others make room."""
    row = row_of(plan, key)
    ground = ground_of(plan)
    quantity -= gone_on(plan, key)
    sign = 1 if quantity > _now(plan, ground, row) else -1

    def follow(ground: Ground, left: int) -> tuple[_Way, int] | None:
        way = _way_of_row(ground, row, sign)
        return None if way is None else (way, _narrowest(ground, way, left, widening=True))

    def after(ground: Ground, way: _Way, amount: int) -> Ground:
        quantity = ground.quantity.copy()
        quantity[way.rows] += way.change * amount
        return _held(ground, row, quantity)

    asked = _asked_of_row(plan, ground, row, quantity)
    return _followed(plan, _held(ground, row, ground.quantity), asked, follow, after)


def more_on(plan: Plan, key: RateKey, quantity: Decimal) -> SetHold:
    """The hold that puts so much more on a rate row than the plan does, with what has gone on it."""
    now = to_decimal(int(plan.quantity[row_of(plan, key)]), plan.model.quantity_places)
    return SetHold(key, total_of((now, gone_on(plan, key), quantity)))


def leg_of_row(plan: Plan, ground: Ground, row: int, sign: int) -> Chain | None:
    """What one more (sign 1) or one less (-1) on a row displaces, as far as one chain goes; None: no way."""
    limits = ground.lower[row], ground.upper[row]
    if ground.has_spare[row]:
        ground = _held(ground, row, ground.quantity)
    way = _way_of_row(ground, row, sign)
    if way is None:
        return None
    most = int(limits[1] - ground.quantity[row] if sign > 0 else ground.quantity[row] - limits[0])
    leg = _leg(plan, way, _narrowest(ground, way, most, widening=True))
    now = _now(plan, ground, row)
    return _with(_asked_of_row(plan, ground, row, now + sign * leg.quantity), (leg,))


def _now(plan: Plan, ground: Ground, row: int) -> Decimal:
    return to_decimal(int(ground.quantity[row]), plan.model.quantity_places)


def _asked_of_row(plan: Plan, ground: Ground, row: int, quantity: Decimal) -> Chain:
    key = key_at(plan, row)
    note = "Given the shares as they are." if is_shared(plan) else ""
    asked = quantity - _now(plan, ground, row)
    return Chain("held", key.depot, key.customer, key.haulier, asked, (), note=note)


def _held(ground: Ground, row: int, quantity: Integers) -> Ground:
    """The plan with other quantities, where a row carries neither more nor less than it does."""
    lower, upper = ground.lower.copy(), ground.upper.copy()
    lower[row] = upper[row] = quantity[row]
    return grounded_again(ground, quantity, lower, upper)


def _with(chain: Chain, legs: tuple[Leg, ...], ends_early: str = "") -> Chain:
    return replace(chain, legs=legs, ends_early=ends_early)


_Follow = Callable[[Ground, int], tuple[_Way, int] | None]
_After = Callable[[Ground, _Way, int], Ground]


def _followed(plan: Plan, ground: Ground, asked: Chain, follow: _Follow, after: _After) -> Chain:
    """Chain after chain until the whole change is made."""
    left = to_integer(abs(asked.asked), plan.model.quantity_places)
    legs: list[Leg] = []
    while left > 0:
        if len(legs) == MOST_LEGS:
            return _with(asked, tuple(legs), f"More than {MOST_LEGS} chains: told only so far.")
        found = follow(ground, left)
        if found is None or found[1] == 0:
            return _with(asked, tuple(legs), "No further: limits, holds, what must move or what has gone.")
        way, amount = found
        leg = _leg(plan, way, amount)
        if leg.short and plan.week.rules.when_short == EVEN_SHARE:
            return _with(asked, tuple(legs), f"From there on somebody goes short. {SHARED}")
        legs.append(leg)
        ground, left = after(ground, way, amount), left - amount
    return _with(asked, tuple(legs))


def _narrowest(ground: Ground, way: _Way, left: int, widening: bool) -> int:
    """How many grains a way carries; what stays at a depot that gains stock, and a held row, are no limit."""
    quantity = ground.quantity[way.rows]
    room = np.where(way.change > 0, ground.upper[way.rows] - quantity, quantity - ground.lower[way.rows])
    if widening and (way.first == NO_RATE or ground.lower[way.first] == ground.upper[way.first]):
        room = room[way.rows != way.rows[0]]
    return min(left, int(room.min(initial=left)))


def _way_of_customer(ground: Ground, end: End) -> _Way | None:
    """One more ordered: a row with room, then a chain to the stand-in depot; one less: the way back."""
    problem, stand_in, j = ground.problem, ground.model.stand_in, end.index
    rows = np.arange(problem.start[j], problem.start[j + 1])
    rows = rows[(ground.has_room if end.more else ground.has_spare)[rows]]
    sign = 1 if end.more else -1
    ends = (problem.depot[rows], np.full(len(rows), stand_in))
    first = _best(ground, rows, sign * problem.cost[rows], ends if end.more else ends[::-1])
    return None if first is None else _way(first, sign, takes_over=not end.more)


def _way_of_depot(ground: Ground, end: End) -> _Way | None:
    """One more available: kept, or a chain to whoever keeps it; one less: the way back."""
    problem, keeper, i = ground.problem, ground.keeper, end.index
    stay = int(ground.model.stay_rows[i])
    charge, sign = int(problem.cost[stay]), 1 if end.more else -1
    if (end.more and charge <= ground.to_keeper[i]) or (not end.more and ground.quantity[stay] > 0):
        return _Way(np.array([stay]), np.array([sign]), (), NO_RATE, takes_over=end.more)
    if not end.more and ground.upper[stay] == 0:
        return None
    rows = np.arange(problem.start[keeper], problem.start[keeper + 1])
    rows = rows[(ground.has_room if end.more else ground.has_spare)[rows]]
    ends = (problem.depot[rows], np.full(len(rows), i))
    last = _best(ground, rows, sign * problem.cost[rows], ends if end.more else ends[::-1])
    return None if last is None else _way(last, sign, takes_over=end.more)


def _way_of_row(ground: Ground, row: int, sign: int) -> _Way | None:
    """More on a row that is held: less on another of the customer's, and a chain from depot to depot."""
    problem = ground.problem
    i, j = int(problem.depot[row]), int(problem.customer[row])
    rows = np.arange(problem.start[j], problem.start[j + 1])
    rows = rows[(ground.has_spare if sign > 0 else ground.has_room)[rows]]
    ends = (np.full(len(rows), i), problem.depot[rows])
    other = _best(ground, rows, -sign * problem.cost[rows], ends if sign > 0 else ends[::-1])
    if other is None:
        return None
    way = _way(other, -sign, takes_over=False)
    return _Way(np.append(row, way.rows), np.append(sign, way.change), way.exchanges, row, way.takes_over)


_MOST_TRIED = 16


def _best(ground: Ground, rows: Integers, cost: Integers, ends: tuple[Integers, Integers]) -> _Start | None:
    """The row from which the whole way costs least and, among equals, has the fewest exchanges.

    ends: (rows,) the depots between which the chain runs that follows each row
    """
    onward = ground.closure.cost[ends]
    whole = np.where(onward < NO_WAY, cost + onward, NO_WAY)
    if not len(rows) or whole.min() >= NO_WAY:
        return None
    tried = np.flatnonzero(whole == whole.min())[:_MOST_TRIED].tolist()
    found = [
        _Start(int(rows[n]), ground.closure.chain(int(ends[0][n]), int(ends[1][n])) or ()) for n in tried
    ]
    return min(found, key=lambda start: len(start.exchanges))


def _way(start: _Start, sign: int, takes_over: bool) -> _Way:
    rows, change = [start.row], [sign]
    for one in start.exchanges:
        rows += [one.less_on, one.more_on]
        change += [-1, 1]
    return _Way(np.array(rows), np.array(change), start.exchanges, start.row, takes_over)


def _leg(plan: Plan, way: _Way, amount: int) -> Leg:
    model = plan.model
    stand_in, keeper = model.stand_in, len(model.customers)
    cost = sum(c * x for c, x in zip(model.problem.cost[way.rows].tolist(), way.change.tolist(), strict=True))
    short = sum(
        x for row, x in zip(way.rows.tolist(), way.change.tolist(), strict=True)
        if model.problem.depot[row] == stand_in and row != model.joining_row
    )  # fmt: skip

    must = set(model.must_row.tolist())
    kept = sum(x for row, x in zip(way.rows.tolist(), way.change.tolist(), strict=True) if row in must)

    def depot(index: int) -> str | None:
        return None if index == stand_in else model.depots[index]

    steps = [
        Step(
            depot(e.from_depot),
            depot(e.to_depot),
            None if e.customer == keeper else model.customers[e.customer],
        )
        for e in way.exchanges
    ]
    moves = tuple(
        _move(plan, row, change)
        for row, change in zip(way.rows.tolist(), way.change.tolist(), strict=True)
        if row != model.joining_row
    )
    first = int(way.rows[0]) if way.first == NO_RATE else way.first
    by = _move(plan, first, 1)
    return Leg(
        to_decimal(amount, model.quantity_places),
        to_decimal(model.weights.split(cost).money, model.money_places),
        short,
        kept,
        by.depot,
        by.haulier,
        tuple(reversed(steps)) if way.takes_over else tuple(steps),
        moves,
    )


def _move(plan: Plan, row: int, change: int) -> Move:
    model, flat = plan.model, plan.week.rates.flat
    i, j = int(model.problem.depot[row]), int(model.problem.customer[row])
    position = int(model.rate_row[row])
    return Move(
        None if i == model.stand_in else model.depots[i],
        None if j == len(model.customers) else model.customers[j],
        None if position == NO_RATE else flat.haulier_of(position),
        change,
        to_decimal(int(model.money[row]), model.money_places),
    )
