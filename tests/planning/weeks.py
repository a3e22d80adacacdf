"""Small random weeks, and their best outcome found by HiGHS, aim by aim."""

from dataclasses import dataclass
from decimal import Decimal

import numpy as np
from hypothesis import strategies as st
from scipy.optimize import linprog

from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow, Rules
from engine.planning.plan import Plan
from engine.week import Week

D = Decimal


@dataclass(frozen=True)
class Outcome:
    """What the aims come to, in order, all whole numbers here."""

    missing: tuple[int, ...]
    must_move_kept: int
    total_cost: int


@st.composite
def weeks(draw: st.DrawFn) -> Week:
    """Weeks in whole numbers with every figure that the aims depend on; ties and zeros are common."""
    amount = st.integers(0, 12)
    small = st.integers(0, 4)
    depots = []
    for i in range(draw(st.integers(1, 3))):
        available = draw(amount)
        must_move = draw(st.none() | st.integers(0, available))
        charge = draw(st.none() | st.integers(-3, 5))
        depots.append(Depot(f"D{i}", D(available), _maybe(must_move), _maybe(charge)))
    customers = [
        Customer(
            f"C{j}",
            tuple(Order(D(draw(amount))) for _ in range(draw(st.integers(1, 2)))),
            charge_if_short=_maybe(draw(st.none() | st.integers(0, 9))),
            priority=draw(st.sampled_from([None, None, "A", "B", "C"])),
            one_depot=draw(st.sampled_from([None, None, None, depots[0].name])),
            may_decline=draw(st.sampled_from([False, False, True])),
        )
        for j in range(draw(st.integers(1, 4)))
    ]
    rows = []
    for depot in depots:
        for customer in customers:
            for haulier in range(draw(st.sampled_from([0, 1, 1, 1, 2]))):
                rows.append(
                    RateRow(
                        depot.name,
                        customer.name,
                        D(draw(st.integers(-2, 9))),
                        haulier=f"H{haulier}",
                        at_most=_maybe(draw(st.none() | amount)),
                        closed=draw(st.sampled_from([False] * 9 + [True])),
                    )
                )
    if not rows:  # a week without any lane is refused before it is planned
        rows.append(RateRow("D0", "C0", D(draw(small)), haulier="H0"))
    holds = {
        RateKey(row.depot, row.customer, row.haulier): Hold(D(quantity), "asked for")
        for row in rows
        if draw(st.integers(0, 9)) == 0 and (quantity := draw(small)) >= 0
    }
    rules = Rules(charge_if_short=_maybe(draw(st.none() | st.integers(0, 5))))
    return Week.of(tuple(depots), tuple(customers), tuple(rows), rules, holds)


def outcome_of(week: Week, plan: Plan) -> Outcome:
    """What a plan comes to."""
    shorts = {one.customer: one.quantity for one in plan.short}
    missing = tuple(
        int(
            sum(
                shorts.get(c.name, D(0))
                for c in week.customers.values()
                if not c.may_decline and (c.priority or "C") == priority
            )
        )
        for priority in ("A", "B", "C")
    )
    return Outcome(missing, int(sum(one.must_move for one in plan.unsent)), int(plan.total_cost))


def _maybe(value: int | None) -> Decimal | None:
    return None if value is None else D(value)


def best_outcome(week: Week) -> Outcome | None:
    """The aims one after the other by linear programming (HiGHS); None where holds contradict."""
    depots, customers = list(week.depots.values()), list(week.customers.values())
    rows = list(week.rates)
    # variables: rows, then short by customer, then free stays and must-move stays by depot
    n, m, k = len(customers), len(depots), len(rows)
    count = k + n + 2 * m
    cost = np.zeros(count)
    bounds: list[tuple[float, float | None]] = []
    equal, right = np.zeros((n + m, count)), np.zeros(n + m)
    for r, row in enumerate(rows):
        cost[r] = float(row.rate)
        only = week.customers[row.customer].one_depot
        shut = row.closed or only not in (None, row.depot)
        most = 0.0 if shut else (None if row.at_most is None else float(row.at_most))
        hold = week.holds.get(RateKey(row.depot, row.customer, row.haulier))
        if hold is not None:
            fixed = float(hold.quantity)
            if most is not None and fixed > most:
                return None
            bounds.append((fixed, fixed))
        else:
            bounds.append((0.0, most))
        equal[list(week.customers).index(row.customer), r] = 1
        equal[n + list(week.depots).index(row.depot), r] = 1
    for j, customer in enumerate(customers):
        charge = customer.charge_if_short
        charge = week.rules.charge_if_short if charge is None else charge
        cost[k + j] = float(charge or 0)
        bounds.append((0.0, None))
        equal[j, k + j] = 1
        right[j] = float(customer.ordered)
    for i, depot in enumerate(depots):
        right[n + i] = float(depot.available)
        equal[n + i, k + n + i] = equal[n + i, k + n + m + i] = 1
        cost[k + n + i] = cost[k + n + m + i] = float(depot.charge_if_unsent or 0)
    must = [float(depot.must_move or 0) for depot in depots]
    bounds += [(0.0, float(d.available) - must[i]) for i, d in enumerate(depots)]
    bounds += [(0.0, must[i]) for i in range(m)]

    extra, extra_right, reached = [], [], []
    aims = []
    for priority in ("A", "B", "C"):
        aim = np.zeros(count)
        for j, customer in enumerate(customers):
            if not customer.may_decline and (customer.priority or "C") == priority:
                aim[k + j] = 1
        aims.append(aim)
    must_aim = np.zeros(count)
    must_aim[k + n + m :] = 1
    for aim in [*aims, must_aim, cost]:
        found = linprog(
            aim,
            A_eq=np.vstack([equal, *extra]),
            b_eq=np.concatenate([right, extra_right]),
            bounds=bounds,
            method="highs",
        )
        if found.status == 2:
            return None
        value = round(found.fun)
        assert abs(found.fun - value) < 1e-6
        reached.append(value)
        extra.append(aim[None, :])
        extra_right.append(value)
    return Outcome(tuple(reached[:3]), reached[3], reached[4])
