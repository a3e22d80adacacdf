"""The lanes of a week against an issued plan, in integers: which are changed, what a choice of them costs.

A lane is here whom to ring: a depot, a customer and a haulier. It is changed where its quantity of the whole
week, what has gone included, differs from the issued plan's; several rates of one haulier on it are one lane.
What is unsent or short is no lane.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from decimal import Decimal

import numpy as np
import numpy.typing as npt

from engine.exact import TooLarge, places_needed, to_integer
from engine.figures import RateKey
from engine.network import UNLIMITED, Contradiction, Flow, Problem, least_cost
from engine.planning.gone import left
from engine.planning.model import Model
from engine.planning.plan import Plan

Integers = npt.NDArray[np.int64]
Flags = npt.NDArray[np.bool_]
LaneName = tuple[str, str, str | None]
NO_LANE = -1


@dataclass(frozen=True, eq=False)
class Lanes:
    """The lanes of a plan's week beside what was issued for them; quantities in grains of `places`.

    problem:   the plan's problem, in grains that the issued quantities fit as well
    names:     (lanes,) depot, customer, haulier
    row_lane:  (rows,) the lane of each row, NO_LANE for what is short or unsent
    earlier:   (lanes,) what was issued, less what has gone on it
    least, most: (lanes,) what its rows can carry together
    changed:   (lanes,) lanes that no plan can leave as issued
    elsewhere: lanes of the issued plan that have no rate any more: changed in every plan
    """

    plan: Plan
    problem: Problem
    places: int
    names: tuple[LaneName, ...]
    row_lane: Integers
    earlier: Integers
    least: Integers
    most: Integers
    changed: Flags
    elsewhere: tuple[LaneName, ...]
    best: Integers
    aims: Mapping[int, int]

    @property
    def model(self) -> Model:
        return self.plan.model

    @property
    def unavoidable(self) -> int:
        """How many lanes change in every plan."""
        return int(self.changed.sum()) + len(self.elsewhere)


@dataclass(frozen=True, eq=False)
class Fixed:
    """A least-cost flow among those that leave all but some lanes as issued.

    changed:  (lanes,) lanes that it changes; extra: money above the least cost, in grains
    """

    quantity: Integers
    changed: Flags
    lanes: int
    extra: int


def lanes_against(plan: Plan, sent: Mapping[RateKey, Decimal]) -> Lanes:
    """The lanes of a plan's week beside what was issued.

    sent: what the issued plan sends on each rate row in the whole week
    """
    model, week = plan.model, plan.week
    issued: dict[LaneName, list[Decimal]] = {}
    for key, quantity in sent.items():
        issued.setdefault(key[:3], []).append(quantity)
    gone = left(week).row
    needed = [places_needed(one) for some in issued.values() for one in some]
    places = max(model.quantity_places, *needed, 0)
    scale = 10 ** (places - model.quantity_places)
    problem = _scaled(model.problem, scale)

    rows = np.flatnonzero(model.rate_row >= 0)
    ids = week.rates.ids_in_order
    place: dict[LaneName, int] = {}
    row_lane = np.full(problem.rows, NO_LANE, dtype=np.int64)
    for row in rows.tolist():
        name = week.rates.key_of(int(ids[model.rate_row[row]]))[:3]
        row_lane[row] = place.setdefault(name, len(place))
    lower, upper = limits_of(problem)
    upper = np.minimum(upper, np.minimum(problem.supply[problem.depot], problem.demand[problem.customer]))
    least, most = np.zeros(len(place), dtype=np.int64), np.zeros(len(place), dtype=np.int64)
    np.add.at(least, row_lane[rows], lower[rows])
    np.add.at(most, row_lane[rows], np.maximum(upper, lower)[rows])

    earlier = np.zeros(len(place), dtype=np.int64)
    elsewhere = []
    for name, quantities in issued.items():
        still = sum(to_integer(q, places) for q in quantities) - to_integer(
            gone.get(name, Decimal(0)), places
        )
        if name in place:
            earlier[place[name]] = still
        elif still:
            elsewhere.append(name)
    for name, quantity in gone.items():  # what nobody issued has gone
        if name not in issued and quantity:
            if name in place:
                earlier[place[name]] = -to_integer(quantity, places)
            else:
                elsewhere.append(name)
    best = model_quantity(plan, scale)
    return Lanes(
        plan, problem, places, tuple(place), row_lane, earlier, least, most,
        (earlier < least) | (earlier > most), tuple(elsewhere), best, aims_of(model, best),
    )  # fmt: skip


def model_quantity(plan: Plan, scale: int) -> Integers:
    """(rows,) the plan's quantities in the finer grains."""
    return plan.flow.quantity * np.int64(scale)


def aims_of(model: Model, quantity: Integers) -> dict[int, int]:
    """Units that count against each aim, by its weight."""
    weight = model.problem.cost - model.money
    found: dict[int, int] = {int(value): 0 for value in np.unique(weight[weight != 0])}
    for row in np.flatnonzero((weight != 0) & (quantity != 0)).tolist():
        found[int(weight[row])] += int(quantity[row])
    return found


def fixed_but(lanes: Lanes, free: Flags, start: Flow | None = None) -> Fixed | None:
    """The least-cost plan that leaves every lane as issued that is not `free`; None where none is as good.

    free: (lanes,); lanes that cannot stay as issued are free in any case. Solved and proved in integers by
    the exact core: a lane that stays is fixed, its own rates filled from the cheapest, and whatever is left
    is a transportation problem. As good is a plan that reaches every aim as far as the least-cost plan.
    """
    model, problem = lanes.model, lanes.problem
    kept = ~(free | lanes.changed)
    lower, upper = (limit.copy() for limit in limits_of(problem))
    on_kept = np.flatnonzero((lanes.row_lane != NO_LANE) & kept[lanes.row_lane])
    order = on_kept[np.lexsort((model.money[on_kept], lanes.row_lane[on_kept]))]
    lower[order] = upper[order] = _filled(lanes, order, lower, upper)
    try:
        flow = least_cost(replace(problem, at_least=lower, at_most=upper), start or lanes.plan.flow)
    except Contradiction:
        return None
    if aims_of(model, flow.quantity) != lanes.aims:
        return None
    changed = changed_lanes(lanes, flow.quantity)
    return Fixed(
        flow.quantity, changed, int(changed.sum()) + len(lanes.elsewhere), extra_of(lanes, flow.quantity)
    )


def changed_lanes(lanes: Lanes, quantity: Integers) -> Flags:
    """(lanes,) which lanes carry something else than was issued."""
    carried = np.zeros(len(lanes.names), dtype=np.int64)
    on_lane = lanes.row_lane != NO_LANE
    np.add.at(carried, lanes.row_lane[on_lane], quantity[on_lane])
    return np.not_equal(carried, lanes.earlier)


def extra_of(lanes: Lanes, quantity: Integers) -> int:
    """Money above the least cost, exactly."""
    return money_of(lanes.model.money, quantity - lanes.best)


def money_of(cost: Integers, quantity: Integers) -> int:
    """The exact sum of cost times quantity."""
    rows = np.flatnonzero(quantity)
    return sum(c * q for c, q in zip(cost[rows].tolist(), quantity[rows].tolist(), strict=True))


def _filled(lanes: Lanes, order: Integers, lower: Integers, upper: Integers) -> Integers:
    """What each row of the kept lanes carries: the cheapest rows of a lane first, as far as limits go."""
    filled = lower[order].copy()
    rest = lanes.earlier - lanes.least
    for place, row in enumerate(order.tolist()):
        lane = lanes.row_lane[row]
        more = min(int(rest[lane]), int(upper[row] - lower[row]))
        filled[place] += more
        rest[lane] -= more
    return filled


def _scaled(problem: Problem, scale: int) -> Problem:
    if scale == 1:
        return problem
    lower, upper = limits_of(problem)
    return replace(
        problem,
        supply=_times(problem.supply, scale),
        demand=_times(problem.demand, scale),
        at_least=_times(lower, scale),
        at_most=np.where(
            upper == UNLIMITED, UNLIMITED, _times(np.where(upper == UNLIMITED, 0, upper), scale)
        ),
    )


def _times(values: Integers, scale: int) -> Integers:
    """Multiplied without wrapping.

    Raises:
        TooLarge: a product does not fit.
    """
    if int(values.max(initial=0)) * scale > UNLIMITED // 4:
        raise TooLarge(
            "The issued quantities are too finely divided to be compared exactly with this week's."
        )
    return values * np.int64(scale)


def limits_of(problem: Problem) -> tuple[Integers, Integers]:
    lower = np.zeros(problem.rows, np.int64) if problem.at_least is None else problem.at_least
    upper = np.full(problem.rows, UNLIMITED) if problem.at_most is None else problem.at_most
    return lower, upper
