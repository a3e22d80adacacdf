"""The reasons of a week beside solving it, in one run: `python -m tests.speed_reasons [depots customers]`.

Prints medians of processor time; nothing is asserted, since machines differ.
"""

import statistics
import sys
import time
from collections.abc import Callable
from decimal import Decimal

import numpy as np

from engine.exact import DecimalColumn
from engine.figures import Customer, Depot, Order
from engine.network import Problem, least_cost
from engine.network.closure import close
from engine.planning.plan import Plan
from engine.planning.planner import plan_week
from engine.rates import Rates, RateTable
from engine.reasons.curve import curve
from engine.reasons.options import nearest_to_paying
from engine.reasons.pairs import pairs
from engine.reasons.rates import rate_intervals
from engine.reasons.values import values
from engine.week import Week


def dense_week(depots: int, customers: int, seed: int = 1) -> Week:
    """Every depot serves every customer; some more stock than orders; rates with two decimals."""
    chance = np.random.default_rng(seed)
    ordered = chance.integers(1, 100, customers)
    available = chance.integers(50, 150, depots)
    available = available * (ordered.sum() * 11 // 10) // available.sum() + 1
    names = tuple(f"Depot {i}" for i in range(depots)), tuple(f"Customer {j}" for j in range(customers))
    table = RateTable(
        *names,
        (),
        np.tile(np.arange(depots, dtype=np.int32), customers),
        np.repeat(np.arange(customers, dtype=np.int32), depots),
        np.full(depots * customers, -1, dtype=np.int32),
        rate=DecimalColumn(chance.integers(100, 10_000, depots * customers), 2),
        per_load=np.zeros(depots * customers, dtype=bool),
        closed=np.zeros(depots * customers, dtype=bool),
    )
    return Week.of(
        tuple(Depot(name, Decimal(int(q))) for name, q in zip(names[0], available, strict=True)),
        tuple(Customer(name, (Order(Decimal(int(q))),)) for name, q in zip(names[1], ordered, strict=True)),
        Rates(table),
    )


def seconds(work: Callable[[], object], times: int = 5) -> float:
    """The median time of some runs, after one that does not count."""
    work()
    taken = []
    for _ in range(times):
        begun = time.process_time()
        work()
        taken.append(time.process_time() - begun)
    return statistics.median(taken)


def measure(depots: int, customers: int, say: Callable[[str], None] = print) -> None:
    plan: Plan = plan_week(dense_week(depots, customers))
    name, order = plan.model.customers[0], plan.week.customers[plan.model.customers[0]].ordered
    first = plan.model.depots[0]
    stock = plan.week.depots[first].available
    problem = plan.model.problem
    limits = problem.at_least, problem.at_most

    def solve_cold() -> None:
        least_cost(
            Problem(problem.supply, problem.demand, problem.start, problem.depot, problem.cost, *limits)
        )

    solve = seconds(solve_cold)
    tasks: list[tuple[str, Callable[[], object]]] = [
        ("chains between depots", lambda: close(plan.flow)),
        ("values of a unit, two-sided", lambda: values(plan)),
        ("rate intervals", lambda: rate_intervals(plan)),
        ("values and rate intervals", lambda: (values(plan), rate_intervals(plan))),
        ("values and how far they hold", lambda: values(plan, holds=True)),
        ("the 50 lanes nearest to paying", lambda: nearest_to_paying(plan, 50)),
        ("pairs", lambda: pairs(plan)),
        ("curve of an order, 0 to double", lambda: curve(plan, name, 0 * order, 2 * order)),
        (
            "curve of a stock, 2 % down and up",
            lambda: curve(plan, first, stock * 98 // 100, stock * 102 // 100),
        ),
    ]
    rows = plan.flow.problem.rows
    say(f"{depots} x {customers}, {rows} rows; a cold solve {solve * 1000:.1f} ms, with building and proof")
    for what, work in tasks:
        taken = seconds(work, 3)
        say(f"  {what:36} {taken * 1000:9.1f} ms  {taken / solve:6.2f} cold solves")


if __name__ == "__main__":
    sizes = [int(argument) for argument in sys.argv[1:]] or [100, 10_000]
    measure(sizes[0], sizes[1])
