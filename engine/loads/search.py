"""The search of one stage: bounds from the tree, better plans from mixtures and from HiGHS beside."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from engine.exact import Integers
from engine.loads.beside import Beside, start, taken
from engine.loads.cost import Score, score_of
from engine.loads.fit import behind, mended, serve
from engine.loads.master import master_of
from engine.loads.prices import Floats
from engine.loads.problem import Flags, LoadProblem
from engine.loads.proof import NotValid, check
from engine.loads.stage import Stage, whole
from engine.loads.tree import Tree, close_rows, rounded, step, with_regrets

FEW_ROWS = 700
"""About so many rows are given to HiGHS first."""

MORE = 3
"""So many times as many the next time, if all were not in."""


@dataclass
class Best:
    """The best plan so far, always valid; whoever finds a better one calls `offer`.

    problem: the whole week, with its own costs; tell: told when it has become better
    """

    problem: LoadProblem
    plan: tuple[Integers, Score]
    tell: Callable[[], None] = lambda: None

    @property
    def quantity(self) -> Integers:
        """(rows,) of the best plan."""
        return self.plan[0]

    @property
    def score(self) -> Score:
        """Of the best plan."""
        return self.plan[1]

    def offer(self, quantity: Integers) -> bool:
        """Takes a plan if it is valid and better; says whether it was."""
        score = score_of(self.problem, quantity)
        if score >= self.score:
            return False
        try:
            check(self.problem, quantity)
        except NotValid:
            return False
        self.plan = (quantity, score)
        self.tell()
        return True


@dataclass
class Told:
    """What a stage has come to.

    bound:  proved: no plan of the stage has less
    solver: what HiGHS claims, or None
    """

    bound: int
    solver: int | None = None
    tell: Callable[[str], None] = field(default=lambda _: None)


def polish(best: Best, quantity: Integers, passes: int = 2) -> None:
    """Makes a plan of any quantities and offers it, and what a few passes over the customers make of it."""
    problem = best.problem
    quantity = mended(problem, quantity)
    exact = behind(problem, quantity)
    for one in (quantity, exact):
        if one is not None:
            best.offer(one)
    order = np.argsort(-problem.demand, kind="stable")
    for _ in range(passes):
        better = serve(problem, best.quantity, order)
        again = behind(problem, better)
        if not (best.offer(better) | (again is not None and best.offer(again))):
            break


def search(
    stage: Stage, best: Best, value: Callable[[], int], told: Told, should_stop: Callable[[], bool]
) -> None:
    """Betters plan and bound of a stage until they meet or it is told to stop.

    value: what the best plan comes to in this stage
    told:  its bound is kept up to date
    """
    tree = Tree(master_of(stage))
    tree.push(told.bound, whole(stage), None)
    work: Beside | None = None
    open_rows: Flags = np.zeros(stage.problem.rows, dtype=np.bool_)
    asked = FEW_ROWS
    fixed_at: int | None = None
    prices = None
    steps, last_told = 0, time.monotonic()

    def rising(bound: int) -> None:
        nonlocal last_told
        if steps == 0 and bound > told.bound:
            told.bound = min(bound, value())
            if time.monotonic() - last_told > 0.3:
                last_told = time.monotonic()
                told.tell("Pricing loads")

    try:
        while told.bound < value() and not should_stop():
            if tree.heap:
                before = value()
                came = step(tree, before, should_stop, rising)
                steps += 1
                if came.mean is not None and (steps < 20 or steps % 10 == 0):
                    exact = behind(best.problem, rounded_plan(best.problem, came.mean))
                    if exact is None or not best.offer(exact):
                        if steps == 1:
                            polish(best, rounded(came.mean))
                    elif steps == 1:
                        polish(best, best.quantity)
                if steps == 1:
                    prices = tree.heap[0][3] if tree.heap else None
            elif work is None or not work.running:
                break
            else:
                time.sleep(0.01)
            told.bound = max(told.bound, tree.bound(value()))
            if time.monotonic() - last_told > 0.5:
                last_told = time.monotonic()
                told.tell("Bettering the plan and its bound")
            if work is not None:
                for quantity in taken(work, best.quantity, open_rows):
                    _take(best, quantity)
            ended = work is not None and not work.running
            if ended and work is not None and work.optimal and work.all_rows and work.bound is not None:
                told.solver = round(work.bound)
            again = work is None or (ended and not work.all_rows)
            if prices is not None and (again or fixed_at is None or value() < fixed_at):
                limit = value()
                reached = with_regrets(tree, limit, prices)
                if reached is not None:
                    close_rows(tree, reached >= limit, limit)
                    fixed_at = limit
                    if again and told.bound < value():
                        open_rows, complete = _open(best, reached, limit, asked)
                        asked *= MORE
                        work = start(stage, open_rows, best.quantity, complete, 1e-9)
            told.bound = max(told.bound, tree.bound(value()))
    finally:
        if work is not None:
            work.stop()
            for quantity in taken(work, best.quantity, open_rows):
                _take(best, quantity)
            told.bound = min(max(told.bound, tree.bound(value())), value())


def rounded_plan(problem: LoadProblem, mean: Floats) -> Integers:
    """Quantities whose loads are those that a mixture needs, whatever they add up to."""
    quantity = np.where(mean > 1e-6, np.maximum(np.ceil(mean - 1e-6), problem.least), 0).astype(np.int64)
    return np.minimum(quantity, problem.most)


def _take(best: Best, quantity: Integers) -> None:
    exact = behind(best.problem, quantity)
    if exact is None or not best.offer(exact):
        polish(best, quantity, 1)


def _open(best: Best, reached: Integers, value: int, many: int) -> tuple[Flags, bool]:
    """The rows to give to HiGHS: those in use and the most promising; whether these are all that matter."""
    promising = reached < value
    if promising.sum() > many:
        limit = np.partition(reached, many)[many]
        promising &= reached <= limit
        complete = False
    else:
        complete = True
    return promising | (best.quantity > 0), complete
