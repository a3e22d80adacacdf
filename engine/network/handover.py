"""What handing one unit over from one depot to another costs, kept up to date as customers move.

    handover[i, k] = min over customers, rows r of i that carry something and rows s of k that have room,
                     of cost[s] - cost[r]

The residual network of the whole problem, shrunk to the depots. Only the customers in `Users` count;
the caller sees to it that no other customer could offer a cheaper exchange.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel
from engine.network.customers import FAR, Rows, State


class Users(NamedTuple):
    """For each depot, its rows that carry something.

    first:    (depots + 1,) where each depot's share of the two lists begins
    length:   (depots,) how much of its share is in use
    row:      the rows
    customer: their customers
    """

    first: Integers
    length: Integers
    row: Integers
    customer: Integers


@kernel
def list_users(rows: Rows, state: State, customers: Integers) -> Users:
    """The rows that carry something at `customers`, with space for as many more again."""
    depots = len(rows.supply)
    count = np.zeros(depots, dtype=np.int64)
    for j in customers:
        for row in range(rows.start[j], rows.start[j + 1]):
            if state.flow[row] > 0:
                count[rows.depot[row]] += 1
    first = np.empty(depots + 1, dtype=np.int64)
    first[0] = 0
    for i in range(depots):
        first[i + 1] = first[i] + 2 * count[i] + 16
    users = Users(
        first, count, np.empty(first[depots], dtype=np.int64), np.empty(first[depots], dtype=np.int64)
    )
    count[:] = 0
    for j in customers:
        for row in range(rows.start[j], rows.start[j + 1]):
            if state.flow[row] > 0:
                add_user(users, rows.depot[row], row, j)
    return users


@kernel
def add_user(users: Users, i: int, row: int, j: int) -> bool:
    """Adds a row to depot i's list; False if there is no space left."""
    place = users.first[i] + users.length[i]
    if place == users.first[i + 1]:
        return False
    users.row[place], users.customer[place] = row, j
    users.length[i] += 1
    return True


@kernel
def remove_user(users: Users, i: int, row: int) -> None:
    """Takes a row out of depot i's list."""
    last = users.first[i] + users.length[i] - 1
    place = users.first[i]
    while users.row[place] != row:
        place += 1
    users.row[place], users.customer[place] = users.row[last], users.customer[last]
    users.length[i] -= 1


@kernel
def offer(rows: Rows, state: State, i: int, row: int, j: int) -> None:
    """Lets row `row` of depot i, which carries something at customer j, offer its exchanges."""
    first = rows.start[j]
    given_up = rows.cost[row]
    handover, via = state.handover[i], state.via[i]
    if rows.regular[j] and len(rows.room) == 0:
        for k in range(len(handover)):
            price = rows.cost[first + k] - given_up
            better = price < handover[k]
            handover[k] = price if better else handover[k]
            via[k] = row if better else via[k]
        return
    for other in range(first, rows.start[j + 1]):
        if len(rows.room) and state.flow[other] == rows.room[other]:
            continue
        k = rows.depot[other]
        price = rows.cost[other] - given_up
        if price < handover[k]:
            handover[k] = price
            via[k] = row


@kernel
def renew(rows: Rows, state: State, users: Users, i: int) -> None:
    """Recomputes all that depot i can hand over."""
    state.handover[i, :] = FAR
    for place in range(users.first[i], users.first[i] + users.length[i]):
        offer(rows, state, i, users.row[place], users.customer[place])


@kernel
def row_with_room(rows: Rows, state: State, j: int, k: int) -> int:
    """The cheapest row from depot k to customer j that has room."""
    if rows.regular[j]:
        return int(rows.start[j] + k)
    chosen, least = -1, FAR
    for row in range(rows.start[j], rows.start[j + 1]):
        if rows.depot[row] == k and rows.cost[row] < least:
            if len(rows.room) and state.flow[row] == rows.room[row]:
                continue
            chosen, least = row, rows.cost[row]
    return chosen


@kernel
def customer_of(rows: Rows, row: int) -> int:
    """The customer of a row, by halving."""
    low, high = 0, len(rows.demand)
    while high - low > 1:
        middle = (low + high) // 2
        if rows.start[middle] <= row:
            low = middle
        else:
            high = middle
    return low
