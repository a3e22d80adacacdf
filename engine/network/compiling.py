"""Compiles all kernels beforehand: once after installation, later their code is only loaded."""

from __future__ import annotations

import os
import subprocess
import sys

import numpy as np

from engine.network.alternatives import exchangeable
from engine.network.closure import close
from engine.network.compiled import code_folder
from engine.network.problem import Problem
from engine.network.proof import prove
from engine.network.solve import least_cost
from engine.network.ties import nearest


def prepare() -> None:
    """Compiles all kernels, or loads them from the user's cache folder: some seconds the very first time.

    The first solve would do the same. Other threads may go on meanwhile, and may solve: they wait. The
    two ways to solve are compiled at the same time, one of them by a process of its own.
    """
    other = _compile_simplex_apart()
    supply, demand, cost = np.array([2, 1]), np.array([1, 2]), np.array([[1, 2], [3, 5]])
    problem = Problem.dense(supply, demand, cost)
    limits = np.zeros(4, dtype=np.int64)
    limited = Problem(
        supply, demand, problem.start, problem.depot, problem.cost, at_least=limits, at_most=limits + 9
    )
    flow = least_cost(limited, least_cost(problem))
    close(flow)
    exchangeable(nearest(flow, flow.quantity))
    if other is not None:
        other.wait()
    # compiled when it is imported, so not before
    from engine.network import simplex

    prove(problem, *simplex.solve(problem, flow.depot_price, flow.quantity))


def _compile_simplex_apart() -> subprocess.Popen[bytes] | None:
    """Starts a process that leaves the simplex's code in the cache folder; None if it lies there already.

    Should it fail, nothing is lost: the code is then compiled here.
    """
    if any(code_folder().rglob("simplex*.nbi")) or not sys.executable:
        return None
    try:
        return subprocess.Popen(
            [sys.executable, "-c", "import engine.network.simplex"],
            env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
            stdin=subprocess.DEVNULL,
            stdout=subprocess.DEVNULL,
            stderr=subprocess.DEVNULL,
        )
    except OSError:
        return None
