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


@dataclass
class Beside:
    """One model being solved in a thread of its own.

    all_rows: whether every row that may better the plan is in the model
    """

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


def start(stage: Stage, open_rows: Flags, best: Integers, all_rows: bool, gap: float) -> Beside:
    """Begins with the best plan; rows that are not open keep what they carry there.

    gap: share of the cost below which HiGHS need not go
    """
    model = compact(stage, open_rows, best)
    model.solver.setOptionValue("mip_rel_gap", gap)
    work = Beside(all_rows)

    def solve() -> None:
        found = run(model, best, work.stopping.is_set, LONGEST, work.quantities.append)
        work.bound, work.optimal = found.bound, found.optimal
        if found.quantity is not None:
            work.quantities.append(found.quantity)

    work.thread = threading.Thread(target=solve, daemon=True)
    work.thread.start()
    return work


def taken(work: Beside, best: Integers, open_rows: Flags) -> list[Integers]:
    """The plans that have come since the last time."""
    found = []
    while work.quantities:
        quantity = work.quantities.pop(0)
        found.append(np.where(open_rows, quantity, best))
    return found
