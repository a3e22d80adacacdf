"""HiGHS at work beside the search for bounds, on the rows that may still better the plan."""

from __future__ import annotations

import threading
from dataclasses import dataclass, field

import numpy as np

from engine.exact import Integers
from engine.loads.compact import compact, run
from engine.loads.problem import Flags
from engine.loads.stage import Stage

LONGEST = 10.0**7
"""Seconds; HiGHS is stopped by being told to."""

SMALLEST_GAP = 1e-9
"""Part of the cost that HiGHS may leave open."""


@dataclass
class Beside:
    """One model being solved in a thread of its own.

    open_rows: the rows in the model; all others carry what they do in `base`
    all_rows:  whether every row that may better the plan is in the model
    """

    open_rows: Flags
    base: Integers
    all_rows: bool
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
        """Ends it; returns when it has ended."""
        self.stopping.set()
        if self.thread is not None:
            self.thread.join()


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

    work.thread = threading.Thread(target=solve, daemon=True)
    work.thread.start()
    return work


def taken(work: Beside) -> list[Integers]:
    """The plans that have come since the last time."""
    found = []
    while work.quantities:
        quantity = work.quantities.pop(0)
        found.append(np.where(work.open_rows, quantity, work.base))
    return found
