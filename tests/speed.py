"""How fast the core is beside general codes: `python -m tests.speed [SIZE ...]`; nothing here is asserted.

Each code solves the same figures in a process of its own, from the matrix or the list of rates to the
answer; for the engine that is the construction of the problem, the solve and the proof. Times are medians
in milliseconds, `passes` is the engine's time in plain passes over the rates (numpy's sum), memory is the
peak of the whole process. A code that takes longer than the limit is shown as such.
"""

# ruff: noqa: T201
from __future__ import annotations

import argparse
import json
import re
import resource
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from engine.network import Problem, least_cost, prepare
from tests.loads import speed_loads

DENSE = ("5x60", "20x500", "50x2000", "100x10000", "20x100000", "300x3000", "500x5000", "1000x1000")
SPARSE = ("2500x2500:6", "500x200000:5", "1000x1000000:10")
CHANGED = ("100x10000!",)
CODES = ("engine", "pot", "ortools", "highs", "networkx")
LIMITS = {"highs": 100_000, "networkx": 10_000, "pot": 2_000_000}
"""Most rates for which a code is tried at all."""


def main() -> None:
    """Prints the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument(
        "sizes",
        nargs="*",
        help="DEPOTSxCUSTOMERS, :N for N lanes a customer, ! to re-plan one changed order; screen; loads",
    )
    parser.add_argument("--codes", default=",".join(CODES), help="which codes, separated by commas")
    parser.add_argument("--rates", choices=["road", "random"], default="road", help="how rates are made")
    parser.add_argument("--limit", type=int, default=120, help="seconds after which a code is stopped")
    parser.add_argument("--repeat", type=int, default=5, help="how often each is timed")
    parser.add_argument(
        "--clock", choices=["wall", "cpu"], default="wall", help="cpu: on a machine that others use too"
    )
    parser.add_argument("--child", help=argparse.SUPPRESS)
    options = parser.parse_args()
    if options.sizes == ["screen"]:
        subprocess.run([sys.executable, "-m", "tests.speed_screen"], check=True)
        return
    if options.child:
        print(json.dumps(timed(options.child, options.sizes[0], options)))
        return
    if options.sizes == ["loads"]:
        speed_loads.run(options.limit, options.clock)
        return
    prepare()
    print(f"{'size':>16} {'code':>9} {'ms':>10} {'ratio':>7} {'passes':>7} {'MB':>6}  cost")
    for size in options.sizes or (*DENSE, *SPARSE, *CHANGED):
        own = None
        for code in options.codes.split(","):
            answer = in_a_process(code, size, options)
            if answer is None:
                continue
            own = own or answer.get("ms")
            print(line(size, code, answer, own), flush=True)


def line(size: str, code: str, answer: dict[str, Any], own: float | None) -> str:
    """One line of the table; the ratio is to the engine."""
    if "ms" not in answer:
        return f"{size:>16} {code:>9} {answer['said']:>10}"
    ratio = f"{answer['ms'] / own:.1f}" if own else ""
    passes = f"{answer['ms'] / answer['pass']:.0f}" if code == "engine" else ""
    return (
        f"{size:>16} {code:>9} {answer['ms']:>10.2f} {ratio:>7} {passes:>7} {answer['mb']:>6.0f}"
        f"  {answer['cost']} {answer['said']}"
    )


def in_a_process(code: str, size: str, options: argparse.Namespace) -> dict[str, Any] | None:
    """What one code needs for one size; None where it is not tried."""
    depots, customers, lanes, changed = read_size(size)
    if customers * lanes > LIMITS.get(code, 10**9) or (changed and code != "engine"):
        return None
    if code == "pot" and lanes < depots:
        return None
    command = [sys.executable, "-m", "tests.speed", "--child", code, size]
    command += ["--rates", options.rates, "--repeat", str(options.repeat), "--clock", options.clock]
    try:
        done = subprocess.run(command, capture_output=True, text=True, timeout=options.limit, check=True)
    except subprocess.TimeoutExpired:
        return {"said": f"> {options.limit} s"}
    answer: dict[str, Any] = json.loads(done.stdout.splitlines()[-1])
    return answer


def read_size(size: str) -> tuple[int, int, int, bool]:
    """Depots, customers, lanes per customer, and whether one order is changed."""
    changed = size.endswith("!")
    shape, _, lanes = size.rstrip("!").partition(":")
    depots, customers = (int(part) for part in shape.split("x"))
    return depots, customers, int(lanes) if lanes else depots, changed


class Figures:
    """One instance: `matrix` where every depot serves every customer, rows otherwise."""

    def __init__(self, size: str, rates: str) -> None:
        depots, customers, lanes, _ = read_size(size)
        generator = np.random.default_rng(1941)
        self.demand = generator.integers(1, 100, customers)
        weight = generator.random(depots) + 0.5
        total = int(self.demand.sum())
        self.matrix = self.start = self.depot = self.cost = self.at_most = None
        where = (
            np.sort(generator.random((customers, depots)).argpartition(lanes - 1)[:, :lanes])
            if (lanes < depots and depots * customers <= 10**8)
            else np.sort(
                (np.arange(lanes) * (depots // lanes) + generator.integers(0, depots, (customers, 1)))
                % depots
            )
        )
        if lanes == depots:
            where = np.broadcast_to(np.arange(depots), (customers, depots))
        if rates == "random":
            cost = generator.integers(1, 1000, where.shape)
        else:
            spot, site = generator.random((depots, 2)) * 1000, generator.random((customers, 1, 2)) * 1000
            distance = np.sqrt(((spot[where] - site) ** 2).sum(axis=2))
            cost = (200 + 8 * distance * generator.uniform(0.9, 1.1, distance.shape)).astype(np.int64)
        if lanes == depots:
            self.matrix = np.ascontiguousarray(cost.T)
            self.supply = (weight / weight.sum() * total).astype(np.int64)
            self.supply[0] += total - self.supply.sum()
            return
        # supplies that some flow fits: each customer takes its order from a few of its lanes
        chosen = where[np.arange(customers), generator.integers(0, lanes, customers)]
        self.supply = np.bincount(chosen, self.demand, depots).astype(np.int64)
        self.start = np.arange(customers + 1) * lanes
        self.depot, self.cost = where.reshape(-1), cost.reshape(-1)
        if depots == customers:
            self.at_most = generator.integers(1, 60, len(self.cost))
            own = self.start[:-1] + (where == chosen[:, None]).argmax(axis=1)
            self.at_most[own] = self.demand

    def problem(self) -> Problem:
        """As the engine takes it."""
        if self.matrix is not None:
            return Problem.dense(self.supply, self.demand, self.matrix)
        return Problem(self.supply, self.demand, self.start, self.depot, self.cost, None, self.at_most)

    def arcs(self) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
        """Tail, head, most and cost of each lane, customers numbered behind the depots."""
        problem = self.problem()
        head = problem.customer + problem.depots
        most = np.minimum(problem.supply[problem.depot], problem.demand[problem.customer])
        if problem.at_most is not None:
            most = np.minimum(most, problem.at_most)
        return problem.depot, head, most, problem.cost


def timed(code: str, size: str, options: argparse.Namespace) -> dict[str, Any]:
    """The median over several runs, fewer if they are long."""
    figures = Figures(size, options.rates)
    clock = time.perf_counter if options.clock == "wall" else time.process_time
    values = figures.matrix if figures.matrix is not None else figures.cost
    passes = median([seconds(values.sum, clock) for _ in range(99)])
    solve = {
        "engine": by_engine,
        "pot": by_pot,
        "ortools": by_ortools,
        "highs": by_highs,
        "networkx": by_networkx,
    }[code](figures, size)
    times: list[float] = []
    said: list[Any] = []
    while len(times) < options.repeat and (len(times) < 1 or sum(times) < 20):
        times.append(seconds(lambda: said.append(solve()), clock))
    cost, remark = said[-1]
    return {
        "ms": 1000 * median(times),
        "pass": 1000 * passes,
        "mb": peak(),
        "cost": cost,
        "said": remark,
    }


def seconds(run: Callable[[], Any], clock: Callable[[], float]) -> float:
    """How long one run takes."""
    begin = clock()
    run()
    return clock() - begin


def median(times: list[float]) -> float:
    """The middle one."""
    return sorted(times)[len(times) // 2]


def peak() -> float:
    """Peak memory of this process in MB; Linux says it for this programme alone, others with its parent's."""
    status = Path("/proc/self/status")
    if status.exists():
        found = re.search(r"VmHWM:\s+(\d+)", status.read_text())
        if found:
            return int(found[1]) / 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


Run = Callable[[], tuple[int, str]]


def by_engine(figures: Figures, size: str) -> Run:
    """The engine, compiled beforehand: problem, solve, proof; or re-planning after one changed order."""
    prepare()
    if not read_size(size)[3]:

        def plan() -> tuple[int, str]:
            flow = least_cost(figures.problem())
            return flow.cost, flow.method

        return plan
    before = least_cost(figures.problem())
    supply, demand = before.problem.supply.copy(), before.problem.demand.copy()
    demand[len(demand) // 2] += 40
    supply[1] += 40

    def again() -> tuple[int, str]:
        flow = least_cost(before.problem.with_quantities(supply, demand), before)
        return flow.cost, flow.method + ", again"

    return again


def by_pot(figures: Figures, size: str) -> Run:
    """POT's network simplex on doubles."""
    import ot

    def run() -> tuple[int, str]:
        plan = ot.emd(
            figures.supply.astype(float), figures.demand.astype(float), figures.matrix, numItermax=10**9
        )
        return round(float((plan * figures.matrix).sum())), ""

    return run


def by_ortools(figures: Figures, size: str) -> Run:
    """OR-Tools' cost-scaling push-relabel."""
    from ortools.graph.python.min_cost_flow import SimpleMinCostFlow

    arcs = figures.arcs()

    def run() -> tuple[int, str]:
        flow = SimpleMinCostFlow()
        flow.add_arcs_with_capacity_and_unit_cost(*arcs)
        balance = np.concatenate([figures.supply, -figures.demand])
        flow.set_nodes_supplies(np.arange(len(balance)), balance)
        status = flow.solve()
        return int(flow.optimal_cost()), "" if status == flow.OPTIMAL else str(status)

    return run


def by_highs(figures: Figures, size: str) -> Run:
    """HiGHS on the linear programme, through scipy."""
    from scipy.optimize import linprog
    from scipy.sparse import csr_array

    tail, head, most, cost = figures.arcs()

    def run() -> tuple[int, str]:
        rows = len(cost)
        nodes = len(figures.supply) + len(figures.demand)
        place = np.concatenate([np.arange(rows)] * 2)
        sums = csr_array((np.ones(2 * rows), (np.concatenate([tail, head]), place)), shape=(nodes, rows))
        right = np.concatenate([figures.supply, figures.demand])
        bounds = np.stack([np.zeros(rows), most], axis=1)
        answer = linprog(cost, A_eq=sums, b_eq=right, bounds=bounds, method="highs")
        return round(answer.fun), ""

    return run


def by_networkx(figures: Figures, size: str) -> Run:
    """networkx's network simplex, in Python."""
    import networkx

    tail, head, most, cost = (part.tolist() for part in figures.arcs())

    def run() -> tuple[int, str]:
        graph = networkx.DiGraph()
        for node, quantity in enumerate(figures.supply.tolist()):
            graph.add_node(node, demand=-quantity)
        for node, quantity in enumerate(figures.demand.tolist()):
            graph.add_node(len(figures.supply) + node, demand=quantity)
        for a, b, capacity, weight in zip(tail, head, most, cost, strict=True):
            graph.add_edge(a, b, capacity=capacity, weight=weight)
        return networkx.network_simplex(graph)[0], ""

    return run


if __name__ == "__main__":
    main()
