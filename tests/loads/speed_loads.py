"""Weeks with whole loads, planned here and by a plain HiGHS model: gaps after the same time, in one run.

Called by `python -m tests.speed loads --limit SECONDS [--clock cpu]`; nothing here is asserted. The plain
model has x <= size * loads on every row and no cut of ours; its plan is checked in integers like our own.
"""

# ruff: noqa: T201
from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np

from engine.loads import LoadProblem, Progress, least_cost_loads, prepare
from engine.loads.compact import compact
from engine.loads.compact import run as run_model
from engine.loads.proof import NotValid, check
from engine.loads.stage import stage_of
from tests.loads.weeks import mixed_week, road_week

Clock = Callable[[], float]


def run(seconds: int, clock: str) -> None:
    """Prints a line per week and code."""
    now = time.monotonic if clock == "wall" else time.process_time
    prepare()
    print(f"{'week':>20} {'code':>8} {'seconds':>8} {'gap %':>9}  cost, proved bound, what else")
    for name, week in (
        ("6x48 loads", road_week(6, 48)),
        ("6x48 mixed", mixed_week(6, 48)),
        ("20x500 loads", road_week(20, 500)),
        ("20x500 mixed", mixed_week(20, 500)),
    ):
        _ours(name, week, seconds, now)
        _plain(name, week, seconds, now)


def _ours(name: str, week: LoadProblem, seconds: int, now: Clock) -> None:
    begin = now()
    first: list[str] = []

    def tell(progress: Progress) -> None:
        gap = 100 * progress.gap / progress.cost
        if len(first) < 1 or (len(first) < 2 and gap <= 1):
            first.append(f"{now() - begin:.1f} s: {gap:.2f} %")

    plan = least_cost_loads(week, progress=tell, should_stop=lambda: now() - begin > seconds)
    extra = f"{plan.ended}; " + ", ".join(first)
    if plan.solver_bound is not None:
        extra += f"; HiGHS claims {plan.solver_bound}"
    _line(name, "engine", now() - begin, (plan.cost, plan.lower_bound), extra)


def _plain(name: str, week: LoadProblem, seconds: int, now: Clock) -> None:
    begin = now()
    everything = np.ones(week.rows, dtype=np.bool_)
    nothing = np.zeros(week.rows, dtype=np.int64)
    stage = stage_of(week, (0,), 1)
    model = compact(stage, everything, nothing, tight=False)
    model.solver.setOptionValue("mip_rel_gap", 0.0)
    found = run_model(model, None, lambda: now() - begin > seconds, 36_000.0)
    if found.quantity is None or found.bound is None:
        print(f"{name:>20} {'plain':>8} {now() - begin:>8.1f} {'no plan':>9}")
        return
    try:
        cost, _ = check(week, found.quantity)
        extra = "proved, in floating point" if found.optimal else "time limit"
    except NotValid as broken:
        cost, extra = 0, f"not valid: {broken}"
    _line(name, "plain", now() - begin, (cost, int(found.bound)), extra)


def _line(name: str, code: str, seconds: float, values: tuple[int, int], extra: str) -> None:
    cost, bound = values
    gap = 100 * (cost - bound) / cost if cost else float("nan")
    print(f"{name:>20} {code:>8} {seconds:>8.1f} {gap:>9.4f}  {cost}, {bound}, {extra}", flush=True)
