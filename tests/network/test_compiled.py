"""Compiled code: once per kernel, kept in the user's folder, and working where nothing can be written."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import numpy as np

from engine.network import Problem, closure, exchange, least_cost, prepare, proof, restart
from engine.network.solve import only_simplex

PROVE = """
import numpy as np
from engine.network import Problem, prove
from engine.network.compiled import code_folder
problem = Problem.dense([1, 1], [1, 1], [[1, 2], [3, 1]])
proof = prove(problem, np.array([1, 0, 0, 1]), np.array([0, 0]), np.array([1, 1]))
print(proof.cost, code_folder())
"""


def test_no_kernel_compiles_twice() -> None:
    prepare()
    least_cost(Problem.dense(np.array([2], dtype=np.int32), np.array([1, 1]), np.array([[1, 2]])))
    for module in (exchange, proof, restart, closure):
        for found in vars(module).values():
            if hasattr(found, "signatures") and found.targetoptions.get("cache", True):
                assert len(found.signatures) <= 1, found


def proved(environment: dict[str, str]) -> list[str]:
    """Cost and folder, from a new process."""
    done = subprocess.run(
        [sys.executable, "-c", PROVE],
        env=os.environ | environment,
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(__file__).parents[2],
    )
    return done.stdout.split()


def test_code_is_kept_in_the_users_folder(tmp_path: Path) -> None:
    cost, folder = proved({"XDG_CACHE_HOME": str(tmp_path)})
    assert cost == "2"
    assert Path(folder).is_relative_to(tmp_path)
    kept = {path.name: path.stat().st_mtime_ns for path in Path(folder).rglob("*.nb*")}
    assert kept
    proved({"XDG_CACHE_HOME": str(tmp_path)})
    assert {path.name: path.stat().st_mtime_ns for path in Path(folder).rglob("*.nb*")} == kept


def test_without_a_folder_of_the_users_a_temporary_one_serves(tmp_path: Path) -> None:
    """The cache folder lies below a file, so that nobody, not even root, can make it."""
    blocked = tmp_path / "file"
    blocked.write_text("")
    (tmp_path / "temporary").mkdir()
    cost, folder = proved({"XDG_CACHE_HOME": str(blocked), "TMPDIR": str(tmp_path / "temporary")})
    assert cost == "2"
    assert Path(folder).is_relative_to(tmp_path / "temporary")


def test_the_simplex_solves_all_while_the_exchange_is_being_made() -> None:
    problem = Problem.dense([2, 1], [1, 2], [[1, 2], [3, 5]])
    assert least_cost(problem).method == "exchange"
    only_simplex.set()
    try:
        flow = least_cost(problem)
        again = least_cost(problem.with_quantities([3, 1], [2, 2]), flow)
    finally:
        only_simplex.clear()
    assert flow.method == again.method == "simplex"
    assert (flow.cost, again.cost) == (7, 8)


def test_whoever_waits_is_told_once_that_problems_can_be_solved() -> None:
    told: list[int] = []
    prepare(lambda: told.append(1))
    assert told == [1]
    assert not only_simplex.is_set()
