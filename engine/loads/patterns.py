"""Ways to serve single customers that the search has met: the columns of its linear programme."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.loads.arrays import Answers
from engine.loads.cost import row_costs
from engine.loads.stage import Node, Stage

Booleans = NDArray[np.bool_]


class Patterns(NamedTuple):
    """Ways, the rows of way p at first[p] up to first[p+1].

    customer, short, cost: (ways,) whom, what is short, and the cost in the stage's own costs, exact
    first:                 (ways + 1,)
    row, quantity:         (entries,) the rows that carry something, and how much
    """

    customer: Integers
    short: Integers
    cost: Integers
    first: Integers
    row: Integers
    quantity: Integers

    @property
    def way(self) -> Integers:
        """(entries,) which way each entry belongs to."""
        return np.repeat(np.arange(len(self.customer), dtype=np.int64), np.diff(self.first))


def patterns_of(stage: Stage, which: Integers, answers: Answers) -> Patterns:
    """The ways that stand in `answers` for these customers, in rising order."""
    problem = stage.problem
    chosen = np.zeros(problem.customers, dtype=np.bool_)
    chosen[which] = True
    row = np.flatnonzero((answers.quantity > 0) & chosen[problem.customer])
    per_customer = np.bincount(problem.customer[row], minlength=problem.customers)[which]
    first = np.concatenate([[0], np.cumsum(per_customer)]).astype(np.int64)
    cost = problem.short_cost[which] * answers.short[which]
    by_row = np.zeros(problem.customers, dtype=np.int64)
    np.add.at(by_row, problem.customer, row_costs(problem, answers.quantity))
    quantity = answers.quantity[row].copy()
    return Patterns(which.copy(), answers.short[which].copy(), cost + by_row[which], first, row, quantity)


def no_patterns() -> Patterns:
    """None yet."""
    none = np.zeros(0, dtype=np.int64)
    return Patterns(none, none, none, np.zeros(1, dtype=np.int64), none, none)


def joined(one: Patterns, other: Patterns) -> Patterns:
    """The other ways behind the one."""
    return Patterns(
        np.concatenate([one.customer, other.customer]),
        np.concatenate([one.short, other.short]),
        np.concatenate([one.cost, other.cost]),
        np.concatenate([one.first, other.first[1:] + one.first[-1]]),
        np.concatenate([one.row, other.row]),
        np.concatenate([one.quantity, other.quantity]),
    )


def allowed(stage: Stage, node: Node, patterns: Patterns) -> Booleans:
    """(ways,) whether each way belongs to the node."""
    problem = stage.problem
    row, x = patterns.row, patterns.quantity
    closed = node.opened[problem.depot[row]] == 0
    broken = (x < node.least[row]) | (x > node.most[row]) | closed
    ways = len(patterns.customer)
    fits = np.bincount(patterns.way[broken], minlength=ways) == 0
    needed = np.bincount(problem.customer, node.forced, problem.customers).astype(np.int64)
    met = np.bincount(patterns.way, node.forced[row], ways).astype(np.int64)
    result: Booleans = fits & (met == needed[patterns.customer])
    return result & (patterns.short <= stage.short_most[patterns.customer])
