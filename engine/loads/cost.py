"""What quantities on rate rows come to: loads, costs, what is short, how far the aims are met."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.exact import Integers, total
from engine.loads.answer import Aim
from engine.loads.problem import LoadProblem


class Score(NamedTuple):
    """What plans are compared by: units that count against each aim, in order, and then cost."""

    aims: tuple[int, ...]
    cost: int


def loads_on(problem: LoadProblem, quantity: Integers) -> Integers:
    """(rows,) how many loads each row's quantity makes."""
    size = np.where(problem.load_size > 0, problem.load_size, np.maximum(quantity, 1))
    return -(-quantity // size)


def row_costs(problem: LoadProblem, quantity: Integers) -> Integers:
    """(rows,) what each row costs."""
    loads = loads_on(problem, quantity)
    size, rate, trip = problem.load_size, problem.per_unit, problem.trip_minimum
    full = np.maximum(loads - 1, 0)
    last = quantity - full * size
    by_trip = full * np.maximum(rate * size, trip) + np.where(loads > 0, np.maximum(rate * last, trip), 0)
    cost = np.where(trip > 0, by_trip, rate * quantity)
    charged: Integers = cost + problem.per_load * loads + problem.charge_per_use * (quantity > 0)
    return charged


def sent_by(problem: LoadProblem, quantity: Integers) -> Integers:
    """(depots,) what leaves each depot."""
    sent = np.zeros(problem.depots, dtype=np.int64)
    np.add.at(sent, problem.depot, quantity)
    return sent


def short_of(problem: LoadProblem, quantity: Integers) -> Integers:
    """(customers,) what each customer does not receive."""
    received = np.zeros(problem.customers, dtype=np.int64)
    np.add.at(received, problem.customer, quantity)
    return problem.demand - received


def cost_of_plan(problem: LoadProblem, quantity: Integers) -> int:
    """Everything: rows, openings, what is short and what stays."""
    sent = sent_by(problem, quantity)
    return (
        total(row_costs(problem, quantity))
        + total(problem.opening_charge[sent > 0])
        + total(problem.short_cost * short_of(problem, quantity))
        + total(problem.unsent_cost * (problem.supply - sent))
    )


def ranks_of(problem: LoadProblem) -> list[int]:
    """The ranks that occur among customers who ordered something and may not decline."""
    return sorted({int(rank) for rank in problem.rank[~problem.may_decline & (problem.demand > 0)]})


def score_of(problem: LoadProblem, quantity: Integers) -> Score:
    """How good a plan is; smaller is better."""
    short = short_of(problem, quantity)
    counts = ~problem.may_decline
    aims = [total(short[counts & (problem.rank == rank)]) for rank in ranks_of(problem)]
    if problem.must_move.any():
        kept = problem.must_move - sent_by(problem, quantity)
        aims.append(total(np.maximum(kept, 0)))
    return Score(tuple(aims), cost_of_plan(problem, quantity))


def aims_of(problem: LoadProblem, values: tuple[int, ...], bounds: tuple[int, ...]) -> tuple[Aim, ...]:
    """The aims of a score with their bounds, named."""
    names: list[tuple[str, int]] = [("short", rank) for rank in ranks_of(problem)]
    if problem.must_move.any():
        names.append(("must move", -1))
    return tuple(
        Aim("short" if name == "short" else "must move", rank, value, bound)
        for (name, rank), value, bound in zip(names, values, bounds, strict=True)
    )
