"""Steady plans: what it costs to change fewer lanes than the least-cost plan does, so that somebody picks.

A lane is a depot, a customer and a haulier; it is changed where its quantity of the whole week differs from
the issued plan's (`steady_lanes`). Only plans count that reach every aim before cost as far as the least-cost
plan does: nobody goes short for a quiet telephone. Cost is freight and charges, exact, before rounding for
payment. C(N) is the least cost of a plan that changes at most N lanes. Then

* *at most N lanes*: the plan of C(N);
* *spend at most X*: the fewest N with C(N) no more than the least cost plus X;
* *worth it only if it saves S each*: the plan of least C(N) + S * N. Against it, a plan with n changes fewer
  costs at least n * S more, and one with n more saves at most n * S: no change or group of changes is made
  that does not save S for each of its lanes. At equal sums, fewer lanes;
* *the issued plan, completed*: the plan of the fewest lanes for which there is one.

What is proved in integers: every plan here, its sums, limits, lanes and cost, and that nothing is cheaper
with the same lanes free (`fixed_but`); and the bound R - P * N of `steady_bound` for every N. Where that
bound meets the cost, C(N) is proved outright. Between them the choice of lanes is searched by HiGHS, in
floating point: a C(N) that it closes, to a hundredth of a minor unit, is marked as resting on the solver (so
is the fewest number of lanes), and one that it does not close in time keeps its best plan, exactly priced,
and the better of the two bounds.
"""

import time
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from decimal import Decimal
from typing import Literal

import numpy as np

from engine.changes import Change, SetHold, Together
from engine.exact import to_decimal, total_of
from engine.figures import RateKey
from engine.money import minor_places
from engine.network import least_cost
from engine.network.ties import nearest
from engine.planning.gone import left, superseded
from engine.planning.near import earlier_quantities
from engine.planning.plan import Plan
from engine.planning.steady_bound import Relaxed, relaxed
from engine.planning.steady_lanes import (
    NO_LANE,
    Fixed,
    Flags,
    Integers,
    LaneName,
    Lanes,
    changed_lanes,
    fixed_but,
    lanes_against,
    limits_of,
)
from engine.planning.steady_search import search

Rests = Literal["whole numbers", "solver", "open"]
"""What says that nothing is cheaper: integers alone, HiGHS, or nothing yet."""

PRICES = 24
FEW_LANES = 400
"""Up to so many lanes the search is over in no time and begins at once with all of them."""


@dataclass(frozen=True, eq=False)
class Point:
    """The best plan found that changes at most `lanes` lanes.

    extra: what it costs above the least cost; bound: what no such plan costs less than, above the least cost
    """

    lanes: int
    extra: Decimal
    bound: Decimal
    rests: Rests
    names: tuple[LaneName, ...]
    fixed: Fixed


@dataclass(frozen=True, eq=False)
class Trade:
    """Lanes changed against cost, the fewest lanes first; the last point is a plan of least cost.

    fewest: no plan that serves the aims changes fewer lanes than this, as far as is known
    """

    lanes: Lanes
    points: tuple[Point, ...]
    fewest: int
    seconds: float

    @property
    def closed(self) -> bool:
        """Whether nothing is open."""
        return all(point.rests != "open" for point in self.points) and self.fewest == self.points[0].lanes

    @property
    def saving(self) -> Decimal:
        """What the least-cost plan saves against the issued plan, completed with the fewest changes."""
        return self.points[0].extra


def trade(plan: Plan, sent: Mapping[RateKey, Decimal], seconds: float = 5.0) -> Trade:
    """The whole trade between lanes changed and cost.

    plan:    the least-cost plan, near the issued one
    sent:    what the issued plan sends on each rate row in the whole week
    seconds: when to stop searching; what is open by then says so

    Raises:
        TooLarge: the issued quantities are too finely divided for exact integers.
    """
    begun = time.monotonic()
    end = begun + seconds
    lanes = lanes_against(plan, sent)
    every = np.ones(len(lanes.names), dtype=bool)
    least = fixed_but(lanes, every)
    if least is None:  # the plan itself is one, so this would be a fault of ours
        raise ArithmeticError("The plan does not satisfy its own sums.")
    pool: dict[int, Fixed] = {}
    _note(pool, least)
    _note(pool, Fixed(lanes.best, found := changed_lanes(lanes, lanes.best), _count(lanes, found), 0))
    bounds = _by_prices(lanes, pool, end)
    best = _Best(lanes, pool, bounds)
    if len(lanes.names) > FEW_LANES:
        best.search(_touched(lanes, pool), begun + seconds / 2, whole=False)
    best.search(every, end, whole=True)
    return replace(best.trade(), seconds=time.monotonic() - begun)


def within(trade: Trade, spend: Decimal) -> Point:
    """The plan of fewest changed lanes among those found that cost at most so much above the least cost."""
    return next(point for point in trade.points if point.extra <= spend or point is trade.points[-1])


def at_most(trade: Trade, lanes: int) -> Point | None:
    """The cheapest plan that changes at most so many lanes; None where none was found."""
    fitting = [point for point in trade.points if point.lanes <= lanes]
    return fitting[-1] if fitting else None


def worth(trade: Trade, each: Decimal) -> Point:
    """The plan none of whose changes saves less than so much for each lane."""
    return min(trade.points, key=lambda point: (total_of([point.extra, *[each] * point.lanes]), point.lanes))


def holds_for(trade: Trade, point: Point, reason: str) -> Change | None:
    """Holds that make the week's plan the one of a point, as one act; None where it is the plan already.

    Only lanes that stay as issued are held, and of these only such as the least-cost plan would change.
    """
    lanes = trade.lanes
    near = earlier_quantities(lanes.plan.week, lanes.model, _sent(lanes)) * np.int64(_scale(lanes))
    held = np.zeros(len(lanes.names), dtype=bool)
    quantity = lanes.best
    while True:
        strayed = changed_lanes(lanes, quantity) & ~point.fixed.changed
        if not (strayed & ~held).any():
            break
        # What a lane carries, once held, keeps others out: those that carry nothing are held only if need be.
        carrying = strayed & ~held & (lanes.earlier > 0)
        held |= carrying if carrying.any() else strayed
        quantity = _planned(lanes, held, point.fixed.quantity, near)
    changes = tuple(_holds(lanes, held, point.fixed.quantity, reason))
    return Together(changes, f"change {point.lanes} lanes at most") if changes else None


def _planned(lanes: Lanes, held: Flags, at: Integers, near: Integers) -> Integers:
    """What the week would be planned as with some lanes held as a point has them."""
    lower, upper = (limit.copy() for limit in limits_of(lanes.problem))
    rows = _rows_of(lanes, held)
    lower[rows] = upper[rows] = at[rows]
    problem = replace(lanes.problem, at_least=lower, at_most=upper)
    return nearest(least_cost(problem, lanes.plan.flow), near).quantity


def _holds(lanes: Lanes, held: Flags, at: Integers, reason: str) -> Iterable[SetHold]:
    """A hold states the whole week: what has gone on a lane counts into its first row."""
    week, model = lanes.plan.week, lanes.model
    gone = left(week).row
    ids = week.rates.ids_in_order
    for row in sorted(_rows_of(lanes, held).tolist(), key=lambda row: int(model.rate_row[row])):
        key = week.rates.key_of(int(ids[model.rate_row[row]]))
        quantity = to_decimal(int(at[row]), lanes.places)
        if key[:3] in gone and int(ids[model.rate_row[row]]) == _first_live(lanes, row):
            quantity = total_of((quantity, gone[key[:3]]))
        if key not in week.holds:
            yield SetHold(key, quantity, reason)


def _first_live(lanes: Lanes, row: int) -> int:
    """The rate row of a lane that what has gone counts into: the first that no later rate has replaced."""
    week, model = lanes.plan.week, lanes.model
    replaced = superseded(week.rates.flat)
    ids = week.rates.ids_in_order
    same = np.flatnonzero(lanes.row_lane == lanes.row_lane[row])
    alive = [int(model.rate_row[one]) for one in same if not replaced[model.rate_row[one]]]
    return int(ids[min(alive)]) if alive else -1


def _rows_of(lanes: Lanes, chosen: Flags) -> Integers:
    return np.flatnonzero((lanes.row_lane != NO_LANE) & chosen[lanes.row_lane])


def _sent(lanes: Lanes) -> dict[RateKey, Decimal]:
    """What was issued by lane, as if each had one rate; what has gone included."""
    gone = left(lanes.plan.week).row
    found = {}
    for name, quantity in zip(lanes.names, lanes.earlier.tolist(), strict=True):
        whole = total_of((to_decimal(quantity, lanes.places), gone.get(name, Decimal(0))))
        if whole > 0:
            found[RateKey(*name)] = whole
    return found


def _scale(lanes: Lanes) -> int:
    scale: int = 10 ** (lanes.places - lanes.model.quantity_places)
    return scale


def _count(lanes: Lanes, changed: Flags) -> int:
    return int(changed.sum()) + len(lanes.elsewhere)


def _note(pool: dict[int, Fixed], fixed: Fixed | None) -> bool:
    """Keep a plan where none with as many changes costs less."""
    if fixed is None or (fixed.lanes in pool and pool[fixed.lanes].extra <= fixed.extra):
        return False
    pool[fixed.lanes] = fixed
    return True


def _touched(lanes: Lanes, pool: Mapping[int, Fixed]) -> Flags:
    """All lanes of the customers on whose lanes some plan seen so far changes anything."""
    found = lanes.changed.copy()
    for fixed in pool.values():
        found |= fixed.changed
    rows = np.flatnonzero(lanes.row_lane != NO_LANE)
    lane, customer = lanes.row_lane[rows], lanes.problem.customer[rows]
    among = np.isin(customer, customer[found[lane]])
    found[lane[among]] = True
    return found


def _by_prices(lanes: Lanes, pool: dict[int, Fixed], end: float) -> list[Relaxed]:
    """The bounds of a ladder of prices; the plans they lead to are noted."""
    grain = 10 ** (lanes.places + lanes.model.money_places)
    highest = max(grain, int(np.abs(lanes.model.money).max(initial=1)) * int(lanes.earlier.max(initial=1)))
    found = []
    for step in range(PRICES):
        if time.monotonic() > end:
            break
        one = relaxed(lanes, highest >> step)
        if one is None:
            continue
        found.append(one)
        fixed = fixed_but(lanes, one.moved)
        if fixed is not None:
            _note(pool, fixed)
    return found


class _Best:
    """The best plans and bounds so far, by lanes changed."""

    def __init__(self, lanes: Lanes, pool: dict[int, Fixed], bounds: list[Relaxed]) -> None:
        self.lanes, self.pool, self.bounds = lanes, pool, bounds
        self.claimed: dict[int, float] = {}
        self.grain = 10 ** (lanes.places + lanes.model.money_places)
        minor = minor_places(lanes.plan.week.rules.currency)
        self.minor = 10.0 ** -(minor + 2)

    def best(self, count: int) -> Fixed | None:
        """The cheapest plan seen with at most so many changes, the fewest changes at equal cost."""
        fitting = [one for number, one in self.pool.items() if number <= count]
        return min(fitting, key=lambda one: (one.extra, one.lanes)) if fitting else None

    def proved(self, count: int) -> int:
        avoidable = count - self.lanes.unavoidable
        if avoidable < 0:
            return 2**200
        return max((one.at_least(avoidable) for one in self.bounds), default=0)

    def claim(self, count: int) -> float:
        """The solver's bound: what holds with more changes allowed holds with fewer."""
        return max((bound for number, bound in self.claimed.items() if number >= count), default=0.0)

    def last(self) -> int:
        """The fewest changes among plans of least cost."""
        return min(number for number, one in self.pool.items() if one.extra == 0)

    def open(self, count: int) -> bool:
        found = self.best(count)
        if found is None:
            return self.claim(count) < float("inf")
        if found.extra <= self.proved(count):
            return False
        return bool(found.extra / self.grain - self.claim(count) > self.minor)

    def search(self, allowed: Flags, end: float, whole: bool) -> None:
        """One count after the other, from the most changes to the fewest, while there is time.

        whole: every lane is allowed, so that the solver's bound counts
        """
        count = self.last() - 1
        while count >= self.lanes.unavoidable and time.monotonic() < end:
            if not self.open(count):
                if self.best(count) is None:
                    break
                count -= 1
                continue
            remaining = end - time.monotonic()
            most = count - self.lanes.unavoidable
            found = search(
                self.lanes, allowed, most, remaining if whole else min(remaining, 0.5), self.best(count)
            )
            if found.free is not None:
                _note(self.pool, fixed_but(self.lanes, found.free))
            if whole:
                self.claimed[count] = max(self.claimed.get(count, 0.0), found.bound)
            if found.bound == float("inf") or (found.free is None and self.best(count) is None):
                break
            best = self.best(count)
            count = (count if best is None or whole else min(count, best.lanes)) - 1

    def trade(self) -> Trade:
        counts = sorted(number for number in self.pool if number <= self.last())
        lowest = counts[0]
        fewest = lowest
        while fewest > self.lanes.unavoidable and self.claim(fewest - 1) < float("inf"):
            fewest -= 1
        points: list[Point] = []
        for count in counts:
            found = self.best(count)
            if found is not None and found.lanes == count:
                points.append(self._point(count, found))
        return Trade(self.lanes, tuple(points), fewest, 0.0)

    def _point(self, count: int, fixed: Fixed) -> Point:
        lanes = self.lanes
        places = lanes.places + lanes.model.money_places
        proved = min(self.proved(count), fixed.extra)
        extra, bound = to_decimal(fixed.extra, places), to_decimal(proved, places)
        rests: Rests = "whole numbers" if proved == fixed.extra else "open"
        if rests == "open" and not self.open(count):
            rests, bound = "solver", extra
        elif rests == "open":
            claimed = Decimal(repr(max(0.0, self.claim(count)))).quantize(Decimal("0.01"))
            bound = min(extra, max(bound, claimed))
        names = [
            name for name, is_changed in zip(lanes.names, fixed.changed.tolist(), strict=True) if is_changed
        ]
        return Point(count, extra, bound, rests, (*names, *lanes.elsewhere), fixed)
