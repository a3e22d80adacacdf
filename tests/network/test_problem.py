"""What a problem refuses, each with a sentence that says where and what."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from engine.exact import TooLarge
from engine.network import UNLIMITED, Problem, least_cost

GOOD: dict[str, Any] = {
    "supply": np.array([3, 2]),
    "demand": np.array([4, 1]),
    "start": np.array([0, 2, 3]),
    "depot": np.array([0, 1, 0]),
    "cost": np.array([5, 6, -7]),
}


@pytest.mark.parametrize(
    ("change", "sentence"),
    [
        ({"supply": np.array([3, 3])}, "supply adds up to 6, demand to 5: they must be equal"),
        ({"supply": np.array([-1, 6])}, r"supply\[0\] is -1"),
        ({"start": np.array([0, 3])}, "start has 2 entries for 2 customers"),
        ({"start": np.array([0, 4, 3])}, "start falls from 4 to 3 after customer 1"),
        ({"start": np.array([1, 2, 3])}, "start runs from 1 to 3"),
        ({"depot": np.array([0, 2, 0])}, r"depot\[1\] is 2, but there are 2 depots"),
        ({"depot": np.array([0, 1])}, "depot has 2 rows, cost has 3"),
        ({"cost": np.array([1.5, 2, 3])}, "cost holds float64 values"),
        ({"cost": np.array([[1, 2, 3]])}, "cost has 2 dimensions"),
        ({"at_least": np.array([0, -1, 0])}, r"at_least\[1\] is -1"),
        ({"at_most": np.array([1, 1])}, "at_most has 2 entries for 3 rows"),
        (
            {"at_least": np.array([0, 2, 0]), "at_most": np.array([9, 1, 9])},
            r"at_least\[1\] is 2 but at_most\[1\] is 1",
        ),
    ],
)
def test_what_does_not_make_sense_is_refused(change: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        Problem(**(GOOD | change))


def test_what_could_wrap_is_refused() -> None:
    with pytest.raises(TooLarge, match="adds up to"):
        Problem(**(GOOD | {"supply": np.array([2**62, 2**62]), "demand": np.array([2**62, 2**62])}))
    with pytest.raises(TooLarge, match=r"cost\[2\]"):
        Problem(**(GOOD | {"cost": np.array([1, 2, -(2**62)])}))
    with pytest.raises(TooLarge, match="holds"):
        Problem(**(GOOD | {"cost": np.array([1, 2, 2**64 - 1], dtype=np.uint64)}))


@pytest.mark.parametrize("kind", [np.int32, np.int64, np.uint16, ">i8"])
def test_any_whole_numbers_will_do(kind: Any) -> None:
    given = {name: values.astype(kind) for name, values in (GOOD | {"cost": np.array([5, 6, 7])}).items()}
    problem = Problem(**given)
    for values in (problem.supply, problem.demand, problem.start, problem.depot, problem.cost):
        assert values.dtype == np.int64
        assert values.flags.writeable
    assert least_cost(problem).cost == 2 * 5 + 2 * 6 + 7


def test_read_only_arrays_and_slices_will_do() -> None:
    cost = np.arange(6)[::2]
    cost.flags.writeable = False
    assert least_cost(Problem(**(GOOD | {"cost": cost}))).cost == 2 * 0 + 2 * 2 + 4


def test_a_matrix_lies_depots_down_and_customers_across() -> None:
    problem = Problem.dense([1, 2], [1, 1, 1], [[1, 2, 3], [4, 5, 6]])
    assert problem.cost.tolist() == [1, 4, 2, 5, 3, 6]
    assert problem.customer.tolist() == [0, 0, 1, 1, 2, 2]
    assert problem.figures.at_most.size == 0
    with pytest.raises(ValueError, match=r"shape \(3, 2\)"):
        Problem.dense([1, 2], [1, 1, 1], [[1, 2], [3, 4], [5, 6]])


def test_no_limit_is_a_limit_too() -> None:
    limited = Problem(**(GOOD | {"at_most": np.full(3, UNLIMITED), "at_least": np.zeros(3, dtype=np.int64)}))
    assert least_cost(limited).cost == least_cost(Problem(**GOOD)).cost


def test_the_same_rows_with_other_quantities() -> None:
    problem = Problem.dense([3, 4], [5, 2], [[1, 2], [3, 4]])
    other = problem.with_quantities([3, 5], [6, 2])
    assert other.cost is problem.cost
    assert other.look is problem.look
    assert other.figures.demand.tolist() == [6, 2]
    assert problem.figures.demand.tolist() == [5, 2]
    for supply, demand, sentence in (
        ([3, 5], [5, 2], "must be equal"),
        ([3, 4, 0], [5, 2], "there were 2"),
        ([-1, 8], [5, 2], "negative"),
    ):
        with pytest.raises(ValueError, match=sentence):
            problem.with_quantities(supply, demand)
