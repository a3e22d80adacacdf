"""HiGHS at work beside the search for bounds, on the rows that may still better the plan."""

from __future__ import annotations

import threading
import time
from dataclasses import dataclass, field

import numpy as np

from engine.exact import Integers
from engine.loads.compact import compact, run
from engine.loads.highs import run_until
from engine.loads.master import Master, add_plan, whole_ways
from engine.loads.prices import Floats
from engine.loads.problem import Flags
from engine.loads.stage import Stage

LONGEST = 10.0**7
"""Seconds; HiGHS is stopped by being told to."""

SMALLEST_GAP = 1e-9
"""Part of the cost that HiGHS may leave open."""

PATIENCE = 0.3
"""Seconds for HiGHS to hear a stop: it does not look while it simplifies a large model."""

CHOSEN_GAP = 1e-4
"""Part of the cost that may be left open when ways are chosen: the ways are not all there are,"""

CHOOSING = 15.0
"""so it may not take longer than so many seconds."""


@dataclass
class Beside:
    """One model being solved in a thread of its own.

    open_rows: the rows in the model; all others carry what they do in `base`
    all_rows:  whether every row that may better the plan is in the model
    of_ways:   how many ways there were, if ways are chosen; 0 if rows are planned
    """

    open_rows: Flags
    base: Integers
    all_rows: bool
    of_ways: int = 0
    begun: float = field(default_factory=time.monotonic)
    stopping: threading.Event = field(default_factory=threading.Event)
    thread: threading.Thread | None = None
    quantities: list[Integers] = field(default_factory=list)
    bound: float | None = None
    optimal: bool = False

    @property
    def running(self) -> bool:
        """Whether it is still at work."""
        return self.thread is not None and self.thread.is_alive()

    def stop(self) -> None:
        """Ends it; returns when it has ended, or soon. Left to itself it ends when HiGHS next looks."""
        self.stopping.set()
        if self.thread is not None:
            self.thread.join(PATIENCE)


def start(stage: Stage, open_rows: Flags, best: Integers, all_rows: bool) -> Beside:
    """Begins with the best plan; rows that are not open keep what they carry there."""
    model = compact(stage, open_rows, best)
    model.solver.setOptionValue("mip_rel_gap", SMALLEST_GAP)
    work = Beside(open_rows, best, all_rows)

    def solve() -> None:
        found = run(model, best, work.stopping.is_set, LONGEST, work.quantities.append)
        work.bound, work.optimal = found.bound, found.optimal
        if found.quantity is not None:
            work.quantities.append(found.quantity)

    work.thread = threading.Thread(target=solve)
    work.thread.start()
    return work


def choose(master: Master, best: Integers) -> Beside:
    """Begins to choose one way for every customer, of those that the linear programme has met.

    The programme with whole ways (Barnhart et al. 1998 price and branch); its columns hold good plans long
    before the week's own integer model has any.
    best: the best plan, a way of which every customer gets as a column
    """
    problem = master.stage.problem
    add_plan(master, best)
    solver, patterns = whole_ways(master), master.patterns
    solver.setOptionValue("mip_rel_gap", CHOSEN_GAP)
    everything = np.ones(problem.rows, dtype=np.bool_)
    work = Beside(everything, best, False, len(patterns.customer))

    def add(value: Floats) -> None:
        weight = np.rint(value[master.fixed : master.fixed + len(patterns.customer)]).astype(np.int64)
        quantity = np.zeros(problem.rows, dtype=np.int64)
        np.add.at(quantity, patterns.row, weight[patterns.way] * patterns.quantity)
        work.quantities.append(quantity)

    def solve() -> None:
        run_until(solver, work.stopping.is_set, CHOOSING, add)

    work.thread = threading.Thread(target=solve)
    work.thread.start()
    return work


def taken(work: Beside) -> list[Integers]:
    """The plans that have come since the last time."""
    found = []
    while work.quantities:
        quantity = work.quantities.pop(0)
        found.append(np.where(work.open_rows, quantity, work.base))
    return found
