"""How far a rate can move before the plan would change, and how low an unused lane's must go to pay.

The plan stays as it is while no chain of exchanges that ends where the row ends costs less than the row
(the cheapest chains without the row itself: shortest paths, exact also where plans tie). Thresholds are
before surcharge: the figure that is negotiated. Where only a higher aim stands in the way (deliver the most,
move what must move) no rate changes anything, and the threshold is None.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction
from functools import cached_property

import numpy as np

from engine.exact import DecimalColumn, to_decimal
from engine.figures import RateKey
from engine.network.closure import NO_WAY
from engine.planning.model import NO_RATE, Integers
from engine.planning.plan import Plan
from engine.reasons.ground import Flags, Ground, ground_of, money_of
from engine.reasons.kernels import HIGH, LOW, Hard, thresholds, thresholds_without
from engine.reasons.rows import key_at

FINEST = 6
"""Decimal places of a threshold that a surcharge makes endless; it is rounded to the side that is true."""


@dataclass(frozen=True, slots=True)
class RateInterval:
    """A rate row and its thresholds, per unit and before surcharge.

    The plan stays as it is while the rate is from `stays_from` to `stays_to`, ends included (None: however
    low, however high). An unused row `pays_below` a rate (None: no rate would bring it in); at that very
    rate it could be swapped in for nothing.
    """

    key: RateKey
    quantity: Decimal
    rate: Decimal
    stays_from: Decimal | None
    stays_to: Decimal | None
    pays_below: Decimal | None
    load_size: Decimal | None = None

    @property
    def pays_below_per_load(self) -> Decimal | None:
        """What a whole load must cost less than to pay, where a load size is known."""
        if self.pays_below is None or self.load_size is None:
            return None
        return self.pays_below * self.load_size

    @property
    def gap(self) -> Decimal | None:
        """By how much the rate of an unused row is too high to pay."""
        return None if self.pays_below is None else self.rate - self.pays_below


@dataclass(frozen=True, eq=False)
class RateIntervals:
    """Thresholds of all rate rows of a plan, in sheet order; each is put in words when it is asked for.

    low:  (problem rows,) money with surcharge below which more would go on the row, where `low_is_money`
    high: the same above which less would
    """

    plan: Plan
    ground: Ground
    low: Integers
    high: Integers
    low_is_money: Flags
    high_is_money: Flags

    @cached_property
    def rows(self) -> Integers:
        """(rates,) the rate rows among the rows of the problem, in sheet order."""
        of_rate = self.plan.model.rate_row
        rates = np.flatnonzero(of_rate != NO_RATE)
        return rates[np.argsort(of_rate[rates], kind="stable")]

    def __len__(self) -> int:
        return len(self.rows)

    def __getitem__(self, place: int) -> RateInterval:
        return self.at(int(self.rows[place]))

    def __iter__(self) -> Iterator[RateInterval]:
        return (self.at(row) for row in self.rows.tolist())

    def at(self, row: int) -> RateInterval:
        """The thresholds of one row of the problem."""
        model, ground = self.plan.model, self.ground
        position = int(model.rate_row[row])
        used = bool(ground.quantity[row] > 0)
        low, high = int(self.low[row]), int(self.high[row])
        may_rise, may_fall = bool(self.has_low[row]), bool(self.has_high[row])
        rate = self.plan.week.rates.flat.rate.get(position)
        return RateInterval(
            key_at(self.plan, row),
            to_decimal(int(ground.quantity[row]), model.quantity_places),
            Decimal(0) if rate is None else rate,
            stays_from=self.before_surcharge(row, low, up=True) if may_rise else None,
            stays_to=self.before_surcharge(row, high, up=False) if may_fall else None,
            pays_below=self.before_surcharge(row, low, up=False) if may_rise and not used else None,
            load_size=self._load_size(position),
        )

    def _load_size(self, position: int) -> Decimal | None:
        own = self.plan.week.rates.flat.decimals.get("load_size")
        size = None if own is None else own.get(position)
        return self.plan.week.rules.load_size if size is None else size

    def nearest_rows(self, most: int) -> Integers:
        """The unused rows of the problem that are nearest to paying, by what a unit costs too much."""
        rows = self.rows[self.has_low[self.rows] & (self.ground.quantity[self.rows] == 0)]
        gap = self.plan.model.money[rows] - self.low[rows]
        if len(gap) > most:
            chosen = np.argpartition(gap, most - 1)[:most]
            rows, gap = rows[chosen], gap[chosen]
        nearest: Integers = rows[np.lexsort((self.plan.model.rate_row[rows], gap))]
        return nearest

    def before_surcharge(self, row: int, money: int, up: bool) -> Decimal | None:
        """The rate before surcharge that comes to this money; one without a last digit is rounded."""
        factor = self._factor[self.plan.model.rate_row[row]]
        return without_surcharge(money, self.plan.model.money_places, factor, up)

    @cached_property
    def _factor(self) -> "Factors":
        return Factors.of(self.plan)

    @cached_property
    def has_low(self) -> Flags:
        """Whether a lower rate can bring more onto a row."""
        return self.low_is_money & self.ground.has_room

    @cached_property
    def has_high(self) -> Flags:
        """Whether a higher rate can take something off a row."""
        return self.high_is_money & self.ground.has_spare


@dataclass(frozen=True, eq=False)
class Factors:
    """What a rate is multiplied by for the surcharge, row by row of the sheet."""

    percent: DecimalColumn
    week: Decimal

    @classmethod
    def of(cls, plan: Plan) -> "Factors":
        flat = plan.week.rates.flat
        own = flat.decimals.get("surcharge", DecimalColumn.blank(len(flat)))
        return cls(own, plan.week.rules.fuel_surcharge or Decimal(0))

    def __getitem__(self, position: int) -> Fraction:
        own = self.percent.get(int(position))
        return 1 + Fraction(self.week if own is None else own) / 100


def without_surcharge(money: int, places: int, factor: Fraction, up: bool) -> Decimal | None:
    """Money per unit as a rate before surcharge; None where a surcharge of -100 % leaves no rate."""
    if factor <= 0:
        return None
    exact = Fraction(money, 10**places) / factor
    kept = max(places, FINEST)
    for finer in range(places, 19):
        if (exact * 10**finer).denominator == 1:
            return to_decimal(int(exact * 10**finer), finer)
    scaled = exact * 10**kept
    whole = scaled.numerator // scaled.denominator
    return to_decimal(whole + 1 if up else whole, kept)


def rate_intervals(plan: Plan) -> RateIntervals:
    """Within which rates the plan stays as it is, for every rate row, used or not.

    Raises:
        TooLarge: a chain's cost could leave the exact integers.
    """
    return intervals_on(plan, ground_of(plan))


def intervals_on(plan: Plan, ground: Ground) -> RateIntervals:
    """The same, where the chains are known already."""
    model, problem = plan.model, ground.problem
    low, high = np.empty(problem.rows, np.int64), np.empty(problem.rows, np.int64)
    thresholds(ground.rows, ground.closure.cost, low, high)
    hard = _rows_between(ground)
    if len(hard.row):
        thresholds_without(ground.rows, ground.searched, hard, low, high)
    low, low_is_money = money_of(model.weights, low)
    high, high_is_money = money_of(model.weights, high)
    return RateIntervals(plan, ground, low, high, low_is_money, high_is_money)


def _rows_between(ground: Ground) -> Hard:
    """Rows that could carry both more and less, at customers where another could carry less.

    A chain that seems to replace such a row may use the row itself; only if it is part of a cheapest
    exchange, though.
    """
    closure, problem = ground.closure, ground.problem
    there = closure.direct < NO_WAY
    given, taken = np.unique(closure.less_on[there]), np.unique(closure.more_on[there])
    rows = np.union1d(given, taken)
    rows = rows[ground.has_room[rows] & ground.has_spare[rows]]
    several = np.bincount(problem.customer[np.flatnonzero(ground.has_spare)], minlength=problem.customers) > 1
    rows = rows[several[problem.customer[rows]]]
    which = LOW * np.isin(rows, given) + HIGH * np.isin(rows, taken)
    return Hard(rows, problem.customer[rows], which.astype(np.int64))
