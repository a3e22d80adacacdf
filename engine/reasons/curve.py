"""What the week costs over a range of one figure: a depot's stock or a customer's order.

The least cost is a convex, piecewise linear function of such a figure; its corners are found one after
the other by sending as much as the cheapest chains carry (parametric successive shortest paths; Ahuja,
Magnanti & Orlin 1993, chapter 9), so none is missed and none is a grid point.
"""

from dataclasses import dataclass, replace
from decimal import Decimal
from fractions import Fraction

from engine.exact import to_decimal, to_integer, total_of
from engine.planning.model import EVEN_SHARE, NO_RATE
from engine.planning.plan import Plan
from engine.reasons.ends import End, Stretch, What, stretch
from engine.reasons.ground import OVERRUN, SHARED, Ground, ground_of, is_shared, overrun, why_withheld

MOST_CORNERS = 2_000
"""A curve with more corners than this ends early; `Curve.cut_short` says so."""


@dataclass(frozen=True, slots=True)
class CurvePoint:
    """The week at one value of the figure. `next_unit` is what one more costs from here, charges included.

    `next_short` is what one more changes in what goes short; both are None at the upper end.
    """

    figure: Decimal
    total_cost: Decimal
    freight_cost: Decimal
    short_cost: Decimal
    unsent_cost: Decimal
    short: Decimal
    next_unit: Decimal | None
    next_short: Decimal | None


@dataclass(frozen=True, slots=True)
class Curve:
    """Costs over a range of a figure: straight between the points, which are all its corners and ends.

    Between two points every cost lies on the straight line, except freight and charges where plans of
    equal total differ in them: there the line is one of those plans. `ends_early` says in words why the
    range asked for is not covered; `withheld` why there is no curve.
    """

    what: What
    name: str
    today: Decimal
    points: tuple[CurvePoint, ...]
    ends_early: str = ""
    withheld: str = ""


def curve(plan: Plan, name: str, low: Decimal, high: Decimal, what: What | None = None) -> Curve:
    """Total cost and the value of the next unit while a stock or an order runs from `low` to `high`.

    Args:
        plan: the plan that is asked.
        name: the depot or customer.
        low, high: the range of its available or ordered quantity, in the week's unit.
        what: "depot" or "customer", needed where one of each bears that name.

    Raises:
        ValueError: nobody bears the name, both do and `what` is None, or the range is no range.
        TooLarge: a chain's cost could leave the exact integers.
    """
    if not 0 <= low <= high:
        raise ValueError(f"A range of quantities runs from 0 or more upwards; got {low} to {high}.")
    what = _what(plan, name, what)
    week = plan.week
    today = week.depots[name].available if what == "depot" else week.customers[name].ordered
    if because := why_withheld(plan):
        return Curve(what, name, today, (), withheld=because)
    if is_shared(plan):
        return Curve(what, name, today, (), withheld=SHARED)
    if (what, name) in overrun(plan):
        return Curve(what, name, today, (), withheld=OVERRUN)
    index = (plan.model.depots if what == "depot" else plan.model.customers).index(name)
    ground = ground_of(plan)
    up, no_more = _walk(plan, ground, End(what, index, more=True), high - today)
    down, no_less = _walk(plan, ground, End(what, index, more=False), today - low)
    points = _points(plan, today, down, up)
    inside = [point for point in points if low <= point.figure <= high]
    if today < low or today > high:
        inside = _clipped(points, low, high)
    return Curve(what, name, today, tuple(inside), " ".join(part for part in (no_less, no_more) if part))


def usual_range(today: Decimal) -> tuple[Decimal, Decimal]:
    """From half of a figure to half as much again, in whole units; a small figure from 0 to 10."""
    half = (today / 2).to_integral_value()
    return (half, today.to_integral_value() + half) if today >= 2 else (Decimal(0), Decimal(10))


def _what(plan: Plan, name: str, what: What | None) -> What:
    is_depot, is_customer = name in plan.week.depots, name in plan.week.customers
    if what is None and is_depot and is_customer:
        raise ValueError(f"'{name}' is a depot and a customer: say which is meant.")
    found: What = what or ("depot" if is_depot else "customer")
    if name not in (plan.week.depots if found == "depot" else plan.week.customers):
        raise ValueError(f"There is no {what or 'depot or customer'} '{name}' in the week.")
    return found


def _walk(plan: Plan, ground: Ground, end: End, distance: Decimal) -> tuple[list[Stretch], str]:
    """Stretches of equal value in one direction, and why they end before the distance, if they do."""
    places = plan.model.quantity_places
    if distance <= 0:
        return [], ""
    left = to_integer(distance.quantize(Decimal(1).scaleb(-places)) if places else distance, places)
    shares = plan.week.rules.when_short == EVEN_SHARE
    walked: list[Stretch] = []
    while left > 0:
        if len(walked) == MOST_CORNERS:
            return walked, f"More than {MOST_CORNERS} corners: the range is cut short."
        one = stretch(ground, end, left)
        if one is None:
            figure = "available" if end.what == "depot" else "ordered"
            side = "more" if end.more else "less"
            return walked, f"No {side} can be {figure}: limits, holds, what must move, what has gone."
        if shares and _short_of(ground.model.stand_in, one, ground):
            return walked, f"From there on somebody goes short. {SHARED}"
        walked.append(one)
        left -= one.amount
        if left:
            ground = one.after
    return walked, ""


def _short_of(stand_in: int, one: Stretch, ground: Ground) -> int:
    """By how much a stretch changes what goes short, in grains."""
    short = (ground.problem.depot[one.rows] == stand_in) & (one.rows != ground.model.joining_row)
    return int(one.change[short].sum())


@dataclass(frozen=True, slots=True)
class _Costs:
    """Money by kind, and what is short, as integers; added and taken away stretch by stretch."""

    freight: int
    short: int
    unsent: int
    quantity_short: int


def _costs_of(one: Stretch) -> _Costs:
    ground, model = one.before, one.before.model
    freight = short = unsent = quantity = 0
    for row, change in zip(one.rows.tolist(), one.change.tolist(), strict=True):
        money = change * int(model.money[row])
        if model.rate_row[row] != NO_RATE:
            freight += money
        elif ground.problem.depot[row] != model.stand_in:
            unsent += money
        elif row != model.joining_row:
            short, quantity = short + money, quantity + change
    return _Costs(freight, short, unsent, quantity)


_Place = tuple[Decimal, Decimal, Decimal, Decimal, Decimal]
"""A figure, what freight, short and unsent cost there, and what is short."""


def _points(plan: Plan, today: Decimal, down: list[Stretch], up: list[Stretch]) -> list[CurvePoint]:
    """Corners in order of the figure; stretches of equal value on either side of a point are one."""
    model = plan.model
    grain, money = model.quantity_places, model.quantity_places + model.money_places
    short = total_of(one.quantity for one in plan.short)
    here: _Place = (today, plan.freight_cost, plan.short_cost, plan.unsent_cost, short)
    places = [here]
    slopes: list[tuple[int, Decimal]] = []

    def after(place: _Place, one: Stretch, sign: int) -> _Place:
        costs = _costs_of(one)
        return (
            total_of((place[0], to_decimal(sign * one.amount, grain))),
            total_of((place[1], to_decimal(costs.freight, money))),
            total_of((place[2], to_decimal(costs.short, money))),
            total_of((place[3], to_decimal(costs.unsent, money))),
            total_of((place[4], to_decimal(costs.quantity_short, grain))),
        )

    def rise(one: Stretch, sign: int) -> tuple[int, Decimal]:
        costs = _costs_of(one)
        return sign * one.cost, Decimal(sign * costs.quantity_short) / one.amount

    for one in down:
        places.insert(0, after(places[0], one, -1))
        slopes.insert(0, rise(one, -1))
    for one in up:
        places.append(after(places[-1], one, 1))
        slopes.append(rise(one, 1))
    kept = [
        n for n in range(len(places))
        if n in (0, len(places) - 1) or slopes[n - 1][0] != slopes[n][0] or places[n][0] == today
    ]  # fmt: skip
    return [_point(plan, places[n], slopes[n] if n < len(slopes) else None) for n in kept]


def _point(plan: Plan, place: _Place, rise: tuple[int, Decimal] | None) -> CurvePoint:
    figure, freight, short_cost, unsent_cost, short = place
    model = plan.model
    return CurvePoint(
        figure,
        total_of((freight, short_cost, unsent_cost)),
        freight,
        short_cost,
        unsent_cost,
        short,
        None if rise is None else to_decimal(model.weights.split(rise[0]).money, model.money_places),
        None if rise is None else rise[1],
    )


def _clipped(points: list[CurvePoint], low: Decimal, high: Decimal) -> list[CurvePoint]:
    """The part of a curve between two figures, where today's figure lies outside."""
    inside = [point for point in points if low <= point.figure <= high]
    first = next((n for n in range(len(points) - 1) if points[n].figure < low < points[n + 1].figure), None)
    if first is not None:
        inside.insert(0, _between(points[first], points[first + 1], low))
    last = next((n for n in range(len(points) - 1) if points[n].figure < high < points[n + 1].figure), None)
    if last is not None:
        inside.append(_between(points[last], points[last + 1], high))
    return [*inside[:-1], *(replace(end, next_unit=None, next_short=None) for end in inside[-1:])]


def _between(before: CurvePoint, after: CurvePoint, figure: Decimal) -> CurvePoint:
    """The point of a straight stretch at a figure."""
    whole, part = Fraction(after.figure - before.figure), Fraction(figure - before.figure)

    def at(name: str) -> Decimal:
        start, end = getattr(before, name), getattr(after, name)
        exact = Fraction(start) + (Fraction(end) - Fraction(start)) * part / whole
        return Decimal(exact.numerator) / Decimal(exact.denominator)  # ends: a straight stretch of decimals

    return CurvePoint(
        figure,
        at("total_cost"),
        at("freight_cost"),
        at("short_cost"),
        at("unsent_cost"),
        at("short"),
        before.next_unit,
        before.next_short,
    )
