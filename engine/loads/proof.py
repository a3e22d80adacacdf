"""Checks a plan from the original figures, in Python's integers, knowing nothing of how it was found."""

from __future__ import annotations

from engine.exact import Integers
from engine.loads.problem import NO_LIMIT, LoadProblem


class NotValid(ArithmeticError):
    """A plan that breaks a sum or a limit; the message says which."""


def check(problem: LoadProblem, quantity: Integers) -> tuple[int, list[int]]:
    """The exact cost of a valid plan and the loads on each row.

    Raises NotValid with the first row, customer, depot or haulier where a rule is broken.
    """
    if len(quantity) != problem.rows:
        raise NotValid(f"There are {len(quantity)} quantities for {problem.rows} rows.")
    sent, leaving = [0] * problem.depots, [0] * problem.depots
    carried = [0] * len(problem.haulier_most)
    cost, loads = 0, []
    for j in range(problem.customers):
        received, homes = 0, set()
        for row in range(int(problem.start[j]), int(problem.start[j + 1])):
            x = int(quantity[row])
            _check_row(problem, row, x)
            vehicles = _vehicles(x, int(problem.load_size[row]))
            loads.append(len(vehicles))
            if not x:
                continue
            i, haulier = int(problem.depot[row]), int(problem.haulier[row])
            received += x
            homes.add(i)
            sent[i] += x
            leaving[i] += len(vehicles)
            if haulier >= 0:
                carried[haulier] += x
            cost += int(problem.charge_per_use[row]) + sum(_price(problem, row, part) for part in vehicles)
        short = int(problem.demand[j]) - received
        if short < 0:
            raise NotValid(f"Customer {j} receives {received}, it ordered {problem.demand[j]}.")
        if problem.one_depot[j] and len(homes) > 1:
            raise NotValid(f"Customer {j} takes from one depot, it receives from {sorted(homes)}.")
        cost += short * int(problem.short_cost[j])
    for i, (gone, many) in enumerate(zip(sent, leaving, strict=True)):
        supply, most = int(problem.supply[i]), int(problem.most_loads[i])
        if gone > supply:
            raise NotValid(f"Depot {i} sends {gone}, it has {supply}.")
        if most != NO_LIMIT and many > most:
            raise NotValid(f"Depot {i} sends {many} loads, it can send {most}.")
        cost += (supply - gone) * int(problem.unsent_cost[i])
        if gone:
            cost += int(problem.opening_charge[i])
    for haulier, quantity_carried in enumerate(carried):
        most = int(problem.haulier_most[haulier])
        if most != NO_LIMIT and quantity_carried > most:
            raise NotValid(f"Haulier {haulier} carries {quantity_carried}, it can carry {most}.")
    return cost, loads


def _check_row(problem: LoadProblem, row: int, x: int) -> None:
    least, most = int(problem.at_least[row]), int(problem.at_most[row])
    if x < least or x > most:
        raise NotValid(f"Row {row} carries {x}, its limits are {least} and {most}.")
    if 0 < x < int(problem.smallest_drop[row]):
        raise NotValid(f"Row {row} carries {x}, its smallest drop is {problem.smallest_drop[row]}.")


def _vehicles(x: int, size: int) -> list[int]:
    """What each load carries: full ones, and one with the rest."""
    if not x:
        return []
    if not size:
        return [x]
    full, rest = divmod(x, size)
    return [size] * full + ([rest] if rest else [])


def _price(problem: LoadProblem, row: int, part: int) -> int:
    by_rate, trip = int(problem.per_unit[row]) * part, int(problem.trip_minimum[row])
    return int(problem.per_load[row]) + (max(by_rate, trip) if trip else by_rate)
