"""What the reasons compute with machine code: thresholds of rates, and the most that tied chains carry.

A rate's thresholds are shortest paths in the residual network between the two ends of its lane without
the row itself (Ahuja, Magnanti & Orlin 1993, sections 9.11 and 11.10 on sensitivity).
"""

from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from engine.exact import Integers
from engine.network.closure import NO_WAY
from engine.network.compiled import kernel

Flags = npt.NDArray[np.bool_]

LOW, HIGH = 1, 2
"""Which thresholds of a row are to be filled."""

MANY = 2**60
"""A capacity of this or more never limits anything."""


class Rows(NamedTuple):
    """The rows of a flow: customer j's are start[j] up to, not including, start[j+1]; all int64."""

    start: Integers
    depot: Integers
    cost: Integers
    quantity: Integers
    lower: Integers
    upper: Integers


class Searched(NamedTuple):
    """Exchanges between depots, all (depots, depots) but the prices.

    direct: cheapest at a single customer; at: that customer; second: cheapest at any other customer
    price:  (depots,) prices that make every direct[i, k] + price[i] - price[k] 0 or more
    """

    direct: Integers
    second: Integers
    at: Integers
    price: Integers


@kernel
def take_apart(weights: Integers, values: Integers, money: Integers, pure: Flags) -> None:
    """Fills the money in sums of weights and money, and whether no weight is in one; see `aims.Weights`.

    weights: the largest first. Values beyond NO_WAY are no sums.
    """
    least = weights[-1] if len(weights) else 2 * NO_WAY
    for n in range(len(values)):
        money[n], pure[n] = values[n], abs(values[n]) < NO_WAY
        if pure[n] and 2 * abs(money[n]) >= least:
            for weight in weights:
                if 2 * abs(money[n]) >= weight:
                    times = (2 * money[n] + weight) // (2 * weight)
                    pure[n] = pure[n] and times == 0
                    money[n] -= times * weight


@kernel
def second_exchanges(rows: Rows, at: Integers, second: Integers) -> None:
    """Fills the cheapest exchange of every ordered pair of depots that is not at the customer `at`."""
    for j in range(len(rows.start) - 1):
        first, last = rows.start[j], rows.start[j + 1]
        for row in range(first, last):
            if rows.quantity[row] <= rows.lower[row]:
                continue
            i, given_up = rows.depot[row], rows.cost[row]
            for other in range(first, last):
                k, price = rows.depot[other], rows.cost[other] - given_up
                if price < second[i, k] and at[i, k] != j and rows.quantity[other] < rows.upper[other]:
                    second[i, k] = price


@kernel
def most_cheaply(rows: Rows, distance: Integers, cost: Integers, by: Integers) -> None:
    """Fills, per customer, what one more costs and the row that brings it; NO_WAY and -1 where none can.

    distance: (depots,) what one more at each depot costs
    """
    for j in range(len(rows.start) - 1):
        best, chosen = NO_WAY, -1
        for row in range(rows.start[j], rows.start[j + 1]):
            here = distance[rows.depot[row]]
            price = here + rows.cost[row]
            if price < best and here < NO_WAY and rows.quantity[row] < rows.upper[row]:
                best, chosen = price, row
        cost[j], by[j] = best, chosen


@kernel
def least_dearly(rows: Rows, distance: Integers, cost: Integers, by: Integers) -> None:
    """Fills, per customer, what one less costs (a saving is negative) and the row that brings less."""
    for j in range(len(rows.start) - 1):
        best, chosen = NO_WAY, -1
        for row in range(rows.start[j], rows.start[j + 1]):
            if rows.quantity[row] > rows.lower[row]:
                here = distance[rows.depot[row]]
                price = here - rows.cost[row]
                if price < best and here < NO_WAY:
                    best, chosen = price, row
        cost[j], by[j] = best, chosen


@kernel
def thresholds(rows: Rows, chains: Integers, low: Integers, high: Integers) -> None:
    """Fills, for each row, the cost below which more would go on it and above which less would.

    chains: (depots, depots) costs of the cheapest chains
    low, high: (rows,) receive the costs, -NO_WAY and NO_WAY where there are none; wrong for rows that are
    neither at a limit nor alone at their customer, see `thresholds_without`
    """
    for j in range(len(rows.start) - 1):
        first, last = rows.start[j], rows.start[j + 1]
        for row in range(first, last):
            low[row], high[row] = -NO_WAY, NO_WAY
        for row in range(first, last):
            if rows.quantity[row] <= rows.lower[row]:
                continue
            i = rows.depot[row]
            for other in range(first, last):
                if other == row:
                    continue
                onward, back = chains[rows.depot[other], i], rows.cost[row]
                if onward < NO_WAY:
                    low[other] = max(low[other], back - onward)
                    if rows.quantity[other] < rows.upper[other]:
                        high[row] = min(high[row], rows.cost[other] + onward)


class Hard(NamedTuple):
    """Rows whose cheapest replacement may seem to be themselves: the row, its customer, LOW and HIGH."""

    row: Integers
    customer: Integers
    which: Integers


@kernel
def thresholds_without(rows: Rows, searched: Searched, hard: Hard, low: Integers, high: Integers) -> None:
    """Fills `low` and `high` of hard rows, through chains that do not use the row itself."""
    depots = len(searched.price)
    onward = searched.direct.copy()
    backward = searched.direct.T.copy()
    first_hop = np.empty(depots, dtype=np.int64)
    distance = np.empty(depots, dtype=np.int64)
    key = np.empty(depots, dtype=np.int64)
    for n in range(len(hard.row)):
        row, j = hard.row[n], hard.customer[n]
        i, first, last = rows.depot[row], rows.start[j], rows.start[j + 1]
        if hard.which[n] & LOW:
            low[row] = -NO_WAY
            for k in range(depots):
                first_hop[k] = searched.second[i, k] if searched.at[i, k] == j else searched.direct[i, k]
            for less in range(first, last):
                if less == row or rows.depot[less] != i or rows.quantity[less] <= rows.lower[less]:
                    continue
                for more in range(first, last):
                    if more != less and rows.quantity[more] < rows.upper[more]:
                        k = rows.depot[more]
                        first_hop[k] = min(first_hop[k], rows.cost[more] - rows.cost[less])
            for k in range(depots):
                key[k] = -searched.price[k]
            spread(i, first_hop, onward, key, distance)
            for less in range(first, last):
                there = distance[rows.depot[less]]
                if less != row and rows.quantity[less] > rows.lower[less] and there < NO_WAY:
                    low[row] = max(low[row], rows.cost[less] - there)
        if hard.which[n] & HIGH:
            for k in range(depots):
                first_hop[k] = searched.second[k, i] if searched.at[k, i] == j else searched.direct[k, i]
            for more in range(first, last):
                if more == row or rows.depot[more] != i or rows.quantity[more] >= rows.upper[more]:
                    continue
                for less in range(first, last):
                    if less != more and rows.quantity[less] > rows.lower[less]:
                        k = rows.depot[less]
                        first_hop[k] = min(first_hop[k], rows.cost[more] - rows.cost[less])
            for k in range(depots):
                key[k] = searched.price[k]
            spread(i, first_hop, backward, key, distance)
            high[row] = NO_WAY
            for more in range(first, last):
                there = distance[rows.depot[more]]
                if more != row and rows.quantity[more] < rows.upper[more] and there < NO_WAY:
                    high[row] = min(high[row], rows.cost[more] + there)


@kernel
def spread(source: int, first_hop: Integers, step: Integers, key: Integers, distance: Integers) -> None:
    """Shortest distances from a depot whose own hops are `first_hop`, all others `step` (Dijkstra 1959).

    key: (depots,) added to a distance it gives the order in which depots are final
    """
    depots = len(first_hop)
    final = np.zeros(depots, dtype=np.bool_)
    for k in range(depots):
        distance[k] = first_hop[k]
    distance[source] = 0
    final[source] = True
    while True:
        nearest = -1
        for k in range(depots):
            if final[k] or distance[k] >= NO_WAY:
                continue
            if nearest < 0 or distance[k] + key[k] < distance[nearest] + key[nearest]:
                nearest = k
        if nearest < 0:
            return
        final[nearest] = True
        here = distance[nearest]
        for k in range(depots):
            if step[nearest, k] < NO_WAY and here + step[nearest, k] < distance[k]:
                distance[k] = here + step[nearest, k]


@kernel
def find_tied(rows: Rows, near: Integers, far: Integers, found: Integers) -> int:
    """Fills the rows whose cost is the difference of the distances at their ends; how many they are.

    near: (depots,) and far: (customers,) distances, NO_WAY where there is none
    """
    count = 0
    for j in range(len(rows.start) - 1):
        there = far[j]
        if there >= NO_WAY:
            continue
        for row in range(rows.start[j], rows.start[j + 1]):
            here = near[rows.depot[row]]
            if here + rows.cost[row] == there and here < NO_WAY and rows.upper[row] > rows.lower[row]:
                found[count] = row
                count += 1
    return count


class Ties(NamedTuple):
    """Rows on shortest paths, each between a customer and a depot.

    depot, customer: (ties,) ends of each, customer by customer
    of_customer: (customers + 1,) ties of customer j are of_customer[j] up to of_customer[j+1]
    of_depot: (depots + 1,) and listed: ties of depot i are listed[of_depot[i]:of_depot[i+1]]; only those
    of customers that have several, since a path leaves a customer on another row than it came by
    """

    depot: Integers
    customer: Integers
    of_customer: Integers
    of_depot: Integers
    listed: Integers


@kernel
def most_over(ties: Ties, j: int, i: int, to_depot: Integers, to_customer: Integers, at_most: int) -> int:
    """The most, up to `at_most`, that can go over tied rows from customer j to depot i; MANY: no limit.

    Shortest augmenting paths (Edmonds & Karp 1972). `to_depot` and `to_customer` (ties,) are what each tie
    can take either way; they are changed to what is left.
    """
    customers, depots = len(ties.of_customer) - 1, len(ties.of_depot) - 1
    came_by = np.empty(customers + depots, dtype=np.int64)
    queue = np.empty(customers + depots, dtype=np.int64)
    goal = customers + i
    whole = 0
    while True:
        came_by[:] = -1
        queue[0], head, tail = j, 0, 1
        came_by[j] = -2
        while head < tail and came_by[goal] == -1:
            node = queue[head]
            head += 1
            if node < customers:
                for tie in range(ties.of_customer[node], ties.of_customer[node + 1]):
                    there = customers + ties.depot[tie]
                    if to_depot[tie] > 0 and came_by[there] == -1:
                        came_by[there] = tie
                        queue[tail] = there
                        tail += 1
            else:
                k = node - customers
                for place in range(ties.of_depot[k], ties.of_depot[k + 1]):
                    tie = ties.listed[place]
                    there = ties.customer[tie]
                    if to_customer[tie] > 0 and came_by[there] == -1:
                        came_by[there] = tie
                        queue[tail] = there
                        tail += 1
        if came_by[goal] == -1:
            return whole
        amount, node = at_most - whole, goal
        while node != j:
            tie = came_by[node]
            if node >= customers:
                amount, node = min(amount, to_depot[tie]), ties.customer[tie]
            else:
                amount, node = min(amount, to_customer[tie]), customers + ties.depot[tie]
        if amount >= MANY:
            return MANY
        if amount <= 0:
            return whole
        whole += amount
        node = goal
        while node != j:
            tie = came_by[node]
            change = amount if node >= customers else -amount
            to_depot[tie] -= change
            to_customer[tie] += change
            node = ties.customer[tie] if node >= customers else customers + ties.depot[tie]


@kernel
def most_for_each(
    ties: Ties, ends: Integers, depots: Integers, to_depot: Integers, to_customer: Integers, most: Integers
) -> None:
    """Fills `most_over` from each customer of `ends` to the depot beside it, each on its own."""
    for n in range(len(ends)):
        most[n] = most_over(ties, ends[n], depots[n], to_depot.copy(), to_customer.copy(), 2 * MANY)


@kernel
def more_at_both_ends(rows: Rows, chains: Integers, first: int, cost: Integers) -> None:
    """Fills what one more ordered and one more available cost together.

    cost: (customers from `first` on, depots)
    """
    for n in range(len(cost)):
        best = cost[n]
        best[:] = NO_WAY
        for row in range(rows.start[first + n], rows.start[first + n + 1]):
            if rows.quantity[row] < rows.upper[row]:
                onward, price = chains[rows.depot[row]], rows.cost[row]
                for i in range(len(best)):
                    there = min(NO_WAY, onward[i] + price) if onward[i] < NO_WAY else NO_WAY
                    best[i] = min(best[i], there)
