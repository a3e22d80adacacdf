"""What the search works on: one aim at a time, those before it as limits, and a part of all plans."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import gcd

import numpy as np

from engine.exact import Integers, total
from engine.loads.arrays import Rows
from engine.loads.cost import loads_on, ranks_of, row_costs
from engine.loads.problem import Flags, LoadProblem

LARGEST_PRICED = 2**60
"""Sums of costs and prices, multiplied by the scale, stay below this."""

TIMES = 16
"""Prices have room up to so many times what units and loads cost at most."""


@dataclass(frozen=True, eq=False)
class Stage:
    """A problem whose cost is the aim of the stage.

    problem:    with the costs of this stage
    short_most: (customers,) most that may be short
    caps:       groups of customers, as flags, and the most that may be short in each of them together
    must_most:  most that may stay of what must move, None for any quantity
    must_cost:  of a unit that must move and stays
    scale:      prices are whole numbers of this part of a unit of cost
    step:       all costs are multiples of this
    """

    problem: LoadProblem
    short_most: Integers
    caps: tuple[tuple[Flags, int], ...]
    must_most: int | None
    must_cost: int
    scale: int
    step: int


@dataclass(frozen=True, eq=False)
class Node:
    """A part of all plans: limits on rows, and which depots are open.

    least, most: (rows,) smallest quantity above 0 and largest; forced: (rows,) 1 if not 0
    opened:      (depots,) 1 open, 0 closed, -1 either; only where opening costs something
    """

    least: Integers
    most: Integers
    forced: Integers
    opened: Integers


def stage_of(problem: LoadProblem, values: tuple[int, ...], upto: int) -> Stage:
    """The stage of one aim, or of cost.

    values: what the aims before it may come to; upto: which aim, their number for cost
    """
    ranks = ranks_of(problem)
    short_most = problem.demand.copy()
    caps: list[tuple[Flags, int]] = []
    must_most = None
    for place, value in enumerate(values[:upto]):
        if place == len(ranks):
            must_most = value
            continue
        group = ~problem.may_decline & (problem.rank == ranks[place])
        short_most[group] = np.minimum(short_most[group], value)
        if value:
            caps.append((group, value))
    must_cost = 0
    costs = problem
    if upto < len(values):
        nothing = np.zeros(problem.rows, dtype=np.int64)
        group = np.zeros(problem.customers, dtype=np.bool_)
        if upto < len(ranks):
            group = ~problem.may_decline & (problem.rank == ranks[upto])
        else:
            must_cost = 1
        costs = replace(
            problem,
            unsent_cost=np.zeros(problem.depots, dtype=np.int64),
            opening_charge=np.zeros(problem.depots, dtype=np.int64),
            short_cost=group.astype(np.int64),
            per_unit=nothing,
            per_load=nothing,
            trip_minimum=nothing,
            charge_per_use=nothing,
        )
    return Stage(costs, short_most, tuple(caps), must_most, must_cost, _scale(costs), _step(costs, must_cost))


def _scale(problem: LoadProblem) -> int:
    """The finest power of two in which all sums of costs and prices keep well within int64."""
    size = np.maximum(problem.load_size, 1)
    loads = np.where(problem.load_size > 0, -(-problem.most // size), 1)
    dearest = max(
        (
            int(part.max(initial=1))
            for part in (
                np.abs(problem.per_unit) * problem.most,
                (problem.per_load + problem.trip_minimum) * loads + problem.charge_per_use,
                np.abs(problem.short_cost) * problem.demand,
            )
        ),
        default=1,
    )
    units, vehicles = most_counted(problem)
    of_unit, of_load = 1, 1
    if problem.rows:
        amount = np.maximum(problem.most, 1)
        cost = np.abs(row_costs(problem, amount))
        of_unit = max(1, int((cost // amount).max()))
        of_load = max(1, int((cost // np.maximum(loads_on(problem, amount), 1)).max()))
    # prices may well be several times what a unit or a load costs, where limits are tight
    largest = max(16 * int(dearest), 8 * TIMES * units * of_unit, 8 * TIMES * vehicles * of_load)
    room = LARGEST_PRICED // largest
    return int(2 ** max(0, min(20, room.bit_length() - 1)))


def most_counted(problem: LoadProblem) -> tuple[int, int]:
    """How many units, and how many loads (a row counts as one at least), a price can be multiplied by."""
    units = total(problem.demand) + total(problem.supply) + problem.rows + 1
    return units, total(np.maximum(loads_on(problem, np.maximum(problem.most, 1)), 1)) + 1


def _step(problem: LoadProblem, must_cost: int) -> int:
    """The greatest number of which all costs are multiples."""
    step = must_cost
    for part in (
        problem.per_unit,
        problem.per_load,
        problem.trip_minimum,
        problem.charge_per_use,
        problem.short_cost,
        problem.unsent_cost,
        problem.opening_charge,
    ):
        step = gcd(step, int(np.gcd.reduce(part)) if len(part) else 0)
    return step or 1


def whole(stage: Stage) -> Node:
    """All plans."""
    problem = stage.problem
    return Node(
        problem.least.copy(),
        problem.most.copy(),
        (problem.at_least > 0).astype(np.int64),
        np.where(problem.opening_charge > 0, -1, 1).astype(np.int64),
    )


def rows_of(stage: Stage, node: Node) -> Rows:
    """The rows of a node as the search at customers reads them."""
    problem, scale = stage.problem, stage.scale
    most = np.where(node.opened[problem.depot] == 0, 0, node.most)
    return Rows(
        problem.start,
        problem.depot,
        problem.per_unit * scale,
        problem.trip_minimum * scale,
        problem.load_size,
        node.least,
        most,
        node.forced,
        problem.demand,
        stage.short_most,
        problem.one_depot.astype(np.int64),
    )


def rounded_up(stage: Stage, scaled: int) -> int:
    """The least cost that is possible at or above a bound in scaled units."""
    unit = stage.scale * stage.step
    return -((-scaled) // unit) * stage.step


def total_short_cost(stage: Stage) -> int:
    """What everything short would cost, in absolute value."""
    return total(np.abs(stage.problem.short_cost) * stage.problem.demand)
