"""A plan bettered in small pieces: a few customers are taken out and served anew, over and over.

Ruin and recreate (Schrimpf et al. 2000), each customer served exactly from what is left; now and then a
dearer plan is gone on from (Kirkpatrick et al. 1983).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.loads.arrays import NEVER, Answers, Corners, Priced, Room, Rows, Sums
from engine.loads.compiled import kernel, part
from engine.loads.customer import (
    MOST_CORNERS,
    MOST_SUMS,
    at_customer,
    has_room,
    limit_to_room,
    use_room,
    value_of,
    widest_of,
)

LONG = 2**31 - 1


class Moves(NamedTuple):
    """What is moved, and by which rules.

    near:     (customers, neighbours) customers that share good depots with each
    opening:  (depots,) cost of opening
    supply:   (depots,) all that each depot has
    stay:     (depots,) most that may stay in each depot
    setting:  [rounds, customers taken out at most, heat]: how much dearer a plan may be that is gone on from
    standing: [how much cheaper the plan is than at first, how much the best one, state of chance]
    best:     (rows,) the quantities of the best
    """

    near: Integers
    opening: Integers
    supply: Integers
    stay: Integers
    setting: Integers
    standing: Integers
    best: Integers


@part
def draw(state: Integers, below: int) -> int:
    """A number from 0 to below `below` (Park & Miller 1988)."""
    state[0] = state[0] * 48271 % LONG
    return int(state[0] * below // LONG)


@part
def openings(rows: Rows, room: Room, moves: Moves) -> int:
    """What the depots that send something cost to open."""
    cost = 0
    for i in range(len(moves.opening)):
        if room.supply[i] < moves.supply[i]:
            cost += moves.opening[i]
    return cost


@part
def too_much_stays(room: Room, moves: Moves) -> bool:
    """Whether more stays somewhere than may."""
    found = False
    for i in range(len(moves.stay)):
        found |= room.supply[i] > moves.stay[i]
    return found


@kernel
def rearrange(rows: Rows, guide: Priced, true: Priced, room: Room, answers: Answers, moves: Moves) -> bool:
    """Betters the plan in `answers`, whose `value` holds each customer's true cost.

    guide: costs with prices of scarce stocks on top, by which half of the choices are made
    true:  costs without
    Returns whether a better plan than ever was found; its quantities are in `moves.best`.
    """
    customers = len(rows.demand)
    everybody = np.arange(customers)
    widest = widest_of(rows, everybody)
    most = widest * (MOST_CORNERS + 8)
    integers = np.int64
    corners = Corners(np.empty(widest + 1, integers), np.empty(most, integers), np.empty(most, integers))
    deep = (widest + 2) * MOST_SUMS
    sums = Sums(
        np.empty(deep, integers),
        np.empty(deep, integers),
        np.empty(deep, integers),
        np.empty(deep, integers),
        np.empty(deep, integers),
        np.empty(deep, integers),
    )
    active, best = np.empty(widest, integers), np.empty(widest + 1, integers)
    rounds, largest, heat = moves.setting[0], moves.setting[1], moves.setting[2]
    state = moves.standing[2:]
    chosen, old_value = np.empty(largest, integers), np.empty(largest, integers)
    before = np.empty((largest, widest), integers)
    gained, record, better = moves.standing[0], moves.standing[1], False
    opened = openings(rows, room, moves)
    for _ in range(rounds):
        count = choose(state, moves, customers, largest, chosen)
        change = -opened
        for n in range(count):
            j = chosen[n]
            old_value[n] = answers.value[j]
            change -= answers.value[j]
            for row in range(rows.start[j], rows.start[j + 1]):
                before[n, row - rows.start[j]] = answers.quantity[row]
                use_room(rows, room, row, -answers.quantity[row])
                answers.quantity[row] = 0
            answers.short[j] = rows.demand[j]
        guided = draw(state, 2) == 0
        done = True
        for n in range(count):
            j = chosen[n]
            limit_to_room(rows, room, j)
            if guided:
                at_customer(rows, guide, answers, corners, sums, active, best, j)
            else:
                at_customer(rows, true, answers, corners, sums, active, best, j)
            if answers.value[j] == NEVER:
                done = False
                break
            for row in range(rows.start[j], rows.start[j + 1]):
                use_room(rows, room, row, answers.quantity[row])
            answers.value[j] = value_of(rows, true, answers, j)
            change += answers.value[j]
            if not has_room(rows, room, rows.start[j], rows.start[j + 1]):
                done = False
                for row in range(rows.start[j], rows.start[j + 1]):
                    use_room(rows, room, row, -answers.quantity[row])
                break
        now = openings(rows, room, moves)
        change += now
        if done and change <= draw(state, heat + 1) and not too_much_stays(room, moves):
            gained -= change
            opened = now
            if gained > record:
                record, better = gained, True
                moves.best[:] = answers.quantity
            continue
        reached = count if done else n
        for m in range(reached):
            for row in range(rows.start[chosen[m]], rows.start[chosen[m] + 1]):
                use_room(rows, room, row, -answers.quantity[row])
        for m in range(count):
            j = chosen[m]
            received = 0
            for row in range(rows.start[j], rows.start[j + 1]):
                answers.quantity[row] = before[m, row - rows.start[j]]
                use_room(rows, room, row, answers.quantity[row])
                received += answers.quantity[row]
            answers.short[j] = rows.demand[j] - received
            answers.value[j] = old_value[m]
    moves.standing[0], moves.standing[1] = gained, record
    return better


@part
def choose(state: Integers, moves: Moves, customers: int, largest: int, chosen: Integers) -> int:
    """A customer and some that are near it, in an order by chance; returns how many."""
    near = moves.near
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
