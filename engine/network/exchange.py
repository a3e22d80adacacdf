"""The depot exchange: a primal-dual method for few depots and many customers.

At given depot prices every customer takes its cheapest rows. What is then too much at one depot and too
little at another is handed over along cheapest chains of exchanges at single customers, while the
prices rise; the network that is searched has the depots only. To start near the end, a sample of the
customers is solved first, with shares of the supply, then a larger one, then all. And of all customers
only those enter the search whose rows could change hands within the prices' expected movement; when the
prices move further, more are let in.

Hitchcock (1941) for the problem; Ford & Fulkerson (1956), Tomizawa (1971) and Edmonds & Karp (1972) for
the primal-dual method with prices; Ahuja, Magnanti & Orlin (1993), chapter 9, as a textbook.
"""

from __future__ import annotations

import numpy as np

from engine.exact import Integers, TooLarge, total
from engine.network.compiled import kernel, part
from engine.network.customers import (
    COMPLETE,
    FAR,
    SEVERAL,
    Rows,
    State,
    assign,
    classify,
    measure,
    price_customers,
    take_over,
)
from engine.network.flow import Contradiction, Cut
from engine.network.handover import let_in, list_all, new_users
from engine.network.paths import (
    DONE,
    REACHED,
    RELIST,
    STUCK,
    TOO_FAR,
    WIDEN,
    Search,
    find_paths,
    level_out,
    new_search,
)
from engine.network.problem import Figures, Problem

SAMPLE = 8
"""Customers per depot in the smallest sample."""

STEP = 4
"""Each sample is so many times larger than the one before."""

WIDER = 4
"""Each time the prices move further than expected, so many times more customers enter the search."""

SUITED = 0
"""In place of `known`: the flow in `state` suits its prices at all customers, and `excess` goes with it."""

UNSERVABLE = 5
"""Outcome: one customer's rows cannot carry what it needs."""


def solve(
    problem: Problem, price: Integers, quantity: Integers | None
) -> tuple[Integers, Integers, Integers]:
    """A least-cost flow of `problem`: quantities per row, depot prices, customer prices, not yet proved.

    price:    (depots,) prices to start from
    quantity: (rows,) quantities to start from, as far as they suit the prices; None to start afresh
    Raises Contradiction with the cut if there is no flow, TooLarge if prices could leave int64.
    """
    _check_reach(problem)
    rows = _without_lower_limits(problem)
    state = _state(problem, price)
    if quantity is None:
        state.flow[:] = 0
    else:
        above = quantity if problem.at_least is None else quantity - problem.at_least
        np.maximum(above, 0, out=state.flow)
    outcome, place = run(rows, state, quantity is not None)
    return _answer(problem, rows, state, outcome, place)


def resume(
    problem: Problem, before: Problem, quantity: Integers, price: Integers
) -> tuple[Integers, Integers, Integers] | None:
    """`solve` from a least-cost flow of `before`, which has the same rows and limits and other quantities.

    All customers whose orders are unchanged keep what they have, and nothing is sorted or measured anew.

    quantity, price: of the least-cost flow
    Returns None where it does not come to an end; raises Contradiction with the cut if there is no flow.
    """
    if not _within_reach(problem):
        return None
    rows = _without_lower_limits(problem)
    state = _state(problem, price)
    state.excess[:] = before.supply - problem.supply
    above = quantity if problem.at_least is None else quantity - problem.at_least
    changed = np.flatnonzero(before.demand != problem.demand)
    if problem.look.every and problem.at_most is None:
        rows.kind[:] = COMPLETE
    else:
        classify(rows)
    place = take_over(rows, state, above, changed, 1)
    outcome = UNSERVABLE
    if place < 0:
        outcome, place = solve_sample(rows, state, new_search(problem.depots), 1, SUITED)
    if outcome in (WIDEN, TOO_FAR):
        return None
    return _answer(problem, rows, state, outcome, place)


def _state(problem: Problem, price: Integers) -> State:
    """These prices and no flow yet."""
    depots = problem.depots
    return State(
        np.empty(problem.rows, dtype=np.int64),
        price.copy(),
        np.zeros(depots, dtype=np.int64),
        np.full(problem.customers, SEVERAL, dtype=np.int64),
        np.empty((depots, depots), dtype=np.int64),
        np.empty((depots, depots), dtype=np.int64),
    )


def _answer(
    problem: Problem, rows: Rows, state: State, outcome: int, place: int
) -> tuple[Integers, Integers, Integers]:
    """Quantities, depot prices and customer prices of a search that has ended."""
    if outcome == TOO_FAR:
        raise TooLarge("Prices grow beyond what can be computed exactly: use a larger currency unit.")
    if outcome == UNSERVABLE:
        nobody = np.zeros(problem.depots, dtype=bool)
        raise Contradiction(cut(problem, nobody, np.arange(problem.customers) == place))
    if outcome == STUCK:
        raise Contradiction(_cut_of_stuck(problem, rows, state))
    customer_price = np.empty(problem.customers, dtype=np.int64)
    price_customers(rows, state, customer_price)
    if problem.depots:
        customer_price += state.price[0]
        state.price[:] -= state.price[0]
    if problem.at_least is not None:
        state.flow[:] += problem.at_least
    return state.flow, state.price, customer_price


def cut(problem: Problem, depots: np.ndarray, customers: np.ndarray) -> Cut:
    """The figures of a cut: `depots` and `customers` are masks, see `Cut`."""
    from_inside = depots[problem.depot]
    to_inside = customers[problem.customer]
    limited = bound = 0
    if problem.at_most is not None:
        limited = total(problem.at_most[~from_inside & to_inside])
    if problem.at_least is not None:
        bound = total(problem.at_least[from_inside & ~to_inside])
    return Cut(
        depots=tuple(np.flatnonzero(depots).tolist()),
        customers=tuple(np.flatnonzero(customers).tolist()),
        needed=total(problem.demand[customers]),
        brought=total(problem.supply[depots]),
        limited=limited,
        bound=bound,
    )


def _cut_of_stuck(problem: Problem, rows: Rows, state: State) -> Cut:
    """Depots that the search reaches have too much, and their customers can take nothing from others."""
    search = new_search(problem.depots)
    find_paths(rows, state, new_users(rows, state, np.arange(0)), search)
    depots = search.reach < REACHED
    customers = np.zeros(problem.customers, dtype=bool)
    customers[problem.customer[depots[problem.depot] & (state.flow > 0)]] = True
    return cut(problem, depots, customers)


def _check_reach(problem: Problem) -> None:
    """The longest path, twice the largest cost per depot, must stay below every bound of the search."""
    if not _within_reach(problem):
        raise TooLarge(
            f"A cost of {problem.dearest} is too large for {problem.depots} depots, up to "
            f"{_dearest_within_reach(problem)} can be computed with exactly: use a larger currency unit."
        )


def _within_reach(problem: Problem) -> bool:
    return problem.dearest <= _dearest_within_reach(problem)


def _dearest_within_reach(problem: Problem) -> int:
    return int(2**57 // (problem.depots + 1))


def _without_lower_limits(problem: Problem) -> Rows:
    """The same problem with lower limits taken off everywhere; raises Contradiction if they do not fit."""
    supply, demand, at_least, at_most = problem.supply, problem.demand, problem.at_least, problem.at_most
    room = np.empty(0, dtype=np.int64) if at_most is None else at_most
    if at_least is not None:
        supply, demand = supply.copy(), demand.copy()
        everybody = np.ones(problem.depots, dtype=bool)
        outcome, place = take_off(problem.figures, supply, demand)
        if outcome == 1:
            raise Contradiction(cut(problem, everybody, np.arange(problem.customers) != place))
        if outcome == 2:
            nobody = np.zeros(problem.customers, dtype=bool)
            raise Contradiction(cut(problem, np.arange(problem.depots) == place, nobody))
        if at_most is not None:
            room = at_most - at_least
    kind = np.empty(problem.customers, dtype=np.uint8)
    return Rows(supply, demand, problem.start, problem.depot, problem.cost, room, kind)


@kernel
def take_off(figures: Figures, supply: Integers, demand: Integers) -> tuple[int, int]:
    """Takes the lower limits off `supply` and `demand`.

    Returns (0, 0), (1, customer) or (2, depot) where they ask for more than there is.
    """
    for j in range(len(demand)):
        for row in range(figures.start[j], figures.start[j + 1]):
            bound, i = figures.at_least[row], figures.depot[row]
            if bound > demand[j]:
                return 1, j
            if bound > supply[i]:
                return 2, i
            demand[j] -= bound
            supply[i] -= bound
    return 0, 0


def run(rows: Rows, state: State, again: bool) -> tuple[int, int]:
    """Samples first, then all customers. Returns the outcome, and the customer that cannot be served.

    again: whether `state.flow` holds an earlier flow; then no samples are needed
    """
    depots, customers = len(rows.supply), len(rows.demand)
    search = new_search(depots)
    classify(rows)
    stride, known = 1, 1
    if not again:
        known = customers + 1
        while customers // (stride * STEP) > SAMPLE * depots:
            stride *= STEP
    while True:
        outcome, place = solve_sample(rows, state, search, stride, known)
        if stride == 1 or outcome in (UNSERVABLE, TOO_FAR):
            return outcome, place
        known = stride
        stride //= STEP


@kernel
def solve_sample(rows: Rows, state: State, search: Search, stride: int, known: int) -> tuple[int, int]:
    """Solves every `stride`-th customer, with shares of the supply, from the prices and flow in `state`.

    known: every so many-th customer has flow already, or SUITED
    """
    depots = len(rows.supply)
    chosen = np.arange(0, len(rows.demand), stride)
    gap = np.zeros(len(chosen), dtype=np.int64)
    wanted = len(chosen)
    if known != SUITED:
        wanted = len(chosen) // 16 + 4 * depots
        share_out(rows, chosen, stride, state.excess)
        place = assign(rows, state, chosen, known, gap)
        if place >= 0:
            return UNSERVABLE, place
    users = new_users(rows, state, chosen)
    inside = np.zeros(len(chosen), dtype=np.uint8)
    clear(state)
    while True:
        slack = slack_for(gap, wanted)
        wanted *= WIDER
        if known == SUITED:
            list_all(rows, state, users)
            search.unknown[:] = 1
        else:
            let_in(rows, state, users, chosen, gap, slack, inside)
        outcome = level_out(rows, state, users, search, slack)
        if outcome in (DONE, STUCK, TOO_FAR) or (outcome == WIDEN and known == SUITED):
            return outcome, 0
        if outcome == RELIST:
            users = new_users(rows, state, chosen)
            clear(state)
            for n in range(len(chosen)):
                inside[n] = 0
        measure(rows, state, chosen, gap)


@part
def clear(state: State) -> None:
    """Forgets all exchanges."""
    for i in range(len(state.price)):
        for k in range(len(state.price)):
            state.handover[i, k] = FAR
            state.via[i, k] = -1


@kernel
def slack_for(gap: Integers, wanted: int) -> int:
    """A gap that about `wanted` customers do not exceed, judged by some of them; FAR if it is for most."""
    if 2 * wanted >= len(gap):
        return FAR
    some = np.empty(255, dtype=np.int64)
    count = min(255, len(gap))
    for n in range(count):
        here = gap[n * len(gap) // count]
        place = n
        while place > 0 and some[place - 1] > here:
            some[place] = some[place - 1]
            place -= 1
        some[place] = here
    return int(some[wanted * count // len(gap)])


@part
def share_out(rows: Rows, chosen: Integers, stride: int, excess: Integers) -> None:
    """Sets `excess` to minus each depot's supply, or to minus its share for a sample.

    Shares are only about right, which is enough for prices to start from.
    """
    sampled, whole = 0.0, 0.0
    for j in chosen:
        sampled += rows.demand[j]
    for i in range(len(excess)):
        whole += rows.supply[i]
    for i in range(len(excess)):
        excess[i] = -rows.supply[i]
        if stride > 1 and whole > 0.0:
            excess[i] = -np.int64(rows.supply[i] * (sampled / whole)) - 1
