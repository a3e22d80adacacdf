"""Branch and bound: parts of all plans, each with a bound proved in integers, the least bound first.

A part is split by how many loads a rate row may carry, or by whether a depot is open, until its bound reaches
the best plan (Land & Doig 1960; with generated columns Barnhart et al. 1998). The bound of all is the least
of the parts that are left, so it holds at every moment.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable
from dataclasses import dataclass, field, replace

import numpy as np

from engine.exact import Integers
from engine.loads.arrays import NEVER
from engine.loads.master import SETTLED, Bounded, Master, settle
from engine.loads.prices import Floats, Prices, answers_for, bound_at, in_integers, priced_by, regrets
from engine.loads.problem import Flags
from engine.loads.stage import Node, Stage, rounded_up, rows_of, whole

ROUGHLY = 1e-5
"""Prices of a part need not settle better than this part of the cost,"""

NARROW = 1e-4
"""unless its bound is nearer to the best plan than this."""

WORTH_REGRETS = 0.25
"""Regrets are made exact where plan and bound are nearer than this part of what a customer costs."""

EVEN = 1e-6
"""Shares of a mixture nearer to 0 or 1 than this count as that."""


@dataclass
class Tree:
    """The parts that are left.

    heap:   (bound, number, part, prices to begin with)
    closed: least bound of parts that are left out: because they reached the best plan known at the time, or
            because they could be split no further
    """

    master: Master
    heap: list[tuple[int, int, Node, Prices | None]] = field(default_factory=list)
    count: int = 0
    closed: int | None = None

    def leave_out(self, bound: int) -> None:
        """Notes that parts with this bound are not looked at any more."""
        self.closed = bound if self.closed is None else min(self.closed, bound)

    def bound(self, best: int) -> int:
        """What no plan costs less than, given the cost of the best plan known."""
        parts = [best]
        if self.heap:
            parts.append(self.heap[0][0])
        if self.closed is not None:
            parts.append(self.closed)
        return min(parts)

    def push(self, bound: int, node: Node, prices: Prices | None) -> None:
        """Adds a part."""
        self.count += 1
        heapq.heappush(self.heap, (bound, self.count, node, prices))


@dataclass(frozen=True, eq=False)
class Step:
    """What one step through the tree gave: mean quantities of the part's mixture, None if there is none."""

    mean: Floats | None
    node: Node


def step(tree: Tree, best: int, should_stop: Callable[[], bool], tell: Callable[[int], None]) -> Step:
    """Takes the part with the least bound, bounds it better, and splits it.

    best: cost of the best plan known; tell: told of the part's bound while it rises
    """
    old, _, node, prices = heapq.heappop(tree.heap)
    if old >= best:
        tree.leave_out(best)
        return Step(None, node)
    loose = SETTLED if tree.count == 1 or best - old < NARROW * abs(best) else ROUGHLY
    found = settle(tree.master, node, best, should_stop, prices, tell, loose)
    if found.bound is None or found.bound >= best:
        tree.leave_out(best)
        return Step(None, node)
    bound = max(old, found.bound)
    if should_stop():
        tree.push(bound, node, found.prices)
        return Step(None, node)
    if not len(found.weight):
        tree.leave_out(bound)
        return Step(None, node)
    mean = mean_of(tree.master, found.weight)
    pair = split(tree.master, node, found)
    if pair is None:
        tree.leave_out(bound)
        return Step(mean, node)
    for part in pair:
        tree.push(bound, part, found.prices)
    return Step(mean, node)


def mean_of(master: Master, weight: Floats) -> Floats:
    """(rows,) the mean quantity of each row in a mixture."""
    patterns = master.patterns
    share = weight[patterns.way] * patterns.quantity
    return np.bincount(patterns.row, share, master.stage.problem.rows).astype(np.float64)


def split(master: Master, node: Node, found: Bounded) -> tuple[Node, Node] | None:
    """Two parts that together hold all plans of the node, and neither of which holds its mixture."""
    stage = master.stage
    problem = stage.problem
    undecided = (node.opened == -1) & (found.opened > EVEN) & (found.opened < 1 - EVEN)
    if undecided.any():
        depot = int(np.argmax(np.where(undecided, problem.opening_charge, -1)))
        first, second = node.opened.copy(), node.opened.copy()
        first[depot], second[depot] = 0, 1
        return replace(node, opened=first), replace(node, opened=second)
    patterns = master.patterns
    inside = found.weight[patterns.way] > EVEN
    row, x, share = patterns.row[inside], patterns.quantity[inside], found.weight[patterns.way][inside]
    loads = loads_of(stage, row, x)
    for amount in (loads, x):
        at = _most_divided(stage, row, amount, share)
        if at is None:
            continue
        place, mean = at
        least = int(np.floor(mean + EVEN))
        highest = int(amount[row == place].max())
        below = least if least < highest else highest - 1
        size = int(problem.load_size[place])
        limit = below
        if amount is loads:
            limit = below * size if size else 0
        if not (node.least[place] if node.forced[place] else 0) <= limit < node.most[place]:
            continue
        most, low, forced = node.most.copy(), node.least.copy(), node.forced.copy()
        most[place] = limit
        low[place] = max(int(node.least[place]), limit + 1)
        forced[place] = 1
        return replace(node, most=most), replace(node, least=low, forced=forced)
    return None


def loads_of(stage: Stage, row: Integers, x: Integers) -> Integers:
    """How many loads quantities on rows make."""
    size = stage.problem.load_size[row]
    return -(-x // np.where(size > 0, size, np.maximum(x, 1)))


def _most_divided(stage: Stage, row: Integers, amount: Integers, share: Floats) -> tuple[int, float] | None:
    """The row whose amount the mixture divides most, counting what a load of it costs."""
    problem = stage.problem
    rows = problem.rows
    mean = np.bincount(row, share * amount, rows)
    spread = np.bincount(row, share * amount * amount, rows) - mean**2
    part = mean - np.floor(mean + EVEN)
    size = np.where(problem.load_size > 0, problem.load_size, problem.most)
    worth = problem.per_load + problem.charge_per_use + np.abs(problem.per_unit) * size + 1
    score = np.where(spread > EVEN, np.minimum(part, 1 - part) + 0.01, 0.0) * worth
    place = int(np.argmax(score)) if rows else 0
    if not rows or score[place] <= 0.0:
        return None
    return place, float(mean[place])


def with_regrets(tree: Tree, best: int, prices: Prices, should_stop: Callable[[], bool]) -> Integers | None:
    """(rows,) how much using each row raises the bound of all plans at these prices, in units of cost.

    A row whose use raises it to `best` is of no use any more, see `close_rows`. None if nothing is left.
    """
    stage = tree.master.stage
    node = whole(stage)
    rows = rows_of(stage, node)
    answers = answers_for(stage)
    bound = bound_at(stage, node, rows, prices, answers)
    if bound is None:
        return None
    priced = priced_by(stage, node, in_integers(stage, prices))
    near = best * stage.scale - bound
    # while the plan is poor, regrets say little for the time that they take
    most = near if near < WORTH_REGRETS * abs(bound) / max(1, stage.problem.customers) else 0
    found = regrets(stage, rows, priced, answers, most, should_stop)
    reached = np.array(
        [best if regret >= NEVER else rounded_up(stage, bound + regret) for regret in found.tolist()],
        dtype=np.int64,
    )
    return reached


def close_rows(tree: Tree, useless: Flags, best: int) -> None:
    """Closes rows in all parts that are left; no plan that costs less than `best` uses any of them."""
    if useless.any():
        tree.leave_out(best)
    parts = []
    for bound, number, node, prices in tree.heap:
        if node.forced[useless].any():
            continue
        most = node.most.copy()
        most[useless] = 0
        parts.append((bound, number, replace(node, most=most), prices))
    heapq.heapify(parts)
    tree.heap = parts


def rounded(mean: Floats) -> Integers:
    """(rows,) quantities that a mixture comes to, rounded to integers."""
    quantity = np.rint(np.where(mean < 0.5, 0.0, mean)).astype(np.int64)
    return quantity
