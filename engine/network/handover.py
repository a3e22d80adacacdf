"""What handing one unit over from one depot to another costs, kept up to date as customers move.

    handover[i, k] = min over customers, rows r of i that carry something and rows s of k that have room,
                     of cost[s] - cost[r]

The residual network of the whole problem, shrunk to the depots. Only the customers in `Users` count;
the caller sees to it that no other customer could offer a cheaper exchange.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.customers import ASCENDING, COMPLETE, FAR, LIMITED, LISTED, Rows, State, depot_of

STALE = -2
"""In `State.via`: the exchange that stood here is gone, the next best must be found."""


class Users(NamedTuple):
    """For each depot, its rows that carry something.

    first:    (depots + 1,) where each depot's share of the two lists begins
    length:   (depots,) how much of its share is in use
    row:      the rows
    customer: their customers
    cost:     their costs
    """

    first: Integers
    length: Integers
    row: Integers
    customer: Integers
    cost: Integers


@kernel
def new_users(rows: Rows, state: State, chosen: Integers) -> Users:
    """Empty lists with space for all rows that carry something at the `chosen` customers, and some more."""
    depots = len(rows.supply)
    length = np.zeros(depots, dtype=np.int64)
    for j in chosen:
        if state.home[j] >= 0:
            length[depot_of(rows, state.home[j], j)] += 1
            continue
        for row in range(rows.start[j], rows.start[j + 1]):
            if state.flow[row] > 0:
                length[rows.depot[row]] += 1
    first = np.empty(depots + 1, dtype=np.int64)
    first[0] = 0
    for i in range(depots):
        first[i + 1] = first[i] + length[i] + length[i] // 2 + 64
        length[i] = 0
    space = first[depots]
    return Users(
        first,
        length,
        np.empty(space, dtype=np.int64),
        np.empty(space, dtype=np.int64),
        np.empty(space, dtype=np.int64),
    )


@part
def let_in(
    rows: Rows,
    state: State,
    users: Users,
    chosen: Integers,
    gap: Integers,
    slack: int,
    inside: NDArray[np.uint8],
) -> None:
    """Puts the rows that carry something on the lists, and lets them offer their exchanges.

    Only those of `chosen` customers whose gap is at most `slack` and who are not `inside` yet.
    """
    for n in range(len(chosen)):
        if gap[n] > slack or inside[n]:
            continue
        inside[n] = 1
        j = chosen[n]
        home = state.home[j]
        if home >= 0:
            add_user(rows, users, home, j)
            offer(rows, state, home, j)
            continue
        for row in range(rows.start[j], rows.start[j + 1]):
            if state.flow[row] > 0:
                add_user(rows, users, row, j)
                offer(rows, state, row, j)


@part
def list_all(rows: Rows, state: State, users: Users) -> None:
    """Puts all rows that carry something on the lists; what they offer is not looked at."""
    for j in range(len(rows.demand)):
        home = state.home[j]
        if home >= 0:
            add_user(rows, users, home, j)
            continue
        for row in range(rows.start[j], rows.start[j + 1]):
            if state.flow[row] > 0:
                add_user(rows, users, row, j)


@part
def add_user(rows: Rows, users: Users, row: int, j: int) -> bool:
    """Adds a row of customer j to its depot's list; False if there is no space left."""
    i = depot_of(rows, row, j)
    place = users.first[i] + users.length[i]
    if place == users.first[i + 1]:
        return False
    users.row[place], users.customer[place], users.cost[place] = row, j, rows.cost[row]
    users.length[i] += 1
    return True


@part
def remove_user(users: Users, i: int, row: int) -> None:
    """Takes a row out of depot i's list."""
    listed = users.row[users.first[i] : users.first[i] + users.length[i]]
    last = users.first[i] + len(listed) - 1
    place = users.first[i] + place_of(listed, row)
    users.row[place], users.customer[place] = users.row[last], users.customer[last]
    users.cost[place] = users.cost[last]
    users.length[i] -= 1


@part
def place_of(listed: Integers, row: int) -> int:
    """Where `row` stands in a list that contains it."""
    place = 0
    while listed[place] != row:
        place += 1
    return place


@part
def offer(rows: Rows, state: State, row: int, j: int) -> None:
    """Lets a row that carries something at customer j offer its exchanges with the customer's other rows."""
    first, last = rows.start[j], rows.start[j + 1]
    given_up = rows.cost[row]
    i = depot_of(rows, row, j)
    handover, via, cost = state.handover[i], state.via[i], rows.cost
    limited = rows.kind[j] & LIMITED
    if rows.kind[j] == COMPLETE:
        offer_all(cost[first:last], given_up, row, handover, via)
    else:
        for other in range(first, last):
            k = rows.depot[other]
            change = cost[other] - given_up
            if change < handover[k] and not (limited and state.flow[other] == rows.room[other]):
                handover[k] = change
                via[k] = row


@part
def offer_all(cost: Integers, given_up: int, row: int, handover: Integers, via: Integers) -> None:
    """`offer` for a customer with one unlimited row for each depot, written so that it runs in vectors."""
    for k in range(len(handover)):
        price = cost[k] - given_up
        better = price < handover[k]
        handover[k] = price if better else handover[k]
        via[k] = row if better else via[k]


@part
def renew(rows: Rows, state: State, users: Users, i: int) -> None:
    """Recomputes all that depot i can hand over."""
    handover, via, start, cost = state.handover[i], state.via[i], rows.start, rows.cost
    for k in range(len(handover)):
        handover[k] = FAR
        via[k] = -1
    end = users.first[i] + users.length[i]
    waiting = -1  # they go in twos, which halves how often the depot's own figures are read and written
    for place in range(users.first[i], end):
        j = users.customer[place]
        if rows.kind[j] != COMPLETE:
            offer(rows, state, users.row[place], j)
        elif waiting < 0:
            waiting = place
        else:
            before = users.customer[waiting]
            offer_both(
                cost[start[before] : start[before + 1]],
                cost[start[j] : start[j + 1]],
                Both(users.cost[waiting], users.row[waiting], users.cost[place], users.row[place]),
                handover,
                via,
            )
            waiting = -1
    if waiting >= 0:
        j = users.customer[waiting]
        offer_all(cost[start[j] : start[j + 1]], users.cost[waiting], users.row[waiting], handover, via)


class Both(NamedTuple):
    """Two rows of one depot and their costs."""

    first_cost: int
    first_row: int
    other_cost: int
    other_row: int


@part
def offer_both(first: Integers, other: Integers, both: Both, handover: Integers, via: Integers) -> None:
    """`offer_all` for two customers of one depot at once; `first` and `other` are the costs of their rows."""
    for k in range(len(handover)):
        price, row = first[k] - both.first_cost, both.first_row
        second = other[k] - both.other_cost
        cheaper = second < price
        price = second if cheaper else price
        row = both.other_row if cheaper else row
        better = price < handover[k]
        handover[k] = price if better else handover[k]
        via[k] = row if better else via[k]


@part
def repair(rows: Rows, state: State, users: Users, i: int, stale: Integers) -> None:
    """Finds the next best exchanges of depot i where the best is gone.

    stale: scratch space (depots,)
    """
    handover, via, start, cost = state.handover[i], state.via[i], rows.start, rows.cost
    count = 0
    for k in range(len(handover)):
        if via[k] == STALE:
            stale[count] = k
            handover[k] = FAR
            count += 1
    if 8 * count > len(handover):
        renew(rows, state, users, i)
        return
    for place in range(users.first[i], users.first[i] + users.length[i]):
        row, j, given_up = users.row[place], users.customer[place], users.cost[place]
        first = start[j]
        if rows.kind[j] == COMPLETE:
            for n in range(count):
                k = stale[n]
                price = cost[first + k] - given_up
                if price < handover[k]:
                    handover[k] = price
                    via[k] = row
        elif rows.kind[j] == LISTED or rows.kind[j] == LISTED | LIMITED:
            offer(rows, state, row, j)
        else:
            for n in range(count):
                k = stale[n]
                other = row_from(start, rows.depot, j, k, len(handover))
                if other < 0 or cost[other] - given_up >= handover[k]:
                    continue
                if not (rows.kind[j] & LIMITED and state.flow[other] == rows.room[other]):
                    handover[k] = cost[other] - given_up
                    via[k] = row


@part
def row_from(start: Integers, depot: Integers, j: int, k: int, depots: int) -> int:
    """The row from depot k to customer j whose rows are in the order of depots, -1 if there is none."""
    low, high = start[j], start[j + 1]
    if high - low == depots:
        return int(low + k)
    while low < high:
        middle = (low + high) // 2
        if depot[middle] < k:
            low = middle + 1
        else:
            high = middle
    return int(low) if low < start[j + 1] and depot[low] == k else -1


@part
def row_with_room(rows: Rows, flow: Integers, j: int, k: int) -> int:
    """The cheapest row from depot k to customer j that has room."""
    if rows.kind[j] & (ASCENDING | COMPLETE):
        return row_from(rows.start, rows.depot, j, k, len(rows.supply))
    limited = rows.kind[j] & LIMITED
    chosen, least = -1, FAR
    for row in range(rows.start[j], rows.start[j + 1]):
        full = limited and flow[row] == rows.room[row]
        if rows.depot[row] == k and rows.cost[row] < least and not full:
            chosen, least = row, rows.cost[row]
    return chosen


@part
def customer_of(start: Integers, row: int) -> int:
    """The customer of a row, by halving."""
    low, high = 0, len(start) - 1
    while high - low > 1:
        middle = (low + high) // 2
        if start[middle] <= row:
            low = middle
        else:
            high = middle
    return low


@part
def mark_stale(via: Integers, row: int) -> None:
    """Marks the exchanges that `row` gave as gone."""
    for k in range(len(via)):
        via[k] = STALE if via[k] == row else via[k]
