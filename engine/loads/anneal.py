"""Long runs of small rearrangements, slowly pickier about dearer plans, in short pieces."""

from __future__ import annotations

import time
from dataclasses import dataclass

import numpy as np

from engine.exact import Integers
from engine.loads.arrays import NEVER, Answers, Moves, Priced, Room, Rows
from engine.loads.cost import row_costs, short_of
from engine.loads.fit import priced_alone, room_beside, rows_alone
from engine.loads.problem import LoadProblem
from engine.loads.turns import LONG, rearrange, values_of

NEIGHBOURS = 60
"""So many customers count as near each other."""

TAKEN_OUT = 10
"""Customers that are taken out at once, at most."""

HOT = 40
"""At first a plan may be dearer by what an average customer costs, divided by this."""

PIECE = 200
"""Rounds of the first piece,"""

PIECE_SECONDS = 0.1
"""and about how long every later one takes."""

FIRST_ROUNDS = 60_000
"""Rounds of the first run; each one that finds nothing makes the next longer."""


@dataclass
class Annealing:
    """One run. `rounds` are all of its rounds, `done` those that have passed, `pace` those of a piece."""

    rows: Rows
    guide: Priced
    true: Priced
    room: Room
    answers: Answers
    moves: Moves
    rounds: int
    heat: int
    done: int = 0
    found: bool = False
    pace: int = PIECE


def begin(problem: LoadProblem, quantity: Integers, price: Integers, rounds: int, seed: int) -> Annealing:
    """A run from a plan that keeps all rules.

    price: (depots,) what a unit of the stock is worth, by which choices are guided
    """
    true = priced_alone(problem)
    guide = true._replace(unit=np.ascontiguousarray(true.unit + price[problem.depot]))
    rows = rows_alone(problem)
    never = np.full(problem.customers, NEVER, dtype=np.int64)
    answers = Answers(quantity.copy(), short_of(problem, quantity), never, never.copy())
    values_of(rows, true, answers)
    room = room_beside(problem, quantity)
    cost = float(np.abs(row_costs(problem, quantity)).mean()) * problem.rows / max(1, problem.customers)
    moves = Moves(
        _near(problem),
        problem.opening_charge,
        problem.supply,
        np.maximum(problem.supply - problem.must_move, room.supply),
        np.array([0, TAKEN_OUT, 0], dtype=np.int64),
        np.array([0, 0, 1 + seed * 7919 % (LONG - 2)], dtype=np.int64),
        quantity.copy(),
    )
    return Annealing(rows, guide, true, room, answers, moves, rounds, int(cost) // HOT)


def piece(run: Annealing) -> bool:
    """A piece of the run; says whether the best plan of the run, in `moves.best`, is a new one."""
    count = min(run.pace, run.rounds - run.done)
    begun = time.monotonic()
    run.moves.setting[0] = count
    run.moves.setting[2] = run.heat * (run.rounds - run.done) // run.rounds
    better = rearrange(run.rows, run.guide, run.true, run.room, run.answers, run.moves)
    taken = max(time.monotonic() - begun, 1e-6)
    run.pace = max(1, min(2 * run.pace, int(count * PIECE_SECONDS / taken), 100 * len(run.rows.demand)))
    run.done += count
    run.found |= better
    return better


def _near(problem: LoadProblem) -> Integers:
    """(customers, neighbours) for each customer, those whose good depots are most alike."""
    customers = problem.customers
    amount = np.minimum(problem.most, problem.demand[problem.customer])
    unit = row_costs(problem, np.maximum(amount, 0)) / np.maximum(amount, 1)
    dear = float(unit.max(initial=0.0)) + 1.0
    place = np.full((customers, problem.depots), dear)
    np.minimum.at(place, (problem.customer, problem.depot), np.where(amount > 0, unit, dear))
    place -= place.min(axis=1, keepdims=True)
    many = min(customers, NEIGHBOURS)
    square = (place**2).sum(axis=1)
    near = np.empty((customers, many), dtype=np.int64)
    for j in range(customers):
        distance = square - 2.0 * (place @ place[j])
        near[j] = np.argpartition(distance, many - 1)[:many]
    return near
