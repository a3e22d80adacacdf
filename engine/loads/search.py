"""The search of one stage: bounds from the tree, better plans from mixtures and from HiGHS beside."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from engine.exact import Integers
from engine.loads.anneal import FIRST_ROUNDS, Annealing, begin, piece
from engine.loads.beside import Beside, choose, start, taken
from engine.loads.cost import Score, score_of
from engine.loads.fit import behind, mended, serve
from engine.loads.master import Master, add_plan, master_of, settle
from engine.loads.prices import Floats, Prices
from engine.loads.problem import Flags, LoadProblem
from engine.loads.proof import NotValid, check
from engine.loads.stage import Stage, whole
from engine.loads.tree import Tree, close_rows, mean_of, rounded, step, with_regrets

FEW_ROWS = 700
"""About so many rows are given to HiGHS first."""

ROUNDS_EACH = 250
"""Rounds of a first run per customer, if that is less than usual."""

SHARE = 4.0
"""Time for rearranging, per time for the bound; less and less where it finds nothing."""

SOON = 1e-5
"""Part of the cost that the bound of a first mixture may lack."""

SHORT_RUN = 3000
"""Rounds given to making a plan of what keeps the rules but leaves too much short."""

LONG_ENOUGH = 2.0
"""Seconds given to finding out which rows can be closed."""

MORE_WAYS = 1.1
"""So many times as many ways make it worth while to choose again,"""

FIRST_TURN = 8.0
"""when rows have been planned for so many seconds."""

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


def rearranged(best: Best, quantity: Integers, price: Integers, should_stop: Callable[[], bool]) -> None:
    """Offers what a short run makes of a plan that keeps the rules but may leave more short than the best.

    price: (depots,) what a unit of the stock is worth
    """
    run = begin(best.problem, quantity, price, SHORT_RUN, 0)
    while run.done < run.rounds and not should_stop():
        if piece(run):
            best.offer(run.moves.best.copy())


def mixture_first(stage: Stage, best: Best, should_stop: Callable[[], bool]) -> tuple[Master, Prices]:
    """Makes a plan of the stage's mixture, whose ways are known from then on."""
    master = master_of(stage)
    found = settle(master, whole(stage), None, should_stop, None, None, SOON)
    if len(found.weight):
        quantity = mended(best.problem, rounded(mean_of(master, found.weight)))
        rearranged(best, quantity, np.rint(found.prices.depot).astype(np.int64), should_stop)
    return master, found.prices


@dataclass
class Hunt:
    """All that is at work on one stage.

    value:  what the best plan comes to in the stage
    prices: of the first bound
    asked:  about how many rows HiGHS gets next
    heard:  what was at work beside and has ended, the last of these
    chosen_of, turn: number of ways at the last choice, seconds before the next
    fixed:  value of the best plan when rows were closed last
    run:    the rearranging that is under way, the runs-th, of so many rounds, for a share of the time;
            owed: seconds of it that are still due
    """

    tree: Tree
    best: Best
    value: Callable[[], int]
    told: Told
    should_stop: Callable[[], bool]
    prices: Prices | None = None
    beside: Beside | None = None
    asked: int = FEW_ROWS
    heard: Beside | None = None
    chosen_of: int = 0
    turn: float = FIRST_TURN
    fixed: int | None = None
    run: Annealing | None = None
    runs: int = 0
    rounds: int = FIRST_ROUNDS
    share: float = SHARE
    owed: float = 0.0
    steps: int = 0
    last_told: float = field(default_factory=time.monotonic)


def search(
    stage: Stage,
    best: Best,
    value: Callable[[], int],
    told: Told,
    should_stop: Callable[[], bool],
    by_cost: bool,
    known: tuple[Master, Prices] | None = None,
) -> None:
    """Betters plan and bound of a stage until they meet or it is told to stop.

    value:   what the best plan comes to in this stage
    told:    its bound is kept up to date
    by_cost: whether the stage is the last, where cost is bettered
    known:   a programme of this stage with ways that are known already, and its prices
    """
    master, prices = (master_of(stage), None) if known is None else known
    if master.penalty > 1:
        master, prices = master_of(stage), None
    # without a plan only penalties keep a programme with tight limits possible, and prices grow
    add_plan(master, best.quantity)
    hunt = Hunt(Tree(master), best, value, told, should_stop)
    hunt.rounds = min(FIRST_ROUNDS, ROUNDS_EACH * max(1, stage.problem.customers))
    hunt.tree.push(told.bound, whole(stage), prices)
    try:
        while told.bound < value() and not should_stop():
            begun = time.monotonic()
            if hunt.tree.heap:
                _bound_step(hunt)
            elif hunt.beside is None or not hunt.beside.running:
                break
            else:
                time.sleep(0.005)
            if by_cost and hunt.steps > 1 and told.solver != value():
                _anneal(hunt, time.monotonic() - begun)
            _beside_step(hunt)
            told.bound = max(told.bound, hunt.tree.bound(value()))
            _tell(hunt, "Bettering the plan and its bound", 0.5)
    finally:
        if hunt.beside is not None:
            hunt.beside.stop()
            for quantity in taken(hunt.beside):
                _take(best, quantity)
            _hear(hunt, hunt.beside)
        told.bound = min(max(told.bound, hunt.tree.bound(value())), value())


def _tell(hunt: Hunt, doing: str, seconds: float) -> None:
    if time.monotonic() - hunt.last_told > seconds:
        hunt.last_told = time.monotonic()
        hunt.told.tell(doing)


def _bound_step(hunt: Hunt) -> None:
    """One step of the tree; plans are made of its first mixtures and of some later ones."""
    best, told = hunt.best, hunt.told

    def rising(bound: int) -> None:
        if hunt.steps == 0 and bound > told.bound:
            told.bound = min(bound, hunt.value())
            _tell(hunt, "Pricing loads", 0.3)

    came = step(hunt.tree, hunt.value(), hunt.should_stop, rising)
    hunt.steps += 1
    if hunt.steps == 1:
        hunt.prices = hunt.tree.heap[0][3] if hunt.tree.heap else None
    if came.mean is not None and (hunt.steps < 20 or hunt.steps % 10 == 0):
        exact = behind(best.problem, rounded_plan(best.problem, came.mean))
        better = exact is not None and best.offer(exact)
        if hunt.steps == 1:
            polish(best, best.quantity if better else rounded(came.mean))
            if not better:
                _from_mixture(hunt, rounded(came.mean))


def _from_mixture(hunt: Hunt, quantity: Integers) -> None:
    """Most customers have one way in a mixture; the others are served from what is left, and rearranged."""
    best = hunt.best
    price = np.zeros(best.problem.depots, dtype=np.int64)
    if hunt.prices is not None:
        price = np.rint(hunt.prices.depot).astype(np.int64)
    rearranged(best, mended(best.problem, quantity), price, hunt.should_stop)


def _anneal(hunt: Hunt, seconds: float) -> None:
    """Rearranges for a share of the time that the steps for the bound took, a piece as soon as it is owed."""
    hunt.owed += seconds * hunt.share
    while hunt.owed > 0 and not hunt.should_stop() and hunt.told.bound < hunt.value():
        begun = time.monotonic()
        _anneal_step(hunt)
        hunt.owed -= time.monotonic() - begun


def _anneal_step(hunt: Hunt) -> None:
    """A piece of a run of rearrangements; a run that found nothing is followed by a longer one."""
    best, run = hunt.best, hunt.run
    if run is None:
        price = np.zeros(best.problem.depots, dtype=np.int64)
        if hunt.prices is not None:
            price = np.rint(hunt.prices.depot).astype(np.int64)
        run = hunt.run = begin(best.problem, best.quantity, price, hunt.rounds, hunt.runs)
        hunt.runs += 1
    if piece(run):
        best.offer(run.moves.best.copy())
    if run.done >= run.rounds:
        exact = behind(best.problem, best.quantity)
        if exact is not None:
            best.offer(exact)
        if not run.found:
            hunt.rounds *= 2
            hunt.share /= 4
        hunt.run = None


def _beside_step(hunt: Hunt) -> None:
    """Hears what HiGHS found, closes rows that can better nothing, and starts it again with more rows."""
    best, work, value = hunt.best, hunt.beside, hunt.value
    ended = work is not None and not work.running
    if work is not None:
        for quantity in taken(work):
            _take(best, quantity)
        if ended:
            _hear(hunt, work)
            if work is not hunt.heard and not work.of_ways:
                hunt.asked *= MORE
            hunt.heard = work
    if hunt.prices is not None and hunt.told.bound < value() and _time_to_choose(hunt):
        hunt.beside = choose(hunt.tree.master, best.quantity)
        hunt.chosen_of = hunt.beside.of_ways
        return
    again = work is None or (ended and (work.of_ways > 0 or not work.all_rows))
    if hunt.prices is None or not (again or hunt.fixed is None or value() < hunt.fixed):
        return
    limit = value()
    until = time.monotonic() + LONG_ENOUGH
    reached = with_regrets(
        hunt.tree, limit, hunt.prices, lambda: hunt.should_stop() or time.monotonic() > until
    )
    if reached is None:
        return
    close_rows(hunt.tree, reached >= limit, limit)
    hunt.fixed = limit
    if again and hunt.told.bound < limit:
        open_rows, complete = _open(best, reached, limit, hunt.asked)
        hunt.beside = start(hunt.tree.master.stage, open_rows, best.quantity, complete)


def _time_to_choose(hunt: Hunt) -> bool:
    """Whether ways should be chosen (again): first of all, and when rows had a turn and there are more ways.

    Rows that are still being planned then are left, for a longer turn the next time.
    """
    work = hunt.beside
    if work is None:
        return True
    many = len(hunt.tree.master.patterns.customer) >= MORE_WAYS * hunt.chosen_of
    if work.of_ways or not many or (work.all_rows and work.optimal):
        return False
    if work.running:
        if time.monotonic() - work.begun < hunt.turn:
            return False
        hunt.turn *= 2
        work.stop()
        for quantity in taken(work):
            _take(hunt.best, quantity)
        _hear(hunt, work)
    return True


def _hear(hunt: Hunt, work: Beside) -> None:
    """Notes the bound that HiGHS claims, if all rows that matter were in its model."""
    if work.all_rows and work.bound is not None:
        claimed = min(int(work.bound), hunt.value())
        if hunt.told.solver is None or claimed > hunt.told.solver:
            hunt.told.solver = claimed


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
