"""Cost against emissions: every breakpoint of the exact frontier between the two.

Service comes first and stays: each customer gets what the plan gives it, and what must move moves as far
as it does in the plan. Among the plans that do that, a point of the frontier is one that no other undercuts
in one aim without losing in the other; between two neighbouring breakpoints all mixtures of their plans lie
on a straight line. The breakpoints are found by solving, again and again, for the slope between two that are
known (Aneja & Nair 1979): in whole numbers, so that none is missed and none is sampled.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction
from heapq import heappop, heappush
from math import gcd

import numpy as np
import numpy.typing as npt

from engine.compare.stress_ground import is_no_network
from engine.exact import BLANK, LARGEST, TooLarge, places_needed, to_decimal, to_integer, total_of
from engine.figures import RateKey
from engine.money import per_unit
from engine.network import Flow, Problem, least_cost
from engine.planning.aims import MUST_MOVE, weights
from engine.planning.gone import cost_of
from engine.planning.model import NO_RATE, Model, limits_of
from engine.planning.plan import Plan

Integers = npt.NDArray[np.int64]
Progress = Callable[[int], None]

TONNES = {"t": Decimal(1), "kg": Decimal("0.001")}
"""Tonnes of one unit, where the unit itself says so."""


NOT_DIVISIBLE = (
    "Cost is traded off against emissions only where loads can be divided: with whole loads, charges due "
    "once, smallest drops, single depots or limits on loads or hauliers a plan is searched for, and points "
    "that are not proved are no frontier. To see about what there is to save, take a copy of the week on "
    "Weeks and give its rates per unit, without those figures."
)


class NoTradeOff(ValueError):
    """The trade-off cannot be drawn; the message says what is missing."""


@dataclass(frozen=True, slots=True)
class Emissions:
    """What a tonne-kilometre emits, as the desk says: there is no default.

    factor: kilograms of CO2 equivalent per tonne and kilometre; source: where that figure is from
    tonnes_per_unit: weight of one unit of the week; None where the unit is a weight itself
    """

    factor: Decimal
    source: str
    tonnes_per_unit: Decimal | None = None

    def __post_init__(self) -> None:
        if not self.factor.is_finite() or self.factor <= 0:
            raise NoTradeOff("Give an emission factor above 0, in kg CO2e per tonne-kilometre.")
        if not self.source.strip():
            raise NoTradeOff("Say where the emission factor is from: it is printed beside every figure.")
        if self.tonnes_per_unit is not None and self.tonnes_per_unit <= 0:
            raise NoTradeOff("The weight of one unit must be above 0 t.")

    def per_unit_km(self, unit: str) -> Decimal:
        """Kilograms of CO2 equivalent for one unit of the week over one kilometre."""
        tonnes = self.tonnes_per_unit or TONNES.get(unit)
        if tonnes is None:
            raise NoTradeOff(f"The week counts in {unit}: say how many tonnes one {unit} weighs.")
        return _product(self.factor, tonnes)


@dataclass(frozen=True, eq=False)
class Point:
    """A breakpoint. Money and emissions are exact, without what has gone.

    per_kg: what each kilogram less costs on the way from the point before, None at the first
    rows, quantity: which rate rows of the model carry how much
    """

    freight: Decimal
    charges: Decimal
    tonne_km: Decimal
    emissions: Decimal
    per_kg: Fraction | None
    rows: Integers
    quantity: Integers

    @property
    def cost(self) -> Decimal:
        """Freight and charges."""
        return total_of((self.freight, self.charges))


@dataclass(frozen=True, eq=False)
class Frontier:
    """The breakpoints from least cost to least emissions.

    today:    the plan itself: its cost is the first point's; its emissions may be more where plans tie
    left_out: how many open rate rows have no Km and stay unused
    complete: False where the search was stopped: then breakpoints may be missing between those found
    """

    plan: Plan
    emissions: Emissions
    points: tuple[Point, ...]
    today: Point
    left_out: int
    complete: bool

    def dearer(self, point: Point) -> Decimal:
        """How much more a point costs than the cheapest."""
        return total_of((point.cost, -self.points[0].cost))

    def less(self, point: Point) -> Decimal:
        """How many kilograms less a point emits than the cheapest."""
        return total_of((self.points[0].emissions, -point.emissions))

    def less_percent(self, point: Point) -> Decimal | None:
        """The same in percent of what the cheapest emits, to two places; None where that is nothing."""
        return per_unit(100 * self.less(point), self.points[0].emissions, 2)


def frontier(
    plan: Plan,
    emissions: Emissions,
    progress: Progress | None = None,
    stop: Callable[[], bool] | None = None,
) -> Frontier:
    """The frontier of cost against emissions around a plan.

    Args:
        plan: its service is kept.
        emissions: the desk's factor and where it is from.
        progress: told how many breakpoints are found.
        stop: asked now and then; once it says so, what is found is kept, widest gaps closed first.

    Raises:
        NoTradeOff: a used rate row has no Km, the week has no unit of weight, or it is no plain network.
        TooLarge: cost and emissions together do not fit the exact integers.
    """
    ground = _ground(plan, emissions)
    tell, asked_to_stop = progress or (lambda _: None), stop or (lambda: False)
    cheapest, cleanest = ground.first(), ground.last()
    found = [cheapest] if cheapest.at == cleanest.at else [cheapest, cleanest]
    gaps: list[tuple[int, int, _Found, _Found]] = []
    _open(gaps, found)
    complete = True
    while gaps:
        tell(len(found))
        if asked_to_stop():
            complete = False
            break
        _, _, one, other = heappop(gaps)
        between = ground.between(one, other)
        if between is not None:
            found.append(between)
            _open(gaps, [one, between])
            _open(gaps, [between, other])
    corners = _corners(sorted(found, key=lambda one: one.at))
    points = [ground.told(one, corners[n - 1] if n else None) for n, one in enumerate(corners)]
    today = ground.told(ground.seen(plan.flow), None)
    return Frontier(plan, emissions, tuple(points), today, ground.left_out, complete)


@dataclass(frozen=True, eq=False)
class _Found:
    """A plan's cost and emissions in whole numbers, and its flow to start others from."""

    at: tuple[int, int]
    flow: Flow


@dataclass(frozen=True, eq=False)
class _Ground:
    """The plan's problem with service fixed, and both objectives by row."""

    model: Model
    problem: Problem
    money: Integers
    km: Integers
    km_places: int
    must_moves: bool
    start: Flow
    kilograms: Decimal
    left_out: int
    money_gcd: int
    km_gcd: int

    def first(self) -> _Found:
        """Least cost, and among those least emissions."""
        return self.solved(self._outweighing(self.km), 1, self.start)

    def last(self) -> _Found:
        """Least emissions, and among those least cost."""
        return self.solved(1, self._outweighing(self.money), self.start)

    def _outweighing(self, lesser: Integers) -> int:
        # a cycle of exchanges uses at most two rows of each depot, the stand-in included
        return 1 + 4 * (self.problem.depots + 1) * int(np.abs(lesser).max(initial=0))

    def between(self, one: _Found, other: _Found) -> _Found | None:
        """A point below the line between two, None where there is none."""
        by_cost, by_km = one.at[1] - other.at[1], other.at[0] - one.at[0]
        common = gcd(by_cost, by_km)
        by_cost, by_km = by_cost // common, by_km // common
        line = by_cost * one.at[0] + by_km * one.at[1]
        shift = 0
        while True:
            rounded = (by_cost >> shift, by_km >> shift)
            if 0 in rounded:
                raise TooLarge(_TOO_LARGE)
            try:
                found = self.solved(*rounded, one.flow)
                break
            except TooLarge:  # any slope may find a point; only the exact one can say that there is none
                shift += 4
        if by_cost * found.at[0] + by_km * found.at[1] < line:
            return found
        if shift:
            raise TooLarge(_TOO_LARGE)
        return None

    def solved(self, by_cost: int, by_km: int, start: Flow) -> _Found:
        """The plan of least `by_cost` times cost and `by_km` times kilometres, what must move first."""
        largest = by_cost * int(np.abs(self.money).max(initial=0)) + by_km * int(self.km.max(initial=0))
        if largest > LARGEST // 16:
            raise TooLarge(_TOO_LARGE)
        cost = by_cost * self.money + by_km * self.km
        if self.must_moves:
            aim = weights(largest, len(self.model.depots), (), must_move=True)[MUST_MOVE]
            cost[self.model.must_row[self.model.must_row != NO_RATE]] += aim
        return self.seen(least_cost(replace(self.problem, cost=cost), start))

    def seen(self, flow: Flow) -> _Found:
        return _Found((_products(flow.quantity, self.money), _products(flow.quantity, self.km)), flow)

    def told(self, one: _Found, before: _Found | None) -> Point:
        model, quantity = self.model, one.flow.quantity
        used = np.flatnonzero((quantity > 0) & (model.rate_row != NO_RATE))
        freight = _products(quantity[used], model.money[used])
        whole = _products(quantity, model.money)
        places = model.quantity_places + model.money_places
        unit_km = to_decimal(one.at[1] * self.km_gcd, model.quantity_places + self.km_places)
        emissions = _product(unit_km, self.kilograms)
        per_kg = None
        if before is not None:
            scale = Fraction(self.kilograms) * Fraction(self.km_gcd, 10**self.km_places)
            step = Fraction(self.money_gcd, 10**model.money_places)
            per_kg = Fraction(one.at[0] - before.at[0], before.at[1] - one.at[1]) * step / scale
        return Point(
            freight=to_decimal(freight, places),
            charges=to_decimal(whole - freight, places),
            tonne_km=unit_km,
            emissions=emissions,
            per_kg=per_kg,
            rows=used,
            quantity=quantity[used],
        )


_TOO_LARGE = (
    "Cost and emissions together have too many digits to be traded off exactly: "
    "use fewer decimals in rates, surcharge or Km."
)


def _ground(plan: Plan, emissions: Emissions) -> _Ground:
    if is_no_network(plan):
        raise NoTradeOff(NOT_DIVISIBLE)
    model, flat = plan.model, plan.week.rates.flat
    kilograms = emissions.per_unit_km(plan.week.rules.unit)
    column = flat.decimals.get("km")
    if column is None:
        raise NoTradeOff("The rates have no Km: give the kilometres of the lanes on Figures, column Km.")
    is_rate = model.rate_row != NO_RATE
    km = np.zeros(model.problem.rows, dtype=np.int64)
    km[is_rate] = column.values[model.rate_row[is_rate]]
    unknown = km == BLANK
    used = np.flatnonzero(unknown & (plan.flow.quantity > 0))
    if len(used):
        ids = plan.week.rates.ids_in_order
        names = [plan.week.rates.key_of(int(ids[model.rate_row[row]])) for row in used[:3].tolist()]
        listed = ", ".join(f"{key.depot} to {key.customer}" for key in names)
        more = f" and {len(used) - 3} more" if len(used) > 3 else ""
        raise NoTradeOff(
            f"The plan sends on lanes without Km: {listed}{more}. Give their kilometres on Figures."
        )
    lower, upper = (limits.copy() for limits in limits_of(model))
    left_out = int((unknown & (upper > 0)).sum())
    upper[unknown] = 0
    km[unknown] = 0
    short = model.short_rows
    lower[short] = upper[short] = plan.flow.quantity[short]
    must = model.must_row[model.must_row != NO_RATE]
    must_moves = bool(plan.flow.quantity[must].any())
    if not must_moves:
        upper[must] = 0
    money_gcd, km_gcd = _common(model.money), _common(km)
    return _Ground(
        model,
        replace(model.problem, at_least=lower, at_most=upper),
        model.money // money_gcd,
        km // km_gcd,
        column.places,
        must_moves,
        plan.flow,
        kilograms,
        left_out,
        money_gcd,
        km_gcd,
    )


def _open(gaps: list[tuple[int, int, _Found, _Found]], ends: list[_Found]) -> None:
    """Puts the gap between two points in the line, the widest in front."""
    if len(ends) == 2:
        one, other = ends
        area = (other.at[0] - one.at[0]) * (one.at[1] - other.at[1])
        if area > 0:
            heappush(gaps, (-area, one.at[0], one, other))


def _corners(line: list[_Found]) -> list[_Found]:
    """Points without those on the straight line between their neighbours."""
    kept: list[_Found] = []
    for one in line:
        if kept and kept[-1].at == one.at:
            continue
        while len(kept) > 1 and _turn(kept[-2].at, kept[-1].at, one.at) <= 0:
            kept.pop()
        kept.append(one)
    return kept


def _turn(a: tuple[int, int], b: tuple[int, int], c: tuple[int, int]) -> int:
    """Above 0 where the way from a over b to c turns left: where b lies below the line from a to c."""
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _common(values: Integers) -> int:
    """The largest whole number that all of these are multiples of."""
    return int(np.gcd.reduce(np.abs(values))) or 1


def _products(many: Integers, more: Integers) -> int:
    used = np.flatnonzero(many)
    return sum(a * b for a, b in zip(many[used].tolist(), more[used].tolist(), strict=True))


def _product(one: Decimal, other: Decimal) -> Decimal:
    places = places_needed(one), places_needed(other)
    return to_decimal(to_integer(one, places[0]) * to_integer(other, places[1]), sum(places))


def sent_at(found: Frontier, point: Point) -> dict[RateKey, Decimal]:
    """What goes on each rate row at a breakpoint, without what has gone."""
    week, model = found.plan.week, found.plan.model
    ids = week.rates.ids_in_order
    return {
        week.rates.key_of(int(ids[model.rate_row[row]])): to_decimal(quantity, model.quantity_places)
        for row, quantity in zip(point.rows.tolist(), point.quantity.tolist(), strict=True)
    }


def gone_freight(found: Frontier) -> Decimal:
    """Freight of what has gone, which no point can change."""
    return total_of(cost_of(one) for one in found.plan.week.gone.values())
