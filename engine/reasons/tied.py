"""How much the cheapest chains can carry: a maximum flow over everything that is tied with the cheapest.

One path's narrowest row is not the answer: beside it there may be others of the same cost. Rows on some
shortest path are those whose cost equals the difference of the distances at their ends; the most that
goes over these is how far a value holds (Ford & Fulkerson 1956; the primal-dual method).
"""

from dataclasses import dataclass

import numpy as np

from engine.network.closure import NO_WAY
from engine.network.problem import UNLIMITED
from engine.planning.model import Integers
from engine.reasons.ground import Ground
from engine.reasons.kernels import MANY, Ties, find_tied, least_dearly, most_cheaply, most_for_each, most_over


@dataclass(frozen=True, eq=False)
class Tied:
    """The rows on shortest paths to or from one place.

    rows:         (ties,) which rows of the problem they are
    ties:         the same as kernels take them
    more:         (ties,) how much more each can carry; less: how much less
    """

    rows: Integers
    ties: Ties
    more: Integers
    less: Integers


def tied_from(ground: Ground, depot_distance: Integers, source: int | None = None) -> Tied:
    """Rows on shortest paths that lead from a place: (depots,) how far each depot is from it.

    source: the customer it is, if it is one.
    """
    customer_distance, _ = brought_more(ground, depot_distance)
    if source is not None:
        customer_distance[source] = 0
    return _tied(ground, depot_distance, customer_distance)


def tied_to(ground: Ground, depot_distance: Integers, target: int | None = None) -> Tied:
    """Rows on shortest paths that lead to a place: (depots,) how far it is from each depot.

    target: the customer it is, if it is one.
    """
    customer_distance, _ = brought_less(ground, depot_distance)
    if target is not None:
        customer_distance[target] = 0
    return _tied(ground, _turned(depot_distance), _turned(customer_distance))


def brought_more(ground: Ground, depot_distance: Integers) -> tuple[Integers, Integers]:
    """(customers,) what one more at each costs if one more at each depot costs so much, and by which row."""
    cost, by = (np.empty(ground.problem.customers, dtype=np.int64) for _ in range(2))
    most_cheaply(ground.rows, np.ascontiguousarray(depot_distance), cost, by)
    return cost, by


def brought_less(ground: Ground, depot_distance: Integers) -> tuple[Integers, Integers]:
    """(customers,) what one less at each costs if one less at each depot costs so much, and by which row."""
    cost, by = (np.empty(ground.problem.customers, dtype=np.int64) for _ in range(2))
    least_dearly(ground.rows, np.ascontiguousarray(depot_distance), cost, by)
    return cost, by


def _turned(distance: Integers) -> Integers:
    return np.where(distance < NO_WAY, -distance, NO_WAY)


def _tied(ground: Ground, depot_distance: Integers, customer_distance: Integers) -> Tied:
    problem = ground.problem
    found = np.empty(problem.rows, dtype=np.int64)
    near, far = np.ascontiguousarray(depot_distance), np.ascontiguousarray(customer_distance)
    rows = found[: find_tied(ground.rows, near, far, found)].copy()
    depot, customer = problem.depot[rows], problem.customer[rows]
    count = np.bincount(customer, minlength=problem.customers)
    through = np.flatnonzero(count[customer] > 1)
    listed = through[np.argsort(depot[through], kind="stable")]
    ties = Ties(
        depot,
        customer,
        _starts(count),
        _starts(np.bincount(depot[through], minlength=problem.depots)),
        listed,
    )
    upper, quantity = ground.upper[rows], ground.quantity[rows]
    more = np.where(upper == UNLIMITED, 2 * MANY, upper - quantity)
    return Tied(rows, ties, more, quantity - ground.lower[rows])


def _starts(counts: Integers) -> Integers:
    return np.append(0, np.cumsum(counts)).astype(np.int64)


def most_into(tied: Tied, depots: Integers, customers: Integers) -> Integers:
    """How much more could go from each depot to the customer beside it, each on its own; MANY: no limit."""
    return _each(tied, customers, depots, tied.more, tied.less)


def most_out_of(tied: Tied, customers: Integers, depots: Integers) -> Integers:
    """How much more could go back from each customer to the depot beside it; MANY: no limit."""
    return _each(tied, customers, depots, tied.less, tied.more)


def _each(
    tied: Tied, customers: Integers, depots: Integers, to_depot: Integers, to_customer: Integers
) -> Integers:
    most = np.zeros(len(customers), dtype=np.int64)
    most_for_each(
        tied.ties, np.ascontiguousarray(customers), np.ascontiguousarray(depots), to_depot, to_customer, most
    )
    return most


def pushed_into(tied: Tied, depot: int, customer: int, at_most: int) -> tuple[int, Integers]:
    """Sends as much as goes from a depot to a customer: how much, and (ties,) what each row gains by it."""
    return _pushed(tied, (customer, depot), at_most, tied.more.copy(), tied.less.copy())


def pushed_out_of(tied: Tied, customer: int, depot: int, at_most: int) -> tuple[int, Integers]:
    """The same back from a customer to a depot."""
    amount, lost = _pushed(tied, (customer, depot), at_most, tied.less.copy(), tied.more.copy())
    return amount, -lost


def _pushed(
    tied: Tied, ends: tuple[int, int], at_most: int, to_depot: Integers, to_customer: Integers
) -> tuple[int, Integers]:
    before = to_depot.copy()
    amount = most_over(tied.ties, ends[0], ends[1], to_depot, to_customer, at_most)
    return amount, before - to_depot
