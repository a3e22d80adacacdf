"""The proof refuses every flow and every set of prices that is not what it claims to be."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.exact import TooLarge
from engine.network import Contradiction, NotProved, Problem, least_cost, prove
from engine.network.proof import add_products
from tests.network.cases import problems

PROBLEM = Problem(
    supply=np.array([3, 2]),
    demand=np.array([4, 1]),
    start=np.array([0, 2, 4]),
    depot=np.array([0, 1, 0, 1]),
    cost=np.array([5, 6, 7, 9]),
    at_least=np.array([0, 1, 0, 0]),
    at_most=np.array([9, 9, 9, 0]),
)
QUANTITY, DEPOTS, CUSTOMERS = np.array([2, 2, 1, 0]), np.array([0, 1]), np.array([5, 7])


def test_a_flow_by_hand_is_proved() -> None:
    """2 x 5 + 2 x 6 + 1 x 7 = 29; from the prices 2 x 1 + 4 x 5 + 1 x 7 = 29."""
    proof = prove(PROBLEM, QUANTITY, DEPOTS, CUSTOMERS)
    assert (proof.cost, proof.lower_bound, proof.gap, proof.exact, proof.rows) == (29, 29, 0, True, 4)


@pytest.mark.parametrize(
    ("quantity", "depots", "customers", "sentence"),
    [
        ([3, 1, 0, 1], [0, 1], [5, 7], r"Row 3 \(depot 1\) sends 1, more than its upper limit"),
        ([4, 0, 0, 1], [0, 1], [5, 7], r"Row 1 \(depot 1\) sends 0, less than its lower limit"),
        ([2, 1, 1, 0], [0, 1], [5, 7], "Customer 0 receives 3, its demand is 4"),
        ([2, 3, 1, 0], [0, 1], [5, 7], "Customer 0 receives 5, its demand is 4"),
        ([3, 1, 1, 0], [0, 1], [5, 7], "Depot 0 sends 4, its supply is 3"),
        ([2, 2, 1, 0], [0, 0], [5, 7], "Row 1 .* too dear"),
        ([2, 2, 1, 0], [0, 1], [6, 7], "Row 0 .* more of it would be cheaper"),
    ],
)
def test_what_is_wrong_is_named(
    quantity: list[int], depots: list[int], customers: list[int], sentence: str
) -> None:
    with pytest.raises(NotProved, match=sentence):
        prove(PROBLEM, np.array(quantity), np.array(depots), np.array(customers))


@settings(max_examples=300, deadline=None)
@given(problems(), st.integers(0, 10**6), st.sampled_from([-1, 1]))
def test_one_unit_elsewhere_is_noticed(problem: Problem, place: int, by: int) -> None:
    try:
        flow = least_cost(problem)
    except Contradiction:
        return
    if problem.rows:
        quantity = flow.quantity.copy()
        quantity[place % problem.rows] += by
        with pytest.raises(NotProved):
            prove(problem, quantity, flow.depot_price, flow.customer_price)


@given(st.lists(st.tuples(st.integers(-(2**61), 2**61), st.integers(-(2**61), 2**61)), max_size=30))
def test_sums_of_products_do_not_wrap(pairs: list[tuple[int, int]]) -> None:
    words = np.zeros(4, dtype=np.int64)
    for a, b in pairs:
        add_products(words, np.array([a]), np.array([b]))
    value = sum(int(word) << (31 * place) for place, word in enumerate(words))
    assert value == sum(a * b for a, b in pairs)


def test_shapes_and_sizes_are_checked() -> None:
    with pytest.raises(ValueError, match="quantity"):
        prove(PROBLEM, QUANTITY[:3], DEPOTS, CUSTOMERS)
    with pytest.raises(ValueError, match="depot_price"):
        prove(PROBLEM, QUANTITY, DEPOTS.astype(np.int32), CUSTOMERS)
    with pytest.raises(TooLarge):
        prove(PROBLEM, QUANTITY, np.array([0, 2**62]), CUSTOMERS)
