"""Worked examples of textbooks and of other projects' tests: their published optima, to the last digit.

`worked_examples.json` names the source of each, and whether its text was read or is remembered ("from
memory"). Networks with through nodes were brought into the form of a transportation problem, as Orden
(1956) does with a buffer at each node, and as Wagner (1959) does with a customer for each arc.
"""

from __future__ import annotations

import json
from dataclasses import replace
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from engine.exact import places_needed, to_decimal, to_integer
from engine.network import UNLIMITED, Contradiction, Problem, exchange, least_cost, prove, simplex

HERE = Path(__file__).parent
EXAMPLES = json.loads((HERE / "worked_examples.json").read_text(), parse_float=Decimal)
COSTS = [example for example in EXAMPLES if "cost" in example]
TIMES = [example for example in EXAMPLES if "time" in example]


def name(example: dict[str, Any]) -> str:
    return str(example["id"])


def problem_of(example: dict[str, Any], places: int) -> Problem:
    """The example in integers; a stand-in for what is missing, at its published cost, or for what is left."""
    supply, demand = list(example["supply"]), list(example["demand"])
    matrix = [list(line) for line in example["cost"]]
    missing = sum(demand) - sum(supply)
    if missing > 0:
        supply.append(missing)
        matrix.append(list(example.get("unmet_cost", [0] * len(demand))))
    if missing < 0:
        demand.append(-missing)
        for line in matrix:
            line.append(0)
    capacity, lower = example.get("capacity"), example.get("lower")
    start, depot, cost, at_least, at_most = [0], [], [], [], []
    for j in range(len(demand)):
        for i in range(len(supply)):
            if matrix[i][j] is None:
                continue
            given = capacity is not None and i < len(capacity) and j < len(capacity[i])
            limit = capacity[i][j] if given else None
            depot.append(i)
            cost.append(to_integer(Decimal(matrix[i][j]), places))
            at_most.append(UNLIMITED if limit is None else limit)
            at_least.append((lower[i][j] or 0) if given and lower is not None else 0)
        start.append(len(depot))
    return Problem(*map(np.array, (supply, demand, start, depot, cost, at_least, at_most)))


def places_of(example: dict[str, Any]) -> int:
    """Decimal places that the example's costs need."""
    return max(places_needed(Decimal(c)) for line in example["cost"] for c in line if c is not None)


@pytest.mark.parametrize("example", COSTS, ids=name)
def test_costs_the_published_optimum(example: dict[str, Any]) -> None:
    places = places_of(example)
    problem = problem_of(example, places)
    published = Decimal(example["published_optimum"]) - Decimal(example.get("cost_offset", 0))
    assert to_decimal(least_cost(problem).cost, places) == published
    nothing = np.zeros(problem.depots, dtype=np.int64)
    for solve in (exchange.solve, simplex.solve):
        assert to_decimal(prove(problem, *solve(problem, nothing, None)).cost, places) == published


@pytest.mark.parametrize("example", TIMES, ids=name)
def test_the_slowest_lane_is_the_published_one(example: dict[str, Any]) -> None:
    """Not a cost: the shortest time within which every used lane can lie, so that a flow still exists."""
    times = np.array(example["time"])

    def possible(longest: int) -> bool:
        limits = np.where(longest < times.T, 0, UNLIMITED).reshape(-1)
        dense = Problem.dense(example["supply"], example["demand"], times)
        try:
            least_cost(replace(dense, at_most=limits))
        except Contradiction:
            return False
        return True

    assert min(filter(possible, np.unique(times).tolist())) == example["published_optimum"]
