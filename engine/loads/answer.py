"""What solving a week with whole vehicles gives: quantities and loads, the aims, a proved bound."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from engine.exact import Integers
from engine.loads.problem import LoadProblem

Ended = Literal["proved", "time limit", "stopped"]
"""Why the search ended: the plan is proved best, time was up, or it was told to stop."""

How = Literal["network", "loads"]
"""Solved as a pure network, every quantity in whole loads; or by bounds on loads and a search."""


class NoPlan(Exception):
    """What must be sent cannot be sent together; `rows` are the rate rows whose lower limits do it.

    what:  "customer", "depot", "haulier" or "row": where the limits meet
    index: which one
    """

    def __init__(self, what: str, index: int, rows: tuple[int, ...], message: str) -> None:
        self.what = what
        self.index = index
        self.rows = rows
        super().__init__(message)


@dataclass(frozen=True, slots=True)
class Aim:
    """One of the aims that come before cost: units short in a rank, or units kept that must move.

    name:        "short" or "must move"
    rank:        of the customers, -1 for "must move"
    value:       units that count against the aim in this plan
    lower_bound: proved: no plan that is as good in all aims before can have fewer
    """

    name: Literal["short", "must move"]
    rank: int
    value: int
    lower_bound: int

    @property
    def proved(self) -> bool:
        """Whether no plan does better."""
        return self.value == self.lower_bound


@dataclass(frozen=True, eq=False)
class LoadFlow:
    """A valid plan, checked in integers, with a proved bound on what any plan must cost.

    problem:      what was solved
    quantity:     (rows,)
    loads:        (rows,) loads on each row, the last of them perhaps not full
    short:        (customers,)
    unsent:       (depots,)
    aims:         in their order; aims that nothing can count against are left out
    cost:         exact: rows, openings, charges for short and unsent
    lower_bound:  proved in integers: no plan as good in all aims can cost less
    solver_bound: what the integer solver claims beyond that, resting on floating-point numbers; or None
    how:          "network" if the week was a pure network and solved as one
    ended:        why the search ended; "proved" if aims and cost are all at their bounds
    seconds:      how long it took
    """

    problem: LoadProblem
    quantity: Integers
    loads: Integers
    short: Integers
    unsent: Integers
    aims: tuple[Aim, ...]
    cost: int
    lower_bound: int
    solver_bound: int | None
    how: How
    ended: Ended
    seconds: float

    @property
    def gap(self) -> int:
        """Cost minus lower bound; 0: proved to cost the least."""
        return self.cost - self.lower_bound

    @property
    def proved(self) -> bool:
        """Whether no plan does better, in the aims or in cost."""
        return self.gap == 0 and all(aim.proved for aim in self.aims)


@dataclass(frozen=True, slots=True)
class Progress:
    """How far the search is: the best plan so far, valid and checked, and its bound.

    doing:   a few words on what is being done
    best:    the plan that a stop would return now
    seconds: since the start
    """

    doing: str
    best: LoadFlow
    seconds: float

    @property
    def cost(self) -> int:
        """Of the best plan."""
        return self.best.cost

    @property
    def lower_bound(self) -> int:
        """Of the best plan."""
        return self.best.lower_bound

    @property
    def gap(self) -> int:
        """Of the best plan."""
        return self.best.gap
