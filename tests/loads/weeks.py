"""Random small weeks with whole vehicles for Hypothesis, every kind of figure mixed."""

from __future__ import annotations

import numpy as np
from hypothesis import strategies as st

from engine.loads import NO_LIMIT, UNLIMITED, LoadProblem


@st.composite
def weeks(draw: st.DrawFn, depots: int = 3, customers: int = 3, most: int = 6) -> LoadProblem:
    """Any week: charges and limits that may matter, stocks that may not reach, lower limits that may clash.

    depots, customers: at most so many; most: the largest order
    """
    depot_count = draw(st.integers(1, depots))
    customer_count = draw(st.integers(1, customers))
    hauliers = draw(st.integers(0, 2))

    def some(low: int, high: int, size: int, chance: int = 1) -> list[int]:
        """Whole numbers, all of them 0 unless this kind of figure is drawn."""
        if draw(st.integers(1, chance)) > 1:
            return [0] * size
        return draw(st.lists(st.integers(low, high), min_size=size, max_size=size))

    def flags(size: int, chance: int) -> list[bool]:
        return [bool(one) for one in some(0, 1, size, chance)]

    start, depot = [0], []
    for _ in range(customer_count):
        depot += draw(st.lists(st.integers(0, depot_count - 1), max_size=3))
        start.append(len(depot))
    rows = len(depot)
    demand = some(0, most, customer_count)
    supply = some(0, most + 2 * customer_count, depot_count)
    must_move = [min(a, b) for a, b in zip(supply, some(0, most, depot_count, 3), strict=True)]
    at_least = some(0, 1, rows, 3)
    at_most = draw(
        st.lists(st.sampled_from([UNLIMITED, UNLIMITED, most, 2, 3]), min_size=rows, max_size=rows)
    )
    limits = st.sampled_from([NO_LIMIT, 1, 2, 3])
    unlimited = [NO_LIMIT] * depot_count
    most_loads = draw(st.lists(limits, min_size=depot_count, max_size=depot_count))
    return LoadProblem.of(
        supply=supply,
        must_move=must_move,
        unsent_cost=some(-3, 4, depot_count, 2),
        opening_charge=some(0, 25, depot_count, 3),
        most_loads=most_loads if draw(st.booleans()) else unlimited,
        demand=demand,
        short_cost=some(0, 30, customer_count),
        rank=some(0, 2, customer_count, 2),
        may_decline=flags(customer_count, 3),
        one_depot=flags(customer_count, 3),
        start=start,
        depot=depot,
        haulier=some(-1, hauliers - 1, rows) if hauliers else [-1] * rows,
        per_unit=some(-2, 9, rows, 2),
        per_load=some(0, 30, rows, 2),
        load_size=some(0, 4, rows, 2),
        trip_minimum=some(0, 20, rows, 3),
        charge_per_use=some(0, 20, rows, 3),
        at_least=at_least,
        at_most=at_most,
        smallest_drop=some(0, 3, rows, 3),
        haulier_most=draw(st.lists(st.sampled_from([NO_LIMIT, 3, 5]), min_size=hauliers, max_size=hauliers)),
    )


def road_week(depots: int, customers: int, seed: int = 1, slack: float = 0.08) -> LoadProblem:
    """Orders of 5 to 120 t in loads of 24 t at a rate per load that grows with distance; stocks a bit more.

    Quantities in hundredths of a tonne, rates in cents.
    """
    generator = np.random.default_rng(seed)
    demand = generator.integers(5, 121, customers) * 100
    spot, site = generator.random((depots, 2)) * 1000, generator.random((customers, 1, 2)) * 1000
    distance = np.sqrt(((spot - site) ** 2).sum(axis=2))
    rate = (8000 + 110 * distance * generator.uniform(0.9, 1.1, distance.shape)).astype(np.int64)
    weight = generator.random(depots) + 0.5
    total = demand.sum() * (1 + slack)
    rows = depots * customers
    return LoadProblem.of(
        supply=(weight / weight.sum() * total).astype(np.int64) // 100 * 100 + 100,
        demand=demand,
        start=np.arange(customers + 1) * depots,
        depot=np.tile(np.arange(depots), customers),
        per_load=(rate * 100).reshape(-1),
        load_size=np.full(rows, 2400),
        short_cost=np.full(customers, 100_000),
    )


def mixed_week(depots: int, customers: int, seed: int = 2) -> LoadProblem:
    """Two hauliers on every lane: loads of 24 t at a rate per load, loads of 26 t by the tonne from 14 t on.

    One customer in ten takes from one depot only, one in five no drop below 6 t; nobody is short.
    """
    plain = road_week(depots, customers, seed)
    generator = np.random.default_rng(seed)
    by_load = np.repeat(plain.per_load, 2)
    by_tonne = np.arange(2 * plain.rows) % 2 == 1
    dearness = generator.uniform(0.95, 1.1, 2 * plain.rows)
    # cents per hundredth of a tonne
    rate = np.maximum((by_load * dearness / 2200).astype(np.int64), 1)
    drops = generator.random(customers) < 0.2
    customer = np.repeat(np.arange(customers), 2 * depots)
    return LoadProblem.of(
        supply=plain.supply,
        demand=plain.demand,
        short_cost=plain.short_cost,
        one_depot=generator.random(customers) < 0.1,
        start=plain.start * 2,
        depot=np.repeat(plain.depot, 2),
        per_load=np.where(by_tonne, 0, by_load),
        per_unit=np.where(by_tonne, rate, 0),
        trip_minimum=np.where(by_tonne, rate * 1400, 0),
        load_size=np.where(by_tonne, 2600, 2400),
        smallest_drop=np.where(drops[customer], np.minimum(600, plain.demand[customer]), 0),
    )
