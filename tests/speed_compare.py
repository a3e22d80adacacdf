"""What comparisons cost beside one plan: a bridge, an average over all orders, a usual plan.

    python -m tests.speed_compare [DEPOTS CUSTOMERS]

Processor time, each the middle of three runs; trust the ratios.
"""

import statistics
import sys
import time
from collections.abc import Callable
from dataclasses import replace
from decimal import Decimal
from types import MappingProxyType

from engine.compare.bridge import Side, bridge
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.planning.planner import plan_week
from tests.records.making import wide_week


def middle(work: Callable[[], object], runs: int = 3) -> float:
    """Seconds of processor time that the work takes."""
    took = []
    for _ in range(runs):
        begun = time.process_time()
        work()
        took.append(time.process_time() - begun)
    return statistics.median(took)


def main(depots: int, customers: int) -> None:
    first, second = wide_week(depots, customers, 1), wide_week(depots, customers, 2)
    lost = next(iter(second.depots.values()))
    stock = {**second.depots, lost.name: replace(lost, available=Decimal(0))}
    rules = replace(second.rules, fuel_surcharge=Decimal("7.5"))
    second = replace(second, depots=MappingProxyType(stock), rules=rules)
    plans = [plan_week(week) for week in (first, second)]
    sides = Side("first", first, plans[0]), Side("second", second, plans[1])
    one = middle(lambda: plan_week(second))
    print(f"{depots} x {customers}: one plan {one:.3f} s")  # noqa: T201
    usual = usual_plan(second, Rule.CHEAPEST)
    for what, work in (
        ("a bridge of five effects", lambda: bridge(*sides)),
        ("its average over all orders, 32 weeks", lambda: bridge(*sides, average=True)),
        ("the usual plan", lambda: usual_plan(second, Rule.CHEAPEST)),
        ("the saving at equal service", lambda: saving(plans[1], usual.costs)),
    ):
        if "average" in what and customers > 1000:
            continue
        took = middle(work)
        print(f"  {what}: {took:.3f} s, {took / one:.1f} plans")  # noqa: T201


if __name__ == "__main__":
    main(*(int(argument) for argument in sys.argv[1:3] or (20, 500)))
