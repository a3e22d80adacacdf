"""HiGHS, kept quiet and stoppable. What it says rests on floating point and is always checked again."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from typing import Any, cast

import highspy
import numpy as np
from highspy import highs
from numpy.typing import NDArray

OPTIMAL = highspy.HighsModelStatus.kOptimal
INFINITE = float(highspy.kHighsInf)
WAIT = 0.02
"""Seconds between two looks at whether to stop."""


def quiet() -> highspy.Highs:
    """A solver that writes nothing and uses one thread.

    The base class is taken because the class itself writes to standard output when it is made.
    """
    base: Any = highs
    solver = base._Highs()
    solver.setOptionValue("output_flag", False)
    solver.setOptionValue("threads", 1)
    return cast(highspy.Highs, solver)


def run_until(
    solver: highspy.Highs,
    should_stop: Callable[[], bool],
    seconds: float,
    tell: Callable[[NDArray[np.float64]], None] | None = None,
) -> None:
    """Runs an integer model until it is done, `should_stop` says so or the seconds have passed.

    tell: told of every better solution, from another thread
    It runs beside, so that a KeyboardInterrupt is noticed; that stops it too and is raised again.
    """
    interrupted = threading.Event()

    def ask(kind: Any, message: str, said: Any, answer: Any, data: Any) -> None:
        if interrupted.is_set() and answer is not None:
            answer.user_interrupt = True
        if kind == kinds.kCallbackMipImprovingSolution and tell is not None:
            tell(np.array(said.mip_solution))

    kinds = highspy.cb.HighsCallbackType
    solver.setOptionValue("time_limit", max(0.01, seconds))
    solver.setCallback(ask, None)
    wanted = [kinds.kCallbackMipInterrupt, kinds.kCallbackSimplexInterrupt]
    if tell is not None:
        wanted.append(kinds.kCallbackMipImprovingSolution)
    for one in wanted:
        solver.startCallback(one)
    beside = threading.Thread(target=solver.run, daemon=True)
    begin = time.monotonic()
    beside.start()
    try:
        while beside.is_alive():
            beside.join(WAIT)
            if should_stop() or time.monotonic() - begin > seconds + 1:
                interrupted.set()
    except KeyboardInterrupt:
        interrupted.set()
        beside.join()
        raise
