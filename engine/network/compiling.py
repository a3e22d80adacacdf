"""Compiles all kernels beforehand: once after installation, later their code is only loaded."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable

import numpy as np

from engine.network import exchange
from engine.network.alternatives import exchangeable
from engine.network.closure import close
from engine.network.compiled import code_folder
from engine.network.cycles import cancel_cycles
from engine.network.flow import Flow
from engine.network.problem import Problem
from engine.network.proof import prove
from engine.network.solve import least_cost, only_simplex
from engine.network.ties import nearest


def prepare(able: Callable[[], None] | None = None) -> None:
    """Compiles all kernels, or loads them from the user's cache folder: some seconds the very first time.

    The first solve would do the same. Other threads may go on meanwhile, and may solve: they wait. The
    two ways to solve are compiled at the same time, one of them by a process of its own, and the simplex,
    which is the quicker to compile, solves everything until the exchange is there.

    able: called as soon as problems can be solved
    """
    other = _compile_apart()
    if other is None:
        _solve_all()
        if able is not None:
            able()
        return
    only_simplex.set()
    try:
        _solve_all()
        if able is not None:
            able()
        other.wait()
    finally:
        only_simplex.clear()
    _solve_all()


def compile_rest() -> None:
    """Compiles all but the simplex: first what every plan needs, then the exchange."""
    problem, limited = _examples()
    answer = np.array([0, 1, 2, 0]), np.array([0, 2]), np.array([1, 2])
    flow = Flow(problem, *answer, prove(problem, *answer), "simplex")
    close(flow)
    exchangeable(flow)
    cancel_cycles(problem.figures, problem.customer, flow.quantity.copy())
    least_cost(limited, least_cost(problem))
    exchange.resume(problem, problem, flow.quantity, flow.depot_price)


def _solve_all() -> None:
    """One small problem, each way that there is at the time."""
    problem, limited = _examples()
    flow = least_cost(limited, least_cost(problem))
    close(flow)
    exchangeable(nearest(flow, flow.quantity))
    # compiled when it is imported, so not before
    from engine.network import simplex

    prove(problem, *simplex.solve(problem, flow.depot_price, flow.quantity))
    if not only_simplex.is_set():
        exchange.resume(problem, problem, flow.quantity, flow.depot_price)


def _examples() -> tuple[Problem, Problem]:
    """A problem without limits, and the same with limits that do not bind."""
    problem = Problem.dense([2, 1], [1, 2], [[1, 2], [3, 5]])
    none = np.zeros(4, dtype=np.int64)
    limits = {"at_least": none, "at_most": none + 9}
    return problem, Problem(
        problem.supply, problem.demand, problem.start, problem.depot, problem.cost, **limits
    )


def _compile_apart() -> subprocess.Popen[bytes] | None:
    """Starts a process that leaves the code in the cache folder; None if it lies there already.

    Should it fail, nothing is lost: the code is then compiled here.
    """
    if any(code_folder().rglob("exchange.solve_sample*.nbi")) or not sys.executable:
        return None
    try:
        return subprocess.Popen(
            [sys.executable, "-c", "from engine.network.compiling import compile_rest; compile_rest()"],
            env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
    except OSError:
        return None
