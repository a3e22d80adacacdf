"""Stress runs beside cold solves, in one run: `python -m tests.speed_stress [depots customers [weeks]]`.

First every depot lost, every plan proved, beside solving each of the same altered problems afresh; then
drawn weeks of 20 x 500 on one and on two processes. Prints what was measured; nothing is asserted, since
machines differ. Processor time is told beside elapsed time, since machines are shared.
"""

import os
import statistics
import sys
import time
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor, wait
from decimal import Decimal
from pathlib import Path

import numpy as np

from engine.compare.stress_cases import AS_IT_IS, depots_lost, drawn
from engine.compare.stress_draws import Draws, Spread
from engine.compare.stress_ground import ground_of, window
from engine.compare.stress_run import processes, ready, stress
from engine.compare.stress_solve import _problem, alter, outcome_of
from engine.network import least_cost
from engine.planning.planner import plan_week
from tests.speed_reasons import dense_week

Say = Callable[[str], None]

TURNS, PARTS = 5, 20


def lose_each_depot(depots: int, customers: int, say: Say = print) -> None:
    plan = plan_week(dense_week(depots, customers))
    ready()
    begun = time.process_time()
    ground = ground_of(plan)
    outcome_of(ground, AS_IT_IS)
    before = time.process_time() - begun
    every = window(ground.model, np.arange(ground.model.problem.rows))
    cold, warm, costs = [], [], []
    for case in depots_lost(plan):  # turn by turn, so that both meet the same machine
        problem = _problem(ground, alter(ground, case), every, None)
        begun = time.process_time()
        fresh = least_cost(problem)
        cold.append(time.process_time() - begun)
        begun = time.process_time()
        outcome = outcome_of(ground, case)
        warm.append(time.process_time() - begun)
        money = int(ground.model.money[fresh.quantity > 0] @ fresh.quantity[fresh.quantity > 0])
        places = ground.model.quantity_places + ground.model.money_places
        costs.append(Decimal(money).scaleb(-places) == outcome.total)
    say(f"{depots} x {customers}, each of {len(cold)} depots lost, every plan proved, processor time:")
    say(f"  once before the first case          {before:8.2f} s")
    for what, taken in (("cold solves of the altered problems", cold), ("the cases", warm)):
        say(f"  {what:35} {sum(taken):8.2f} s, median {1e3 * statistics.median(taken):.1f} ms")
    share, whole = sum(warm) / sum(cold), (before + sum(warm)) / sum(cold)
    say(f"  share {share:.3f}, with what is done once before {whole:.3f}")
    say(f"  equal costs: {sum(costs)} of {len(costs)}")


def spin(seconds: float) -> None:
    """Works for so much processor time: what the machine itself gives to two processes at a time."""
    begun = time.process_time()
    while time.process_time() - begun < seconds:
        pass


def _processor_time(pool: ProcessPoolExecutor) -> list[float]:
    """Seconds that each process of the pool has used so far, as Linux tells it."""
    ticks = os.sysconf("SC_CLK_TCK")
    found = []
    for process in pool._processes.values():
        fields = Path(f"/proc/{process.pid}/stat").read_text().rpartition(")")[2].split()
        found.append((int(fields[11]) + int(fields[12])) / ticks)
    return found


def draw_weeks(count: int, say: Say = print) -> None:
    ground = ground_of(plan_week(dense_week(20, 500)))
    draws = Draws(
        1,
        orders=Spread("triangular", Decimal(-20), Decimal(20)),
        stock=Spread("normal", Decimal(-15), Decimal(5), Decimal(0), Decimal(5)),
        rates=Spread("even", Decimal(-2), Decimal(8)),
    )
    cases = drawn(draws, count)
    told: list[int] = []
    say(f"{count} drawn weeks of 20 x 500, one and two processes in turn:")
    with processes(1) as one, processes(2) as two:
        pools = {1: one, 2: two}
        for workers, pool in pools.items():  # all have started, loaded their code and have the week
            wait([pool.submit(ready) for _ in range(8)])
            stress(ground, cases[: 16 * workers], pool, workers=workers)
        taken: dict[int, list[float]] = {1: [], 2: []}
        spun: dict[int, list[float]] = {1: [], 2: []}
        for _ in range(TURNS):
            for workers, pool in pools.items():
                before, begun = _processor_time(pool), time.perf_counter()
                run = stress(ground, cases, pool, workers=workers, progress=lambda done, _: told.append(done))
                taken[workers].append(time.perf_counter() - begun)
                used = [now - then for now, then in zip(_processor_time(pool), before, strict=True)]
                begun = time.perf_counter()
                list(pool.map(spin, [run.seconds / PARTS] * PARTS))
                spun[workers].append(time.perf_counter() - begun)
                each = ", ".join(f"{seconds:5.2f}" for seconds in used)
                say(
                    f"  on {workers}: {taken[workers][-1]:6.2f} s elapsed; processor time of the cases "
                    f"{run.seconds:5.2f} s, of each process {each} s"
                )
    ratio, machine = (statistics.median(times[1]) / statistics.median(times[2]) for times in (taken, spun))
    say(
        f"  two processes are {ratio:.2f} times as fast as one, where the machine lets two that only count "
        f"be {machine:.2f} times as fast; progress told {len(told)} times"
    )
    done: list[int] = [0]
    with processes(2) as pool:
        run = stress(ground, cases, pool, progress=lambda now, _: done.append(now), stop=lambda: done[-1] > 0)
    say(f"  stopped once something was done: {len(run.outcomes)} cases kept")


if __name__ == "__main__":
    sizes = [int(argument) for argument in sys.argv[1:]] or [100, 10_000]
    lose_each_depot(sizes[0], sizes[1])
    draw_weeks(sizes[2] if len(sizes) > 2 else 1_000)
