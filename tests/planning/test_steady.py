"""Steady plans against every choice of lanes: tiny weeks, all subsets tried, each by linear programming."""

from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from itertools import combinations

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import linprog

from engine.changes import Alter
from engine.figures import Customer, Depot, Gone, Order, RateKey, RateRow
from engine.planning.near import sent_by
from engine.planning.planner import NotPlannable, plan_week
from engine.planning.steady import at_most, holds_for, trade, within, worth
from engine.planning.steady_bound import relaxed
from engine.planning.steady_lanes import lanes_against
from engine.week import Week
from tests.planning.weeks import weeks

D = Decimal
Lane = tuple[str, str, str | None]


@dataclass(frozen=True)
class Naive:
    """A week as plain lists, for a program that knows nothing of the engine's models."""

    week: Week
    sent: dict[Lane, float]

    def lanes(self) -> list[Lane]:
        rows = [(row.depot, row.customer, row.haulier) for row in self.week.rates]
        return list(dict.fromkeys([*rows, *self.sent]))

    def cost(self, free: Iterable[Lane], aims: list[float] | None) -> list[float] | None:
        """The aims and cost in order (as in `weeks.best_outcome`), all lanes fixed that are not free."""
        week, free = self.week, set(free)
        depots, customers, rows = list(week.depots.values()), list(week.customers.values()), list(week.rates)
        n, m, k = len(customers), len(depots), len(rows)
        count = k + n + 2 * m
        cost, bounds = np.zeros(count), []
        equal, right = [], []
        for j, customer in enumerate(customers):
            line = np.zeros(count)
            line[[r for r, row in enumerate(rows) if row.customer == customer.name]] = 1
            line[k + j] = 1
            equal.append(line)
            right.append(float(customer.ordered))
        for i, depot in enumerate(depots):
            line = np.zeros(count)
            line[[r for r, row in enumerate(rows) if row.depot == depot.name]] = 1
            line[[k + n + i, k + n + m + i]] = 1
            equal.append(line)
            right.append(float(depot.available))
        for r, row in enumerate(rows):
            cost[r] = float(row.rate)
            only = week.customers[row.customer].one_depot
            shut = row.closed or only not in (None, row.depot)
            most = 0.0 if shut else (None if row.at_most is None else float(row.at_most))
            hold = week.holds.get(RateKey(row.depot, row.customer, row.haulier))
            bounds.append((0.0, most) if hold is None else (float(hold.quantity),) * 2)
        for j, customer in enumerate(customers):
            charge = customer.charge_if_short
            cost[k + j] = float((week.rules.charge_if_short if charge is None else charge) or 0)
            bounds.append((0.0, None))
        for i, depot in enumerate(depots):
            cost[[k + n + i, k + n + m + i]] = float(depot.charge_if_unsent or 0)
        must = [float(depot.must_move or 0) for depot in depots]
        bounds += [(0.0, float(d.available) - must[i]) for i, d in enumerate(depots)]
        bounds += [(0.0, must[i]) for i in range(m)]
        for lane in self.lanes():
            if lane not in free:
                line = np.zeros(count)
                line[[r for r, row in enumerate(rows) if (row.depot, row.customer, row.haulier) == lane]] = 1
                if not line.any() and self.sent.get(lane, 0):
                    return None
                equal.append(line)
                right.append(self.sent.get(lane, 0.0))
        goals = []
        for priority in ("A", "B", "C"):
            goal = np.zeros(count)
            for j, customer in enumerate(customers):
                if not customer.may_decline and (customer.priority or "C") == priority:
                    goal[k + j] = 1
            goals.append(goal)
        kept = np.zeros(count)
        kept[k + n + m :] = 1
        reached: list[float] = []
        for place, goal in enumerate([*goals, kept, cost]):
            found = linprog(goal, A_eq=np.array(equal), b_eq=np.array(right), bounds=bounds, method="highs")
            if found.status == 2:
                return None
            reached.append(round(found.fun, 6))
            if aims is not None and place < 4 and reached[place] > aims[place]:
                return None
            equal.append(goal)
            right.append(reached[place])
        return reached


def curve(naive: Naive) -> dict[int, float]:
    """The least cost of plans that change at most N lanes, by trying every set of lanes."""
    best = naive.cost(naive.lanes(), None)
    assert best is not None
    found: dict[int, float] = {}
    for count in range(len(naive.lanes()) + 1):
        for free in combinations(naive.lanes(), count):
            got = naive.cost(free, best)
            if got is not None:
                found[count] = min(found.get(count, np.inf), got[4])
        if found.get(count) == best[4]:
            break
    return found


@st.composite
def edited(draw: st.DrawFn) -> tuple[Week, Week]:
    """A week, and the same with a few figures altered; few lanes, since every subset of them is tried."""
    week = draw(weeks())
    assume(len(week.rates) <= 6)
    after = week
    for _ in range(draw(st.integers(1, 3))):
        if draw(st.booleans()):
            name = draw(st.sampled_from(list(week.customers)))
            after = after.apply(Alter("customer", name, "ordered", D(draw(st.integers(0, 12)))))
        else:
            name = draw(st.sampled_from(list(week.depots)))
            least = after.depots[name].must_move or 0
            after = after.apply(Alter("depot", name, "available", D(draw(st.integers(int(least), 14)))))
    return week, after


@settings(max_examples=25, deadline=None)
@given(edited())
def test_every_point_is_the_least_of_all_choices_of_lanes(pair: tuple[Week, Week]) -> None:
    before, after = pair
    try:
        issued, plan = plan_week(before), plan_week(after)
    except NotPlannable:
        return
    sent = sent_by(issued)
    plan = plan_week(after, near=sent)
    found = trade(plan, sent, seconds=30)
    expected = curve(Naive(after, {tuple(key[:3]): float(q) for key, q in sent.items()}))
    assert found.closed
    assert found.points[0].lanes == found.fewest == min(expected)
    least = float(plan.total_cost)
    for count, cost in expected.items():
        point = at_most(found, count)
        assert point is not None
        assert abs(float(point.extra) + least - cost) < 1e-6, count
    lanes = found.lanes
    for price in (0, 1, 3, 10):
        bound = relaxed(lanes, price)
        for count, cost in expected.items():
            if bound is not None:
                assert bound.at_least(count - lanes.unavoidable) <= cost - least + 1e-6
    for point in found.points:
        holds = holds_for(found, point, "as issued")
        again = plan if holds is None else plan_week(after.apply(holds), near=sent)
        assert again.total_cost == plan.total_cost + point.extra
        carried: dict[Lane, Decimal] = {}
        for shipment in again.shipments:
            carried[shipment.key[:3]] = carried.get(shipment.key[:3], D(0)) + shipment.quantity
        was = {key[:3]: quantity for key, quantity in sent.items()}
        assert sum(carried.get(x, 0) != was.get(x, 0) for x in {*carried, *was}) <= point.lanes


def moved_week() -> tuple[Week, dict[RateKey, Decimal]]:
    """Issued: Quarry serves Ash and Birch, Harbour serves Cole. Then Harbour's rates to Ash and Birch fall.

    Moving Ash (10 t) changes two lanes and saves 10 * 3 = 30; moving Birch (10 t) saves 10 * 1 = 10.
    """
    issued = {
        RateKey("Quarry", "Ash"): D(10),
        RateKey("Quarry", "Birch"): D(10),
        RateKey("Harbour", "Cole"): D(10),
    }
    week = Week.of(
        (Depot("Quarry", D(40)), Depot("Harbour", D(40))),
        tuple(Customer(name, (Order(D(10)),)) for name in ("Ash", "Birch", "Cole")),
        (
            RateRow("Quarry", "Ash", D(9)),
            RateRow("Harbour", "Ash", D(6)),
            RateRow("Quarry", "Birch", D(9)),
            RateRow("Harbour", "Birch", D(8)),
            RateRow("Harbour", "Cole", D(5)),
        ),
    )
    return week, issued


def test_a_small_week_by_hand() -> None:
    week, issued = moved_week()
    found = trade(plan_week(week, near=issued), issued)
    assert [(p.lanes, p.extra) for p in found.points] == [(0, 40), (2, 10), (4, 0)]
    assert found.saving == 40
    assert found.closed
    assert within(found, D(9)).lanes == 4
    assert within(found, D(10)).lanes == 2
    assert within(found, D(40)).lanes == 0
    assert at_most(found, 3) is found.points[1]
    # a lane that moves Ash saves 15, one that moves Birch 5
    assert [worth(found, D(each)).lanes for each in (4, 5, 6, 14, 15, 16)] == [4, 2, 2, 2, 0, 0]


def test_holds_keep_what_stays_and_nothing_else() -> None:
    week, issued = moved_week()
    plan = plan_week(week, near=issued)
    found = trade(plan, issued)
    change = holds_for(found, found.points[1], "as issued")
    after = plan_week(week.apply(change), near=issued)  # type: ignore[arg-type]
    assert set(after.week.holds) == {RateKey("Quarry", "Birch")}
    assert after.total_cost == plan.total_cost + 10
    assert holds_for(found, found.points[-1], "as issued") is None


def test_what_has_gone_counts_as_the_whole_week() -> None:
    """4 t of Birch's 10 have left as issued: keeping the lane is still no change, and the hold says 10."""
    week, issued = moved_week()
    week = Week.of(
        tuple(week.depots.values()), tuple(week.customers.values()), tuple(week.rates), week.rules, {},
        (Gone("Load 1", "Quarry", "Birch", D(4), D(9)),),
    )  # fmt: skip
    plan = plan_week(week, near=issued)
    found = trade(plan, issued)
    assert [(p.lanes, p.extra) for p in found.points] == [(0, 36), (2, 6), (4, 0)]
    change = holds_for(found, found.points[1], "as issued")
    after = plan_week(week.apply(change), near=issued)  # type: ignore[arg-type]
    assert after.week.holds[RateKey("Quarry", "Birch")].quantity == 10
    assert after.total_cost == plan.total_cost + 6


def test_a_lane_that_is_gone_from_the_rates_is_changed_in_every_plan() -> None:
    week, issued = moved_week()
    issued = {**issued, RateKey("Wharf", "Cole"): D("0.125"), RateKey("Harbour", "Cole"): D("9.875")}
    found = trade(plan_week(week, near=issued), issued)
    assert found.lanes.elsewhere == (("Wharf", "Cole", None),)
    assert found.points[0].lanes == 2


def test_two_rates_of_one_haulier_are_one_lane() -> None:
    week = Week.of(
        (Depot("Quarry", D(40)),),
        (Customer("Ash", (Order(D(10)),)),),
        (RateRow("Quarry", "Ash", D(9), at_most=D(6)), RateRow("Quarry", "Ash", D(5), at_most=D(6))),
    )
    sent = {RateKey("Quarry", "Ash", None, 1): D(6), RateKey("Quarry", "Ash", None, 2): D(4)}
    found = trade(plan_week(week, near=sent), sent)
    assert [(p.lanes, p.extra) for p in found.points] == [(0, 0)]
    assert lanes_against(plan_week(week), sent).earlier.tolist() == [10]


@pytest.mark.parametrize("spend", [D(-1), D(0)])
def test_spending_nothing_is_the_plan_of_least_cost(spend: Decimal) -> None:
    week, issued = moved_week()
    assert within(trade(plan_week(week, near=issued), issued), spend).lanes == 4
