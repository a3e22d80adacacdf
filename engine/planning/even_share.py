"""Even share: when goods run short, every customer gets the largest equal part of its order.

Max-min fairness: the largest fraction that the lanes let everybody have; whoever cannot have more keeps
it, and the rest share on (Megiddo 1974; each fraction is found by Newton's method on the cuts, as in
Fujishige 1980). Fractions are exact; only the outcome is rounded, down to the week's step, and what that
leaves is handed out by largest fraction, then by sheet order, as far as the lanes can serve.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property

import numpy as np
import numpy.typing as npt

from engine.exact import LARGEST, TooLarge
from engine.network import Flow, Problem, least_cost
from engine.network.problem import UNLIMITED

Integers = npt.NDArray[np.int64]


@dataclass(frozen=True, eq=False)
class Sharing:
    """Who could get what, whatever it costs: stock, orders and rows in grains.

    available: (depots,); ordered: (customers,); rows customer by customer as in `Problem`, without
    stand-ins.
    """

    available: Integers
    ordered: Integers
    start: Integers
    depot: Integers
    at_least: Integers
    at_most: Integers

    @cached_property
    def customer(self) -> Integers:
        """(rows,) the customer of each row."""
        return np.repeat(np.arange(len(self.ordered)), np.diff(self.start))

    @cached_property
    def forced(self) -> Integers:
        """(customers,) what limits and holds force on each."""
        return _sums(self.at_least, self.customer, len(self.ordered))

    @cached_property
    def free(self) -> Integers:
        """(depots,) what each has beyond what is forced out of it."""
        return self.available - _sums(self.at_least, self.depot, len(self.available))

    @cached_property
    def room(self) -> Integers:
        """(rows,) what a row can carry beyond what is forced on it."""
        return np.where(self.at_most == UNLIMITED, UNLIMITED, self.at_most - self.at_least)


@dataclass(frozen=True, slots=True)
class Cut:
    """Customers and the depots that serve them: more than `capacity` cannot reach the customers."""

    customers: frozenset[int]
    depots: frozenset[int]
    capacity: int


def shares(sharing: Sharing, classes: Sequence[Sequence[int]]) -> list[Fraction]:
    """How much each customer gets, in exact grains: even within a class, one class after the other.

    Args:
        sharing: orders, stock and rows.
        classes: customer indices, the class served first in front; who is in none gets what is forced.
    """
    given = [Fraction(int(f)) for f in sharing.forced]
    free = sharing.free
    full: dict[int, int] = {}  # served in full, beyond what is forced
    for members in classes:
        rising = {j for j in members if sharing.ordered[j] > 0}
        while rising:
            fraction, cut = _largest_fraction(sharing, free, rising, full)
            if cut is None:
                full |= {j: int(sharing.ordered[j] - sharing.forced[j]) for j in rising}
                given = [Fraction(int(sharing.ordered[j])) if j in rising else g for j, g in enumerate(given)]
                break
            for j in rising & cut.customers:
                given[j] = max(given[j], fraction * int(sharing.ordered[j]))
            # All that can reach the cut does: what is left for the others are whole grains again.
            free = _left_by(sharing, free, cut)
            rising -= cut.customers
            full = {j: need for j, need in full.items() if j not in cut.customers}
    return given


def rounded(
    sharing: Sharing, exact: Sequence[Fraction], step: int, classes: Sequence[Sequence[int]]
) -> Integers:
    """The shares in whole grains: down to the step, the remainders by largest fraction, then sheet order.

    Where the total is no multiple of the step, the last to get a remainder gets less than a step.
    """
    ordered, forced = sharing.ordered.tolist(), sharing.forced.tolist()
    least = [
        o if q == o else max(f, q // step * step) for q, o, f in zip(exact, ordered, forced, strict=True)
    ]
    missing = [q - low for q, low in zip(exact, least, strict=True)]
    class_of = {j: number for number, members in enumerate(classes) for j in members}
    line = sorted((j for j in class_of if missing[j] > 0), key=lambda j: (class_of[j], -missing[j], j))
    most, worth = least.copy(), [0] * len(ordered)
    for place, j in enumerate(line):
        most[j] = min(ordered[j], least[j] + step)
        worth[j] = len(line) - place
    flow = least_cost(
        _with_stand_ins(
            sharing,
            supply=sharing.available,
            demand=sharing.ordered,
            limits=(sharing.at_least, sharing.at_most),
            short_cost=np.array(worth, dtype=np.int64),
            short_limits=(sharing.ordered - np.array(most), sharing.ordered - np.array(least)),
        )
    )
    return sharing.ordered - _short(flow)


def _largest_fraction(
    sharing: Sharing, free: Integers, rising: set[int], full: dict[int, int]
) -> tuple[Fraction, Cut | None]:
    """The largest part of their orders that all rising customers can have, and the cut that stops them.

    No cut: all of them can be served in full.
    """
    fraction, cut = Fraction(1), None
    while True:
        needs = _needs(sharing, rising, full, fraction)
        short, tighter = tightest_cut(sharing, free, needs, fraction.denominator)
        if short == 0:
            return fraction, cut
        cut = tighter
        fixed = sum(need for j, need in full.items() if j in cut.customers)
        fraction = _fraction_within(sharing, rising & cut.customers, cut.capacity - fixed)


def _needs(sharing: Sharing, rising: set[int], full: dict[int, int], fraction: Fraction) -> list[int]:
    """What each customer needs beyond what is forced on it, in grains times the fraction's denominator."""
    scale = fraction.denominator
    needs = [0] * len(sharing.ordered)
    for j in rising:
        needs[j] = max(0, int(fraction * scale) * int(sharing.ordered[j]) - int(sharing.forced[j]) * scale)
    for j, need in full.items():
        needs[j] = need * scale
    return needs


def tightest_cut(sharing: Sharing, free: Integers, needs: list[int], scale: int = 1) -> tuple[int, Cut]:
    """How much of the needs cannot be met (0: none), and the cut that forbids it.

    free: (depots,) grains beyond what is forced; needs: by customer, in grains times `scale`, likewise.
    """
    if sum(free.tolist()) * scale + sum(needs) > LARGEST // 4:
        raise TooLarge(
            "The even shares have too many digits to be found exactly: use a coarser step or unit."
        )
    wanted = np.array(needs, dtype=np.int64)
    wide = sharing.room > sum(free.tolist())  # such a row limits nothing
    room = np.where(wide, UNLIMITED, np.where(wide, 0, sharing.room) * scale)
    problem = _with_stand_ins(
        sharing, free * scale, wanted, (np.zeros_like(room), room), np.ones_like(wanted)
    )
    flow = least_cost(problem)
    stand_in = flow.depot_price[-1]
    customers = frozenset(np.flatnonzero(flow.customer_price[:-1] + stand_in > 0).tolist())
    depots = frozenset(np.flatnonzero(flow.depot_price[:-1] < stand_in).tolist())
    inside = np.isin(sharing.customer, list(customers)) & ~np.isin(sharing.depot, list(depots))
    capacity = sum(int(free[i]) for i in depots) + sum(sharing.room[inside].tolist())
    return flow.cost, Cut(customers, depots, capacity)


def _left_by(sharing: Sharing, free: Integers, cut: Cut) -> Integers:
    """What depots have for customers outside a cut that takes all it can."""
    inside = np.isin(sharing.customer, list(cut.customers)) & ~np.isin(sharing.depot, list(cut.depots))
    left = free - _sums(sharing.room[inside], sharing.depot[inside], len(free))
    left[list(cut.depots)] = 0
    return left


def _fraction_within(sharing: Sharing, members: set[int], capacity: int) -> Fraction:
    """The largest fraction at which the members' needs beyond what is forced stay within a capacity."""
    part_forced = {j: Fraction(int(sharing.forced[j]), int(sharing.ordered[j])) for j in members}
    line = sorted(members, key=lambda j: part_forced[j])
    ordered = forced = 0
    fraction = Fraction(0)
    for place, j in enumerate(line):
        ordered += int(sharing.ordered[j])
        forced += int(sharing.forced[j])
        fraction = Fraction(capacity + forced, ordered)
        if place + 1 < len(line) and fraction <= part_forced[line[place + 1]]:
            break
    return fraction


def _short(flow: Flow) -> Integers:
    return flow.quantity[flow.problem.start[1:-1] - 1]


def _with_stand_ins(
    sharing: Sharing,
    supply: Integers,
    demand: Integers,
    limits: tuple[Integers, Integers],
    short_cost: Integers,
    short_limits: tuple[Integers, Integers] | None = None,
) -> Problem:
    """The rows at no cost, with a short row at each customer and free stays, so that any totals balance."""
    depots = len(supply)
    start = np.append(0, np.cumsum(np.append(np.diff(sharing.start) + 1, depots + 1)))
    rows = int(start[-1])
    rate_at, short_at = np.arange(len(sharing.depot)) + sharing.customer, start[1:-1] - 1
    depot = np.full(rows, depots, dtype=np.int64)
    depot[rate_at] = sharing.depot
    depot[start[-2] : start[-2] + depots] = np.arange(depots)
    cost = np.zeros(rows, dtype=np.int64)
    cost[short_at] = short_cost
    at_least, at_most = np.zeros(rows, dtype=np.int64), np.full(rows, UNLIMITED, dtype=np.int64)
    at_least[rate_at], at_most[rate_at] = limits
    if short_limits is not None:
        at_least[short_at], at_most[short_at] = short_limits
    return Problem(
        supply=np.append(supply, int(sum(demand.tolist()))),
        demand=np.append(demand, int(sum(supply.tolist()))),
        start=start,
        depot=depot,
        cost=cost,
        at_least=at_least,
        at_most=at_most,
    )


def _sums(values: Integers, groups: Integers, count: int) -> Integers:
    """Exact sums by group."""
    sums = np.zeros(count, dtype=np.int64)
    np.add.at(sums, groups, values)
    return sums
