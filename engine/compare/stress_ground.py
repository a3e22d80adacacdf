"""What every case of a stress run starts from: the week in integers, its plan, and the rows near it.

It is worked out once and handed to wherever cases are solved. As bytes it is packed once, and unpacked
once in each process.
"""

import hashlib
import pickle
import zlib
from dataclasses import dataclass, fields, replace
from decimal import Decimal
from functools import cached_property, lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt

from engine.compare.stress_kernels import DEAREST, keep_cheapest
from engine.exact import LARGEST, TooLarge, places_needed, to_integer, total_of
from engine.figures import Customer, Rules
from engine.network import UNLIMITED, Flow, Problem
from engine.planning.gone import cost_of, left
from engine.planning.model import EVEN_SHARE, NO_RATE, Model, limits_of, model_of, step_of
from engine.planning.plan import Plan
from engine.planning.spread import has_whole_loads
from engine.rates import NO_CODE, Codes

Integers = npt.NDArray[np.int64]
Flags = npt.NDArray[np.bool_]

FEW_ROWS = 50_000
"""Weeks with no more rate rows than this are solved with all of them at once (measured)."""

CHEAPEST = 4
"""Of a larger week, so many unused rows of each customer are thought of first (measured)."""


class NeedsWholeLoads(ValueError):
    """The week has figures that are no plain network, so that no case of it can be solved as one."""


@dataclass(frozen=True, eq=False)
class Ground:
    """A week and its plan, ready to be altered. Quantities are in grains as fine as the week's step.

    model:         the week's problem, before shares are made even
    start:         the plan, for the search to start from
    ordered, available, must_move: what the week says; gone_to, gone_from: what has gone of it
    haulier:       (rows,) code of the haulier, NO_CODE for none and for the stand-ins' rows
    step:          what changed quantities are rounded to
    customers:     what even shares depend on; none where shares are not even
    gone_cost:     freight of what has gone
    """

    model: Model
    start: Flow
    ordered: Integers
    gone_to: Integers
    available: Integers
    must_move: Integers
    gone_from: Integers
    haulier: Codes
    hauliers: tuple[str, ...]
    step: int
    customers: tuple[Customer, ...]
    rules: Rules
    gone_cost: Decimal

    @cached_property
    def near(self) -> "Near":
        """The rows that matter near the plan, as a problem of their own."""
        return _near(self)

    @cached_property
    def promised(self) -> Integers:
        """The rate rows that carry something in any case: held, or at least so much."""
        lower, _ = limits_of(self.model)
        return np.flatnonzero((lower > 0) & (self.model.rate_row != NO_RATE))

    @cached_property
    def packed(self) -> bytes:
        """All of it as bytes."""
        kept = {f.name: getattr(self, f.name) for f in fields(self)}
        problem = replace(self.model.problem)  # without what it has worked out meanwhile
        kept["model"], kept["start"] = (
            replace(self.model, problem=problem), replace(self.start, problem=problem)
        )  # fmt: skip
        return zlib.compress(pickle.dumps(kept, protocol=5), 1)

    def __reduce__(self) -> tuple[Any, tuple[str, bytes]]:
        return unpacked, (hashlib.sha256(self.packed).hexdigest(), self.packed)


@lru_cache(maxsize=2)
def unpacked(digest: str, packed: bytes) -> Ground:
    """The ground that was packed; the same one for every part of a run that a process works on."""
    return Ground(**pickle.loads(zlib.decompress(packed)))


@dataclass(frozen=True, eq=False)
class Window:
    """Some rows of the problem, and where to find them among themselves.

    rows:     (window rows,) their places in the whole problem, ascending; place: (rows,) the reverse, -1 else
    short_at, stay_at, must_at: where what goes short, may stay, and should not but does stands in it
    is_rate:  (window rows,) which are rate rows
    """

    rows: Integers
    place: Integers
    short_at: Integers
    stay_at: Integers
    must_at: Integers
    is_rate: Flags

    @property
    def is_whole(self) -> bool:
        return len(self.rows) == len(self.place)


def window(model: Model, rows: Integers) -> Window:
    """These rows (ascending), which must hold all rows of the stand-ins."""
    place = np.full(model.problem.rows, -1, dtype=np.int64)
    place[rows] = np.arange(len(rows))
    must = model.must_row[model.must_row != NO_RATE]
    return Window(
        rows, place, place[model.short_rows], place[model.stay_rows], place[must],
        model.rate_row[rows] != NO_RATE,
    )  # fmt: skip


@dataclass(frozen=True, eq=False)
class Near:
    """The rows that are used, bound or the stand-ins', and the cheapest of the others.

    start:    the plan on them
    left_out: (rows,) the others, as far as they are open
    margin:   (customers + 1,) how far the cheapest of those is from paying, DEAREST where there is none
    """

    window: Window
    start: Flow
    left_out: Flags
    margin: Integers


def ground_of(plan: Plan) -> Ground:
    """The ground for stressing a plan.

    Raises:
        NeedsWholeLoads: the week is no plain network.
        TooLarge: quantities rounded to the week's step do not fit the exact integers.
    """
    week = plan.week
    if is_no_network(plan):
        raise NeedsWholeLoads(
            "The week has whole loads, charges due once, smallest drops, single depots or limits on loads or "
            "hauliers."
        )
    if plan.model.apart:
        raise TooLarge(
            "The rates and charges have so many digits that the aims were solved one after the other: such a "
            "week cannot be stressed. Use fewer decimal places, or a larger currency unit."
        )
    even = week.rules.when_short == EVEN_SHARE
    step = step_of(week.rules)
    model, quantity = _finer(model_of(week) if even else plan.model, plan.flow.quantity, step)
    places, gone = model.quantity_places, left(week)
    flat = week.rates.flat
    haulier = np.full(model.problem.rows, NO_CODE, dtype=np.int32)
    is_rate = model.rate_row != NO_RATE
    haulier[is_rate] = flat.haulier[model.rate_row[is_rate]]
    return Ground(
        model=model,
        start=replace(plan.flow, problem=model.problem, quantity=quantity),
        ordered=_grains([c.ordered for c in week.customers.values()], places),
        gone_to=_grains([gone.customer.get(name, Decimal(0)) for name in week.customers], places),
        available=_grains([d.available for d in week.depots.values()], places),
        must_move=_grains([d.must_move or Decimal(0) for d in week.depots.values()], places),
        gone_from=_grains([gone.depot.get(name, Decimal(0)) for name in week.depots], places),
        haulier=haulier,
        hauliers=flat.haulier_names,
        step=to_integer(step, places),
        customers=tuple(week.customers.values()) if even else (),
        rules=week.rules,
        gone_cost=total_of(cost_of(one) for one in week.gone.values()),
    )


def is_no_network(plan: Plan) -> bool:
    """Whether whole loads, charges due once, smallest drops and the like make it more than a network."""
    return plan.whole is not None or has_whole_loads(plan.week)


def _grains(quantities: list[Decimal], places: int) -> Integers:
    return np.array([to_integer(quantity, places) for quantity in quantities], dtype=np.int64)


def _finer(model: Model, quantity: Integers, step: Decimal) -> tuple[Model, Integers]:
    """The model with grains as fine as a step, and a plan's quantities in them."""
    more = max(0, places_needed(step) - model.quantity_places)
    if not more:
        return model, quantity
    factor, problem = 10**more, model.problem
    largest = max(int(problem.supply.sum()), int(problem.demand.sum()))
    if largest * factor > LARGEST // 4:
        raise TooLarge(
            "The week's quantities are too large to be changed by steps as fine as the week's: "
            "use a coarser step or a larger unit."
        )
    lower, upper = limits_of(model)
    wide = upper > LARGEST // factor // 4
    finer = Problem(
        problem.supply * factor,
        problem.demand * factor,
        problem.start,
        problem.depot,
        problem.cost,
        lower * factor,
        np.where(wide, UNLIMITED, np.where(wide, 0, upper) * factor),
    )
    return replace(model, problem=finer, quantity_places=model.quantity_places + more), quantity * factor


def _near(ground: Ground) -> Near:
    problem, start = ground.model.problem, ground.start
    lower, upper = limits_of(ground.model)
    kept = np.ones(problem.rows, dtype=np.bool_)
    margin = np.full(problem.customers, DEAREST)
    if problem.rows > FEW_ROWS:
        spare = problem.cost - start.depot_price[problem.depot] - start.customer_price[problem.customer]
        kept = (start.quantity > 0) | (lower > 0) | ((spare < 0) & (upper > 0))
        kept |= ground.model.rate_row == NO_RATE
        spare[upper == 0] = DEAREST
        keep_cheapest(problem.start, spare, kept, CHEAPEST)
        spare[kept] = DEAREST
        margin = np.minimum.reduceat(spare, problem.start[:-1])
    seen = window(ground.model, np.flatnonzero(kept))
    fewer = problem if seen.is_whole else _fewer_rows(problem, seen.rows, lower, upper)
    on_them = replace(start, problem=fewer, quantity=start.quantity[seen.rows])
    return Near(seen, on_them, ~kept & (upper > 0), margin)


def _fewer_rows(problem: Problem, rows: Integers, at_least: Integers, at_most: Integers) -> Problem:
    return Problem(
        problem.supply,
        problem.demand,
        np.searchsorted(rows, problem.start).astype(np.int64),
        problem.depot[rows],
        problem.cost[rows],
        at_least[rows],
        at_most[rows],
    )
