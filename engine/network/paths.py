"""Sends what is too much at some depots to where there is too little, along cheapest chains of exchanges.

Successive shortest paths with prices (Tomizawa 1971; Edmonds & Karp 1972), several paths per search as in
the primal-dual method of Ford & Fulkerson (1956), on a network of the depots alone.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers
from engine.network.compiled import kernel, part
from engine.network.customers import COMPLETE, FAR, LIMITED, SEVERAL, Rows, State
from engine.network.handover import (
    STALE,
    Users,
    add_user,
    customer_of,
    mark_stale,
    offer,
    offer_all,
    remove_user,
    renew,
    repair,
    row_with_room,
)

REACHED = 2**60
"""Every real path ends below this price."""

LARGEST_PRICE = 2**59
"""Prices beyond this stop the search; below it no sum here can leave int64."""

DONE, WIDEN, RELIST, STUCK, TOO_FAR = 0, 1, 2, 3, 4


class Search(NamedTuple):
    """Scratch space of one search, all (depots,).

    reach:  price that each depot would get: its own plus its distance from the nearest depot with too much
    closed: 0, or FAR once a depot's distance is known
    before: the depot before it on its path, -1 at the beginning
    target: depots with too little, nearest first
    giving, taking, place: the rows and customers of the exchanges along the path in hand
    event:  what happened to those rows, see `move`
    base:   prices at the beginning
    unknown: 1 where what the depot can hand over is worked out only when the search comes by
    """

    reach: Integers
    closed: Integers
    before: Integers
    target: Integers
    giving: Integers
    taking: Integers
    place: Integers
    event: Integers
    base: Integers
    unknown: Integers


def new_search(depots: int) -> Search:
    """Scratch space for `depots` depots."""
    return Search(*(np.zeros(depots, dtype=np.int64) for _ in Search._fields))


@part
def level_out(rows: Rows, state: State, users: Users, search: Search, slack: int) -> int:
    """Moves flow until no depot has too much, with prices rising by no more than `slack` (FAR: any).

    Returns DONE; WIDEN when prices would have to rise further; RELIST when `users` is out of space;
    STUCK when depots with too much reach none with too little; TOO_FAR when prices grow too large.
    """
    base = search.base
    for k in range(len(base)):
        base[k] = state.price[k]
    while True:
        targets, limit = find_paths(rows, state, users, search)
        if limit < 0:
            return DONE
        if targets == 0 and slack == FAR:
            return STUCK
        for k in range(len(base)):
            allowed = slack - (state.price[k] - base[k])
            if search.reach[k] - state.price[k] > allowed:
                limit = min(limit, allowed)
        found = 0
        for k in range(len(base)):
            rise = min(limit, search.reach[k] - state.price[k])
            search.reach[k] = rise
            state.price[k] += rise
            if abs(state.price[k]) > LARGEST_PRICE:
                return TOO_FAR
        for n in range(targets):
            target = search.target[n]
            while state.excess[target] < 0:
                outcome = send(rows, state, users, search, target)
                if outcome == RELIST:
                    return RELIST
                if outcome == WIDEN:
                    break
                found += 1
        if found == 0:
            return WIDEN


@kernel
def find_paths(rows: Rows, state: State, users: Users, search: Search) -> tuple[int, int]:
    """Dijkstra from all depots with too much at once (1959), to the nearest of those with too little.

    Returns how many of these were reached and the distance of the farthest; a negative distance if no
    depot has too much.
    """
    depots = len(state.price)
    reach, closed, price = search.reach, search.closed, state.price
    wanting, sources = 0, 0
    for k in range(depots):
        closed[k] = 0
        search.before[k] = -1
        reach[k] = FAR
        if state.excess[k] > 0:
            reach[k] = price[k]
            sources += 1
        elif state.excess[k] < 0:
            wanting += 1
    if sources == 0:
        return 0, -1
    # the first paths that are used change the others: of many only the shorter ones are worth finding
    wanting = min(wanting, 1 + wanting // 4)
    nearest, targets, distance = 0, 0, 0
    while targets < wanting:
        i = 0
        while reach[i] - price[i] + closed[i] != nearest:
            i += 1
        closed[i] = FAR
        if state.excess[i] < 0:
            search.target[targets] = i
            targets += 1
            distance = nearest
            if targets == wanting:
                break
        if search.unknown[i]:
            search.unknown[i] = 0
            renew(rows, state, users, i)
        here = reach[i]
        handover = state.handover[i]
        nearest = 2 * FAR
        for k in range(depots):
            there = here + handover[k]
            better = there < reach[k]
            reach[k] = there if better else reach[k]
            search.before[k] = i if better else search.before[k]
            nearest = min(nearest, reach[k] - price[k] + closed[k])
        if nearest > REACHED:
            break
    if targets == 0:
        distance = FAR
    return targets, distance


@part
def send(rows: Rows, state: State, users: Users, search: Search, target: int) -> int:
    """Sends as much as possible along the path to `target`, if all its exchanges are still at their price.

    Returns DONE if something was sent, WIDEN if not, RELIST if it was sent but `users` is out of space.
    """
    price, flow, before = state.price, state.flow, search.before
    amount = -state.excess[target]
    length, k = 0, target
    while before[k] >= 0:
        i = before[k]
        if state.handover[i, k] + price[i] != price[k]:
            return WIDEN
        row = state.via[i, k]
        j = customer_of(rows.start, row)
        other = row_with_room(rows, flow, j, k)
        amount = min(amount, flow[row])
        if rows.kind[j] & LIMITED:
            amount = min(amount, rows.room[other] - flow[other])
        search.giving[length], search.taking[length], search.place[length] = row, other, j
        length += 1
        k = i
    amount = min(amount, state.excess[k])
    if amount <= 0:
        return WIDEN
    state.excess[k] -= amount
    state.excess[target] += amount
    for n in range(length):
        j = search.place[n]
        state.home[j] = SEVERAL
        room = rows.room if rows.kind[j] & LIMITED else flow[:0]
        search.event[n] = move(flow, room, search.giving[n], search.taking[n], amount)
    return follow(rows, state, users, search, length)


EMPTIED, BEGUN, FREED, FILLED = 1, 2, 4, 8


@part
def move(flow: Integers, room: Integers, row: int, other: int, amount: int) -> int:
    """Moves `amount` from one row to another; returns which of them changed its standing."""
    event = 0
    if len(room) and flow[row] == room[row]:
        event |= FREED
    flow[row] -= amount
    if flow[row] == 0:
        event |= EMPTIED
    if flow[other] == 0:
        event |= BEGUN
    flow[other] += amount
    if len(room) and flow[other] == room[other]:
        event |= FILLED
    return event


@part
def follow(rows: Rows, state: State, users: Users, search: Search, length: int) -> int:
    """Brings lists and exchange costs up to date: first what is gone, then what is new."""
    flow, via, depot, start = state.flow, state.via, rows.depot, rows.start
    for n in range(length):
        event, row, other, j = search.event[n], search.giving[n], search.taking[n], search.place[n]
        if event & EMPTIED:
            remove_user(users, depot[row], row)
            mark_stale(via[depot[row]], row)
        if event & BEGUN and not add_user(rows, users, other, j):
            return RELIST
        if event & FILLED:
            for used in range(start[j], start[j + 1]):
                if flow[used] > 0 and via[depot[used], depot[other]] == used:
                    via[depot[used], depot[other]] = STALE
    for n in range(length):
        j = search.place[n]
        if search.event[n] & FILLED:
            for used in range(start[j], start[j + 1]):
                if flow[used] > 0:
                    repair(rows, state, users, depot[used], search.closed)
        if search.event[n] & EMPTIED:
            repair(rows, state, users, depot[search.giving[n]], search.closed)
    for n in range(length):
        j, other = search.place[n], search.taking[n]
        if search.event[n] & BEGUN and rows.kind[j] == COMPLETE:
            k = depot[other]
            here = rows.cost[start[j] : start[j + 1]]
            offer_all(here, rows.cost[other], other, state.handover[k], via[k])
        elif search.event[n] & BEGUN:
            offer(rows, state, other, j)
        if search.event[n] & FREED:
            for used in range(start[j], start[j + 1]):
                if flow[used] > 0:
                    offer(rows, state, used, j)
    return DONE
