"""Even shares against a slow twin: HiGHS finds the largest fraction, then whom it stops, and so on."""

from fractions import Fraction

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import linprog

from engine.network import UNLIMITED
from engine.planning.even_share import Sharing, rounded, shares


def sharing(
    available: list[int],
    ordered: list[int],
    rows: list[tuple[int, int, int, int]],
) -> Sharing:
    """From rows of (customer, depot, at least, at most), in any order."""
    rows = sorted(rows)
    start = np.searchsorted([row[0] for row in rows], np.arange(len(ordered) + 1))
    columns = [np.array([row[part] for row in rows], dtype=np.int64) for part in (1, 2, 3)]
    return Sharing(np.array(available), np.array(ordered), start.astype(np.int64), *columns)


@st.composite
def sharings(draw: st.DrawFn) -> Sharing:
    available = draw(st.lists(st.integers(0, 15), min_size=1, max_size=3))
    ordered = draw(st.lists(st.integers(0, 10), min_size=1, max_size=5))
    rows = []
    left, wanted = available.copy(), ordered.copy()
    for j in range(len(ordered)):
        for i in range(len(available)):
            if draw(st.integers(0, 3)):
                most = draw(st.just(UNLIMITED) | st.integers(0, 8))
                least = min(draw(st.sampled_from([0] * 6 + [1, 3])), most, left[i], wanted[j])
                left[i], wanted[j] = left[i] - least, wanted[j] - least
                rows.append((j, i, least, most))
    return sharing(available, ordered, rows)


def slow_twin(case: Sharing) -> list[Fraction]:
    """Max-min fair quantities by linear programmes in floats, turned into small fractions."""
    rows, customers = len(case.depot), len(case.ordered)
    base, right = [], []
    for i in range(len(case.available)):
        base.append(np.append((case.depot == i).astype(float), 0))
        right.append(case.available[i])
    for j in range(customers):
        base.append(np.append((case.customer == j).astype(float), 0))
        right.append(case.ordered[j])
    limits = [(a, None if b == UNLIMITED else b) for a, b in zip(case.at_least, case.at_most, strict=True)]
    rising = {j for j in range(customers) if case.ordered[j] > 0}
    settled: dict[int, float] = {}
    while rising:
        needs = [np.append(-(case.customer == j).astype(float), case.ordered[j]) for j in sorted(rising)]
        kept = [np.append(-(case.customer == j).astype(float), 0) for j in settled]
        matrix = np.array([*base, *needs, *kept])
        bounds_right = [*right, *[0] * len(needs), *[-q + 1e-10 for q in settled.values()]]
        best = linprog(np.append(np.zeros(rows), -1), matrix, bounds_right, bounds=[*limits, (0, 1)])
        fraction = -best.fun
        if fraction > 1 - 1e-9:
            stopped = set(rising)
        else:
            stopped = set()
            for j in rising:
                at = max(0.0, fraction - 1e-10)
                more = linprog(needs[0] * 0 + np.append(-(case.customer == j).astype(float), 0), matrix,
                               bounds_right, bounds=[*limits, (at, at)])  # fmt: skip
                if -more.fun <= fraction * case.ordered[j] + 1e-6:
                    stopped.add(j)
        for j in stopped:
            settled[j] = fraction * case.ordered[j]
        rising -= stopped
    forced = [sum(case.at_least[case.customer == j].tolist()) for j in range(customers)]
    return [
        max(Fraction(forced[j]), Fraction(settled.get(j, 0)).limit_denominator(200)) for j in range(customers)
    ]


@settings(max_examples=300, deadline=None)
@given(sharings(), st.integers(1, 4))
def test_shares_are_max_min_fair_and_rounding_keeps_the_total(case: Sharing, step: int) -> None:
    everybody = [list(range(len(case.ordered)))]
    exact = shares(case, everybody)
    assert exact == slow_twin(case)
    whole = rounded(case, exact, step, everybody)
    assert sum(whole.tolist()) == sum(exact)
    assert all(abs(q - e) < step for q, e in zip(whole.tolist(), exact, strict=True))


def test_a_shortage_is_shared_by_order_size() -> None:
    """60 for orders of 50, 30 and 20: three fifths each, 30, 18 and 12."""
    case = sharing([60], [50, 30, 20], [(j, 0, 0, UNLIMITED) for j in range(3)])
    assert shares(case, [[0, 1, 2]]) == [30, 18, 12]


def test_who_cannot_have_more_leaves_the_rest_to_the_others() -> None:
    """Customer 0 gets 5 of 50 by its lane's limit; the other 55 cover 30 + 20 in full."""
    case = sharing([60], [50, 30, 20], [(0, 0, 0, 5), (1, 0, 0, UNLIMITED), (2, 0, 0, UNLIMITED)])
    assert shares(case, [[0, 1, 2]]) == [5, 30, 20]


def test_remainders_go_by_largest_fraction_then_by_sheet_order() -> None:
    """10 for orders of 5, 5 and 5: 3 1/3 each; down to 3, the one left goes to the first of equals.

    10 for orders of 4, 5 and 6: 2 2/3, 3 1/3 and 4; down to 2, 3 and 4, the one left to the first.
    """
    rows = [(j, 0, 0, UNLIMITED) for j in range(3)]
    equal = sharing([10], [5, 5, 5], rows)
    assert rounded(equal, shares(equal, [[0, 1, 2]]), 1, [[0, 1, 2]]).tolist() == [4, 3, 3]
    unequal = sharing([10], [5, 4, 6], rows)
    assert shares(unequal, [[0, 1, 2]]) == [Fraction(10, 3), Fraction(8, 3), 4]
    assert rounded(unequal, shares(unequal, [[0, 1, 2]]), 1, [[0, 1, 2]]).tolist() == [3, 3, 4]


def test_a_step_of_five_is_kept_as_far_as_the_total_allows() -> None:
    """33 for orders of 20, 20 and 20: 11 each; down to 10, and the 3 left go to the first."""
    case = sharing([33], [20, 20, 20], [(j, 0, 0, UNLIMITED) for j in range(3)])
    assert rounded(case, shares(case, [[0, 1, 2]]), 5, [[0, 1, 2]]).tolist() == [13, 10, 10]


def test_the_first_class_is_served_before_the_second() -> None:
    case = sharing([60], [50, 30, 20], [(j, 0, 0, UNLIMITED) for j in range(3)])
    assert shares(case, [[0], [1, 2]]) == [50, 6, 4]


def test_what_is_forced_counts_into_the_share() -> None:
    """9 for orders of 10, 10 and 10, 5 of them forced to the first: 4 are left, 2 each."""
    rows = [(0, 0, 5, UNLIMITED), (1, 0, 0, UNLIMITED), (2, 0, 0, UNLIMITED)]
    assert shares(sharing([9], [10, 10, 10], rows), [[0, 1, 2]]) == [5, 2, 2]
