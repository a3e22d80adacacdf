"""The frontier of cost against emissions, against brute force on tiny weeks and HiGHS on larger ones."""

from dataclasses import replace
from decimal import Decimal
from fractions import Fraction
from itertools import pairwise, product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import linprog

from engine.compare import frontier as module
from engine.compare.frontier import Emissions, Frontier, NoTradeOff, frontier, sent_at
from engine.compare.stress_ground import NeedsWholeLoads, ground_of
from engine.exact import TooLarge, total_of
from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow
from engine.planning.model import NO_RATE
from engine.planning.plan import Plan
from engine.planning.planner import NotPlannable, plan_week
from engine.planning.prices import limits_of
from engine.week import Week

D = Decimal
FACTOR = Emissions(D("0.05"), "the desk's own figure")


@st.composite
def tiny_weeks(draw: st.DrawFn) -> Week:
    """Two depots, two customers, up to two hauliers, a few units: few enough to try every plan."""
    depots = tuple(
        Depot(
            f"D{i}",
            D(stock := draw(st.integers(0, 4))),
            D(draw(st.integers(0, stock))),
            D(draw(st.integers(-1, 2))),
        )
        for i in range(2)
    )
    customers = tuple(
        Customer(f"C{j}", (Order(D(draw(st.integers(0, 3)))),), D(draw(st.integers(0, 9)))) for j in range(2)
    )
    rows = tuple(
        RateRow(
            f"D{i}", f"C{j}", D(draw(st.integers(-1, 6))), haulier=f"H{h}", km=D(draw(st.integers(0, 9))),
            at_most=D(draw(st.integers(1, 3))) if draw(st.integers(0, 3)) == 0 else None,
        )
        for i in range(2)
        for j in range(2)
        for h in range(1 if i == j else 2)
    )  # fmt: skip
    return Week.of(depots, customers, rows)


def every_plan(plan: Plan) -> list[tuple[Fraction, Fraction]]:
    """Cost and kilometres of each way to give all customers what the plan gives them, in whole units."""
    week = plan.week
    rows = list(week.rates)
    short = {one.customer: one.quantity for one in plan.short}
    kept_now = sum(int(one.must_move) for one in plan.unsent)
    found = []
    most = [
        int(row.at_most if row.at_most is not None else week.customers[row.customer].ordered) for row in rows
    ]
    for sent in product(*(range(limit + 1) for limit in most)):
        got = dict.fromkeys(week.customers, 0)
        left = {name: int(depot.available) for name, depot in week.depots.items()}
        for row, quantity in zip(rows, sent, strict=True):
            got[row.customer] += quantity
            left[row.depot] -= quantity
        if min(left.values()) < 0 or any(
            quantity != week.customers[name].ordered - short.get(name, D(0)) for name, quantity in got.items()
        ):
            continue
        must = sum(
            max(0, left[name] - int(d.available - (d.must_move or 0))) for name, d in week.depots.items()
        )
        if must != kept_now:
            continue
        cost = sum(Fraction(row.rate) * q for row, q in zip(rows, sent, strict=True))
        cost += sum(Fraction(d.charge_if_unsent or 0) * left[name] for name, d in week.depots.items())
        cost += sum(Fraction(one.cost) for one in plan.short)
        found.append((cost, sum(Fraction(row.km or 0) * q for row, q in zip(rows, sent, strict=True))))
    return found


def corners(points: list[tuple[Fraction, Fraction]]) -> list[tuple[Fraction, Fraction]]:
    """Extreme efficient points, straight from the definition: each is alone the best for some weights."""
    chosen = set()
    distinct = sorted(set(points))
    slopes = {Fraction(a[0] - b[0], b[1] - a[1]) for a in distinct for b in distinct if a[1] != b[1]}
    usual = sorted(slope for slope in slopes if slope > 0)
    between = [(a + b) / 2 for a, b in pairwise(usual)]
    for slope in [Fraction(1, 10**6), *between, Fraction(10**6)]:
        best = min(p[0] + slope * p[1] for p in distinct)
        chosen.add(next(p for p in distinct if p[0] + slope * p[1] == best))
    return sorted(chosen)


@settings(deadline=None, max_examples=60)
@given(tiny_weeks())
def test_breakpoints_are_those_of_all_plans(week: Week) -> None:
    plan = plan_week(week)
    found = frontier(plan, FACTOR)
    told = [(Fraction(point.cost), Fraction(point.tonne_km)) for point in found.points]
    assert told == corners(every_plan(plan))
    assert found.complete
    assert found.points[0].cost == plan.total_cost
    consistent(found)


def consistent(found: Frontier) -> None:
    """What follows from the meaning of a frontier, whatever the week."""
    costs, emissions = [p.cost for p in found.points], [p.emissions for p in found.points]
    assert costs == sorted(set(costs))
    assert emissions == sorted(set(emissions), reverse=True)
    slopes = [p.per_kg for p in found.points[1:]]
    assert all(a is not None and b is not None and a < b for a, b in pairwise(slopes))
    for before, point in pairwise(found.points):
        saved = Fraction(before.emissions) - Fraction(point.emissions)
        assert point.per_kg == (Fraction(point.cost) - Fraction(before.cost)) / saved
    assert found.today.cost == found.points[0].cost
    assert found.today.emissions >= found.points[0].emissions


def drawn_week(depots: int, customers: int, seed: int, stock: int = 130) -> Week:
    chance = np.random.default_rng(seed)
    ordered = chance.integers(1, 40, customers)
    available = chance.integers(50, 150, depots)
    available = available * (ordered.sum() * stock // 100) // available.sum() + 1
    rows = [
        RateRow(
            f"D{i}", f"C{j}", D(int(chance.integers(100, 2000))).scaleb(-2), haulier=f"H{h}",
            km=D(int(chance.integers(50, 3000))).scaleb(-1),
        )
        for j in range(customers) for i in range(depots) for h in range(2)
    ]  # fmt: skip
    return Week.of(
        tuple(Depot(f"D{i}", D(int(q)), D(int(q) // 2)) for i, q in enumerate(available)),
        tuple(Customer(f"C{j}", (Order(D(int(q))),)) for j, q in enumerate(ordered)),
        tuple(rows),
    )


@pytest.mark.parametrize(("seed", "stock"), [(1, 130), (2, 100), (3, 80)])
def test_no_weights_find_a_plan_below_the_frontier(seed: int, stock: int) -> None:
    """HiGHS, an independent solver, minimises cost + slope x kilometres of the same service."""
    plan = plan_week(drawn_week(4, 12, seed, stock))
    found = frontier(plan, FACTOR)
    consistent(found)
    assert len(found.points) > 8
    model, problem = plan.model, plan.model.problem
    lower, upper = (limits.astype(float) for limits in limits_of(model))
    short, quantity = model.short_rows, plan.flow.quantity
    lower[short] = upper[short] = quantity[short]
    must = model.must_row[model.must_row != NO_RATE]
    equal = np.zeros((problem.depots + problem.customers, problem.rows))
    equal[problem.depot, np.arange(problem.rows)] = 1
    equal[problem.depots + problem.customer, np.arange(problem.rows)] = 1
    kept = np.zeros(problem.rows)
    kept[must] = 1
    equal = np.vstack([equal, kept])
    right = np.concatenate([problem.supply, problem.demand, [quantity[must].sum()]])
    money = model.money / 10**model.money_places
    column = plan.week.rates.flat.decimals["km"]
    km = np.where(model.rate_row >= 0, column.values[model.rate_row] / 10**column.places, 0)
    unit = 10**model.quantity_places
    for slope in (0.001, 0.01, 0.03, 0.06, 0.1, 0.3, 1, 5):
        best = linprog(
            money + slope * km,
            A_eq=equal,
            b_eq=right,
            bounds=np.stack([lower, upper], axis=1),
            method="highs",
        )
        ours = min(float(p.cost) + slope * float(p.tonne_km) for p in found.points)
        assert ours == pytest.approx(best.fun / unit, rel=1e-9)


def test_a_hand_worked_frontier() -> None:
    """Ash wants 10. Road: 2 EUR, 100 km; rail's road end: 5 EUR, 20 km, at most 6; barge: 9 EUR, 10 km.

    All road: 20 EUR, 1,000 t-km. Six by rail: 4 x 2 + 6 x 5 = 38, 400 + 120 = 520. The rest by barge:
    6 x 5 + 4 x 9 = 66, 120 + 40 = 160. All by barge: 90 EUR, 100 t-km. At 0.1 kg a t-km that is 100, 52, 16
    and 10 kg, and each kg less costs 18/48, then 28/36, then 24/6 EUR.
    """
    rows = (
        RateRow("North", "Ash", D(2), haulier="Road", km=D(100)),
        RateRow("North", "Ash", D(5), haulier="Rail", km=D(20), at_most=D(6)),
        RateRow("North", "Ash", D(9), haulier="Barge", km=D(10)),
        RateRow("North", "Ash", D(1), haulier="Drone", at_most=D(0)),
        RateRow("North", "Ash", D(30), haulier="Mule"),
    )
    week = Week.of((Depot("North", D(12)),), (Customer("Ash", (Order(D(10)),)),), rows)
    found = frontier(plan_week(week), Emissions(D("0.1"), "an invented figure"))
    assert [(p.cost, p.emissions, p.per_kg) for p in found.points] == [
        (D(20), D(100), None), (D(38), D(52), Fraction(18, 48)), (D(66), D(16), Fraction(28, 36)),
        (D(90), D(10), Fraction(4)),
    ]  # fmt: skip
    assert sent_at(found, found.points[1]) == {
        RateKey("North", "Ash", "Road"): D(4), RateKey("North", "Ash", "Rail"): D(6)
    }  # fmt: skip
    assert found.left_out == 1
    pallets = replace(week, rules=replace(week.rules, unit="pallet"))
    heavy = frontier(plan_week(pallets), Emissions(D("0.1"), "an invented figure", D("0.5")))
    assert heavy.points[0].emissions == D(50)
    with pytest.raises(NoTradeOff, match="how many tonnes one pallet weighs"):
        frontier(plan_week(pallets), FACTOR)


def test_a_stop_keeps_points_of_the_frontier() -> None:
    plan = plan_week(drawn_week(4, 12, 1))
    whole = {(p.cost, p.emissions) for p in frontier(plan, FACTOR).points}
    told: list[int] = []
    part = frontier(plan, FACTOR, told.append, stop=lambda: told[-1] >= 5)
    assert not part.complete
    assert {(p.cost, p.emissions) for p in part.points} <= whole
    assert 3 <= len(part.points) <= 5


def test_what_is_missing_is_said() -> None:
    week = drawn_week(2, 3, 1)
    bare = Week.of(
        tuple(week.depots.values()),
        tuple(week.customers.values()),
        tuple(replace(row, km=None) for row in week.rates),
    )
    with pytest.raises(NoTradeOff, match="no Km"):
        frontier(plan_week(bare), FACTOR)
    first = next(iter(plan_week(week).shipments)).key
    from engine.changes import Alter

    with pytest.raises(NoTradeOff, match=f"{first.depot} to {first.customer}"):
        frontier(plan_week(week.apply(Alter("rate", first, "km", None))), FACTOR)
    for wrong in (lambda: Emissions(D(0), "x"), lambda: Emissions(D(1), " ")):
        with pytest.raises(NoTradeOff, match=r"factor"):
            wrong()


def test_holds_stay() -> None:
    week = drawn_week(3, 5, 4)
    key = week.rates.key_of(0)
    held = replace(week, holds={key: Hold(D(1), "promised")})
    try:
        found = frontier(plan_week(held), FACTOR)
    except NotPlannable:
        pytest.fail("the hold is possible")
    assert all(sent_at(found, point)[key] == 1 for point in found.points)
    assert total_of(sent_at(found, found.points[-1]).values()) == total_of(
        one.quantity for one in found.plan.shipments
    )


def test_slopes_with_too_many_digits_are_rounded_and_no_point_is_lost(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """With less room for whole numbers the first slopes do not fit; the last, narrower ones do."""
    plan = plan_week(drawn_week(4, 12, 1))
    whole = [(p.cost, p.emissions) for p in frontier(plan, FACTOR).points]
    for bits in range(60, 20, -1):
        monkeypatch.setattr(module, "LARGEST", 2**bits)
        try:
            found = [(p.cost, p.emissions) for p in frontier(plan, FACTOR).points]
        except TooLarge:
            break
        assert found == whole
    assert bits < 40


def test_a_week_of_whole_loads_is_refused() -> None:
    plan = plan_week(drawn_week(2, 3, 1))
    week = plan.week
    rows = tuple(replace(row, per="load") for row in week.rates)
    loads = replace(
        plan, week=Week.of(tuple(week.depots.values()), tuple(week.customers.values()), rows, week.rules)
    )
    with pytest.raises(NoTradeOff, match="whole loads"):
        frontier(loads, FACTOR)
    with pytest.raises(NeedsWholeLoads, match="whole loads"):
        ground_of(loads)
