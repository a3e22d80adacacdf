"""Plans that keep every rule: customers served one after the other from what is left, and taken back."""

from __future__ import annotations

import numpy as np

from engine.exact import Integers, TooLarge
from engine.loads.arrays import NEVER, Answers, Priced, Room, Rows
from engine.loads.cost import loads_on, sent_by, short_of
from engine.loads.linear import lines_behind, solve_lines
from engine.loads.problem import NO_LIMIT, LoadProblem
from engine.loads.turns import serve_in_turn
from engine.network import Contradiction

DEAR = 2**59
"""Most that a customer's shortage may weigh while one customer is served."""

PLENTY = 2**60
"""Stands for no limit."""


def room_beside(problem: LoadProblem, quantity: Integers) -> Room:
    """What depots and hauliers can still give beside a plan."""
    supply = problem.supply - sent_by(problem, quantity)
    vehicles = np.where(problem.most_loads == NO_LIMIT, PLENTY, problem.most_loads)
    np.subtract.at(vehicles, problem.depot, loads_on(problem, quantity))
    haulier = np.where(problem.haulier_most == NO_LIMIT, PLENTY, problem.haulier_most)
    carried = problem.haulier >= 0
    np.subtract.at(haulier, problem.haulier[carried], quantity[carried])
    return Room(supply, vehicles, haulier, problem.haulier, problem.most)


def serve(problem: LoadProblem, quantity: Integers, order: Integers) -> Integers:
    """Serves the customers of `order` anew, one by one, each as cheaply as what is left allows.

    quantity: a plan that keeps all rules, as the answer does
    """
    never = np.full(problem.customers, NEVER, dtype=np.int64)
    answers = Answers(quantity.copy(), short_of(problem, quantity), never, never.copy())
    room = room_beside(problem, quantity)
    serve_in_turn(rows_alone(problem), priced_alone(problem), np.ascontiguousarray(order), room, answers)
    return answers.quantity


def rows_alone(problem: LoadProblem) -> Rows:
    """The rows with the problem's own costs."""
    return Rows(
        problem.start,
        problem.depot,
        problem.per_unit,
        problem.trip_minimum,
        problem.load_size,
        problem.least,
        problem.most.copy(),
        (problem.at_least > 0).astype(np.int64),
        problem.demand,
        problem.demand,
        problem.one_depot.astype(np.int64),
    )


def priced_alone(problem: LoadProblem) -> Priced:
    """A shortage weighs more than any cost of serving, unless the customer may decline."""
    dear = DEAR // (2 * np.maximum(problem.demand, 1))
    short = np.where(problem.may_decline, problem.short_cost, np.minimum(dear, 2**40))
    return Priced(
        np.ascontiguousarray(-problem.unsent_cost[problem.depot]),
        problem.per_load,
        problem.charge_per_use,
        np.ascontiguousarray(short),
    )


def behind(problem: LoadProblem, quantity: Integers) -> Integers | None:
    """The best quantities with no more loads on any row than in this plan; None if there are none.

    Exact: a network, unless hauliers are limited, who then carry no more on any row than in the plan.
    """
    lines = lines_behind(problem, loads_on(problem, quantity), quantity)
    if lines is None:
        return None
    try:
        return solve_lines(problem, lines)
    except (Contradiction, TooLarge):
        return None


def mended(problem: LoadProblem, wanted: Integers) -> Integers:
    """A plan that keeps all rules, as near to the wanted quantities as a simple pass gets.

    Customers whose quantities keep the rules keep them, the largest first; the others are served anew.
    """
    quantity = np.where(problem.at_least > 0, problem.least, 0)
    room = room_beside(problem, quantity)
    left_out = []
    ranks = np.where(problem.may_decline, np.iinfo(np.int64).max, problem.rank)
    for j in np.lexsort((-problem.demand, ranks)).tolist():
        rows = slice(int(problem.start[j]), int(problem.start[j + 1]))
        way = wanted[rows]
        if not (_keeps_rules(problem, rows, way, j) and _put(problem, room, rows, way, quantity)):
            left_out.append(j)
    return serve(problem, quantity, np.array(left_out, dtype=np.int64))


def _keeps_rules(problem: LoadProblem, rows: slice, way: Integers, j: int) -> bool:
    """Whether quantities at one customer keep the rules that concern it alone."""
    nothing = (way == 0) & (problem.at_least[rows] == 0)
    something = (way >= problem.least[rows]) & (way <= problem.most[rows])
    homes = set(problem.depot[rows][way > 0].tolist()) if problem.one_depot[j] else ()
    return bool((nothing | something).all()) and int(way.sum()) <= int(problem.demand[j]) and len(homes) < 2


def _put(problem: LoadProblem, room: Room, rows: slice, way: Integers, quantity: Integers) -> bool:
    """Puts quantities on one customer's rows if there is room for them."""
    size = problem.load_size[rows]
    depot, haulier = problem.depot[rows], problem.haulier[rows]
    change = way - quantity[rows]
    more = _loads(size, way) - _loads(size, quantity[rows])
    carried = haulier >= 0
    for sign in (-1, 1):
        np.add.at(room.supply, depot, sign * change)
        np.add.at(room.vehicles, depot, sign * more)
        np.add.at(room.haulier, haulier[carried], sign * change[carried])
        if sign == -1 and not (
            (room.supply[depot] < 0).any()
            or (room.vehicles[depot] < 0).any()
            or (room.haulier[haulier[carried]] < 0).any()
        ):
            quantity[rows] = way
            return True
    return False


def _loads(size: Integers, quantity: Integers) -> Integers:
    return -(-quantity // np.where(size > 0, size, np.maximum(quantity, 1)))
