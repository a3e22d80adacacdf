"""Published instances where using or opening something costs once, and step costs worked by hand."""

import json
from pathlib import Path

import numpy as np
import pytest

from engine.loads import LoadProblem, NoPlan, least_cost_loads
from engine.loads.cost import loads_on, row_costs
from engine.loads.proof import NotValid, check

PUBLISHED = json.loads((Path(__file__).parents[1] / "published" / "fixed_charge.json").read_text())


def dense(supply: list[int], demand: list[int], cost: list[list[int]], **figures: object) -> LoadProblem:
    """Every depot serves every customer; `cost` has a row per depot."""
    depots, customers = len(supply), len(demand)
    return LoadProblem.of(
        supply=supply,
        demand=demand,
        start=np.arange(customers + 1) * depots,
        depot=np.tile(np.arange(depots), customers),
        per_unit=np.array(cost).T.reshape(-1),
        **figures,
    )


@pytest.mark.parametrize("instance", PUBLISHED, ids=lambda instance: instance["id"])
def test_published_optimum(instance: dict[str, object]) -> None:
    """Sources and provenance are in the file."""
    week = dense(
        instance["supply"],  # type: ignore[arg-type]
        instance["demand"],  # type: ignore[arg-type]
        instance["cost"],  # type: ignore[arg-type]
        opening_charge=instance["origin_fixed"],
    )
    plan = least_cost_loads(week)
    assert plan.cost == instance["published_optimum"]
    assert plan.proved


def test_a_load_and_a_bit_costs_two_loads() -> None:
    """30 t in loads of 24 t at 400 a load: two loads, 800; with a second haulier at 150 for 8 t: 550."""
    one = LoadProblem.of(supply=[50], demand=[30], start=[0, 1], depot=[0], per_load=[400], load_size=[24])
    assert least_cost_loads(one).cost == 800
    two = LoadProblem.of(
        supply=[50], demand=[30], start=[0, 2], depot=[0, 0], per_load=[400, 150], load_size=[24, 8]
    )
    plan = least_cost_loads(two)
    assert plan.cost == 550
    assert plan.quantity.tolist() in ([24, 6], [23, 7], [22, 8])
    assert plan.loads.tolist() == [1, 1]


def test_trip_minimum_is_per_load() -> None:
    """At 5 a tonne and at least 100 a load of 24 t: 24 t cost 120, 4 t cost 100, 28 t cost 220."""
    week = LoadProblem.of(
        supply=[99], demand=[28], start=[0, 1], depot=[0], per_unit=[5], load_size=[24], trip_minimum=[100]
    )
    costs = [int(row_costs(week, np.array([x]))[0]) for x in (0, 4, 20, 21, 24, 25, 28, 48)]
    assert costs == [0, 100, 100, 105, 120, 220, 220, 240]
    assert least_cost_loads(week).cost == 220


def test_charge_per_use_is_once() -> None:
    """Rows at 3 and at 2 a unit, the second with 10 for its use: 8 by the first, 12 by the second."""
    for demand, cost in ((8, 24), (10, 30), (12, 34)):
        week = LoadProblem.of(
            supply=[99], demand=[demand], start=[0, 2], depot=[0, 0], per_unit=[3, 2], charge_per_use=[0, 10]
        )
        assert least_cost_loads(week).cost == cost


def test_smallest_drop_is_nothing_or_at_least_this() -> None:
    """5 left at the cheap depot, 8 ordered, drops of 4 or more: 4 + 4, not 5 + 3; drops of 5: all 8 dear."""
    for drop, cost in ((0, 5 * 1 + 3 * 9), (4, 4 * 1 + 4 * 9), (5, 8 * 9)):
        week = LoadProblem.of(
            supply=[5, 99],
            demand=[8],
            start=[0, 2],
            depot=[0, 1],
            per_unit=[1, 9],
            smallest_drop=[drop, drop],
        )
        assert least_cost_loads(week).cost == cost


def test_whole_quantities_are_a_network() -> None:
    """Stocks and orders in whole loads of 4 at a rate per load: solved as a network, and said so."""
    week = LoadProblem.of(
        supply=[8, 8],
        demand=[4, 12],
        start=[0, 2, 4],
        depot=[0, 1, 0, 1],
        per_load=[5, 7, 6, 3],
        load_size=[4, 4, 4, 4],
    )
    plan = least_cost_loads(week)
    assert plan.how == "network"
    assert plan.cost == 5 + 6 + 2 * 3
    assert plan.gap == 0
    assert plan.loads.tolist() == [1, 0, 1, 2]


def test_who_is_short_goes_by_rank_and_then_by_charge() -> None:
    """10 for 6 + 6 + 6 of ranks 1, 0, 0: the first gets none, the cheaper of the others is short of 2."""
    week = LoadProblem.of(
        supply=[10],
        demand=[6, 6, 6],
        rank=[1, 0, 0],
        short_cost=[90, 5, 7],
        start=[0, 1, 2, 3],
        depot=[0, 0, 0],
        per_load=[10, 10, 10],
        load_size=[4, 4, 4],
    )
    plan = least_cost_loads(week)
    assert [(aim.name, aim.rank, aim.value, aim.proved) for aim in plan.aims] == [
        ("short", 0, 2, True),
        ("short", 1, 6, True),
    ]
    assert plan.short.tolist() == [6, 2, 0]


@pytest.mark.parametrize(
    ("figures", "what"),
    [
        ({"at_least": [9]}, "customer"),
        ({"at_least": [4], "supply": [3]}, "depot"),
        ({"at_least": [5], "load_size": [2], "most_loads": [2]}, "depot"),
        ({"at_least": [5], "haulier": [0], "haulier_most": [4]}, "haulier"),
        ({"at_least": [2], "at_most": [3], "smallest_drop": [4]}, "row"),
    ],
)
def test_limits_that_cannot_be_kept_are_named(figures: dict[str, list[int]], what: str) -> None:
    week = LoadProblem.of(**{"supply": [20], "demand": [8], "start": [0, 1], "depot": [0]} | figures)
    with pytest.raises(NoPlan) as refused:
        least_cost_loads(week)
    assert (refused.value.what, refused.value.index, refused.value.rows) == (what, 0, (0,))


@pytest.mark.parametrize(
    ("figures", "quantity", "said"),
    [
        ({}, [4, 5], "receives 9"),
        ({"supply": [3, 9]}, [4, 0], "Depot 0 sends 4"),
        ({"load_size": [2, 0], "most_loads": [1, -1]}, [3, 0], "sends 2 loads"),
        ({"smallest_drop": [3, 3]}, [2, 0], "smallest drop"),
        ({"one_depot": [True]}, [2, 2], "one depot"),
        ({"at_most": [1, 9]}, [2, 0], "limits"),
        ({"haulier": [0, -1], "haulier_most": [1]}, [2, 0], "Haulier 0"),
        ({}, [-1, 3], "limits"),
    ],
)
def test_the_check_refuses(figures: dict[str, list[int]], quantity: list[int], said: str) -> None:
    week = LoadProblem.of(**{"supply": [9, 9], "demand": [8], "start": [0, 2], "depot": [0, 1]} | figures)
    with pytest.raises(NotValid, match=said):
        check(week, np.array(quantity))


def test_loads_are_counted_per_row() -> None:
    week = LoadProblem.of(supply=[99], demand=[99], start=[0, 3], depot=[0, 0, 0], load_size=[24, 24, 0])
    assert loads_on(week, np.array([24, 25, 70])).tolist() == [1, 2, 1]


def test_costs_too_large_for_weights_are_still_solved() -> None:
    """Rates so large that the aims do not fit one network solve: the search does without it."""
    rate = 10**15
    week = LoadProblem.of(
        supply=[9, 9],
        must_move=[0, 4],
        demand=[4, 4, 4],
        rank=[0, 1, 2],
        start=[0, 2, 4, 6],
        depot=[0, 1] * 3,
        per_unit=[rate, 2 * rate] * 3,
        charge_per_use=[rate, 0] * 3,
    )
    plan = least_cost_loads(week, time_limit=20)
    assert (plan.short == 0).all()
    assert plan.cost == (8 + 2 + 8) * rate
    assert plan.proved
