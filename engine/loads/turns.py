"""Customers served one after the other, once or over and over: the one kernel of this room, and its uses.

Over and over: a few customers are taken out and served anew (ruin and recreate, Schrimpf et al. 2000), each
exactly from what is left; now and then a dearer plan is gone on from (Kirkpatrick et al. 1983).
"""

from __future__ import annotations

import numpy as np

from engine.exact import Integers
from engine.loads.arrays import NEVER, Answers, Corners, Moves, Priced, Room, Rows, Scratch, Sums
from engine.loads.compiled import kernel, part
from engine.loads.customer import MOST_CORNERS, MOST_SUMS, at_customer, regrets_at, value_of
from engine.loads.room import has_room, limit_to_room, openings, too_much_stays, use_room

LONG = 2**31 - 1
"""Chance runs through the numbers up to this."""

CHEAPEST, VALUES, SERVE, REARRANGE, REGRETS = 0, 1, 2, 3, 4

_NONE = np.zeros(0, dtype=np.int64)
_NO_ROOM = Room(_NONE, _NONE, _NONE, _NONE, _NONE)
_NO_MOVES = Moves(
    np.zeros((1, 1), dtype=np.int64), _NONE, _NONE, _NONE, np.zeros(3, dtype=np.int64), _NONE, _NONE
)


def cheapest(rows: Rows, priced: Priced, which: Integers, answers: Answers) -> None:
    """The cheapest way at each customer of `which`, whatever the others take."""
    take_turns(CHEAPEST, rows, priced, priced, which, _NO_ROOM, answers, _NO_MOVES)


def values_of(rows: Rows, priced: Priced, answers: Answers) -> None:
    """Fills `value` with what the ways that stand in `answers` cost."""
    everybody = np.arange(len(rows.demand), dtype=np.int64)
    take_turns(VALUES, rows, priced, priced, everybody, _NO_ROOM, answers, _NO_MOVES)


def regrets_of(rows: Rows, priced: Priced, which: Integers, answers: Answers, most: int) -> Integers:
    """(rows,) by how much each row of the customers in `which`, if it must be used, raises their least cost.

    answers: their least cost is in `lower`; most: regrets beyond this are given as any number beyond it
    """
    moves = _NO_MOVES._replace(
        standing=np.array([most], dtype=np.int64), best=np.zeros(len(rows.depot), dtype=np.int64)
    )
    apart = rows._replace(forced=rows.forced.copy())
    take_turns(REGRETS, apart, priced, priced, which, _NO_ROOM, answers, moves)
    return moves.best


def serve_in_turn(rows: Rows, priced: Priced, order: Integers, room: Room, answers: Answers) -> None:
    """Serves the customers of `order` anew, one by one, each as cheaply as what is left allows.

    answers: `quantity` is a plan that fits, and stays one
    """
    take_turns(SERVE, rows, priced, priced, order, room, answers, _NO_MOVES)


def rearrange(rows: Rows, guide: Priced, true: Priced, room: Room, answers: Answers, moves: Moves) -> bool:
    """Betters the plan in `answers`, whose `value` holds each customer's true cost.

    guide: costs with prices of scarce stocks on top, by which half of the choices are made
    true:  costs without
    Returns whether a better plan than ever was found; its quantities are in `moves.best`.
    """
    everybody = np.arange(len(rows.demand), dtype=np.int64)
    return bool(take_turns(REARRANGE, rows, guide, true, everybody, room, answers, moves))


@kernel
def take_turns(
    kind: int,
    rows: Rows,
    priced: Priced,
    true: Priced,
    which: Integers,
    room: Room,
    answers: Answers,
    moves: Moves,
) -> bool:
    """All uses in one, so that the search at a customer is compiled once."""
    if kind == VALUES:
        for j in which:
            answers.value[j] = value_of(rows, priced, answers, j)
        return False
    widest = 1
    for j in which:
        widest = max(widest, rows.start[j + 1] - rows.start[j])
    most = widest * (MOST_CORNERS + 8)
    deep = (widest + 2) * MOST_SUMS
    largest = max(1, moves.setting[1])
    integers = np.int64
    scratch = Scratch(
        Corners(
            np.empty(widest + 1, integers),
            np.empty(most, integers),
            np.empty(most, integers),
            np.empty(widest, integers),
        ),
        Sums(
            np.empty(deep, integers),
            np.empty(deep, integers),
            np.empty(deep, integers),
            np.empty(deep, integers),
            np.empty(deep, integers),
            np.empty(deep, integers),
        ),
        np.empty(widest, integers),
        np.empty(widest + 1, integers),
        np.empty((largest, widest), integers),
        np.empty(largest, integers),
        np.empty(largest, integers),
    )
    if kind == REARRANGE:
        better = False
        for _ in range(moves.setting[0]):
            better |= rearrange_once(rows, priced, true, room, answers, moves, scratch)
        return better
    for j in which:
        first, last = rows.start[j], rows.start[j + 1]
        if kind == REGRETS:
            about = (j, answers.lower[j], moves.standing[0])
            regret = moves.best[first:last]
            regrets_at(
                rows, priced, scratch.corners, scratch.sums, scratch.active, scratch.best, about, regret
            )
            continue
        if kind == SERVE:
            for row in range(first, last):
                scratch.before[0, row - first] = answers.quantity[row]
                use_room(rows, room, row, -answers.quantity[row])
            limit_to_room(rows, room, j)
        # a second and third time only where rows of one depot or haulier took too much together
        for _ in range(4):
            serve_one(rows, priced, answers, scratch, j)
            if kind == CHEAPEST or answers.value[j] == NEVER or fitted(rows, room, answers, j):
                break
            if kind == SERVE:
                keep_largest(rows, answers, j)
                answers.value[j] = NEVER
        if kind == SERVE and answers.value[j] == NEVER:
            received = 0
            for row in range(first, last):
                answers.quantity[row] = scratch.before[0, row - first]
                use_room(rows, room, row, answers.quantity[row])
                received += answers.quantity[row]
            answers.short[j] = rows.demand[j] - received
    return False


@part
def serve_one(rows: Rows, priced: Priced, answers: Answers, scratch: Scratch, j: int) -> None:
    """The cheapest way at one customer."""
    at_customer(rows, priced, answers, scratch.corners, scratch.sums, scratch.active, scratch.best, j)


@part
def fitted(rows: Rows, room: Room, answers: Answers, j: int) -> bool:
    """Takes what a customer's way needs from what is left; False, and nothing taken, if it is too much."""
    first, last = rows.start[j], rows.start[j + 1]
    for row in range(first, last):
        use_room(rows, room, row, answers.quantity[row])
    if has_room(rows, room, first, last):
        return True
    for row in range(first, last):
        use_room(rows, room, row, -answers.quantity[row])
    return False


@part
def keep_largest(rows: Rows, answers: Answers, j: int) -> None:
    """Closes all rows of a customer's way but the largest and those that must carry something."""
    largest = 0
    for row in range(rows.start[j], rows.start[j + 1]):
        largest = max(largest, answers.quantity[row])
    for row in range(rows.start[j], rows.start[j + 1]):
        if answers.quantity[row] < largest and rows.forced[row] == 0:
            rows.most[row] = 0


@part
def rearrange_once(
    rows: Rows,
    guide: Priced,
    true: Priced,
    room: Room,
    answers: Answers,
    moves: Moves,
    scratch: Scratch,
) -> bool:
    """Takes some customers out and serves them anew; whether the plan is the best of all so far."""
    state, standing, chosen = moves.standing[2:], moves.standing, scratch.chosen
    count = choose(state, moves, len(rows.demand), chosen)
    change = -openings(room, moves)
    for n in range(count):
        j = chosen[n]
        scratch.value[n] = answers.value[j]
        change -= answers.value[j]
        for row in range(rows.start[j], rows.start[j + 1]):
            scratch.before[n, row - rows.start[j]] = answers.quantity[row]
            use_room(rows, room, row, -answers.quantity[row])
            answers.quantity[row] = 0
        answers.short[j] = rows.demand[j]
    guided = draw(state, 2) == 0
    served = 0
    for n in range(count):
        j = chosen[n]
        limit_to_room(rows, room, j)
        # the way before, where there is room for it, is a good value to begin with
        received = 0
        for row in range(rows.start[j], rows.start[j + 1]):
            answers.quantity[row] = scratch.before[n, row - rows.start[j]]
            received += answers.quantity[row]
        answers.short[j] = rows.demand[j] - received
        serve_one(rows, guide if guided else true, answers, scratch, j)
        if answers.value[j] == NEVER or not fitted(rows, room, answers, j):
            break
        answers.value[j] = value_of(rows, true, answers, j)
        change += answers.value[j]
        served += 1
    change += openings(room, moves)
    if served == count and change <= draw(state, moves.setting[2] + 1) and not too_much_stays(room, moves):
        standing[0] -= change
        if standing[0] > standing[1]:
            standing[1] = standing[0]
            for row in range(len(moves.best)):
                moves.best[row] = answers.quantity[row]
            return True
        return False
    for n in range(served):
        for row in range(rows.start[chosen[n]], rows.start[chosen[n] + 1]):
            use_room(rows, room, row, -answers.quantity[row])
    for n in range(count):
        j = chosen[n]
        received = 0
        for row in range(rows.start[j], rows.start[j + 1]):
            answers.quantity[row] = scratch.before[n, row - rows.start[j]]
            use_room(rows, room, row, answers.quantity[row])
            received += answers.quantity[row]
        answers.short[j] = rows.demand[j] - received
        answers.value[j] = scratch.value[n]
    return False


@part
def draw(state: Integers, below: int) -> int:
    """A number from 0 to below `below` (Park & Miller 1988)."""
    state[0] = state[0] * 48271 % LONG
    return int(state[0] * below // LONG)


@part
def choose(state: Integers, moves: Moves, customers: int, chosen: Integers) -> int:
    """A customer and some that are near it, in an order by chance; returns how many."""
    near, largest = moves.near, len(chosen)
    chosen[0] = draw(state, customers)
    wanted = 1 + draw(state, largest)
    count = 1
    for _ in range(2 * largest):
        if count >= wanted:
            break
        other = near[chosen[0], draw(state, near.shape[1])]
        known = False
        for n in range(count):
            known |= chosen[n] == other
        if not known:
            chosen[count] = other
            count += 1
    for n in range(count - 1, 0, -1):
        m = draw(state, n + 1)
        chosen[n], chosen[m] = chosen[m], chosen[n]
    return count
