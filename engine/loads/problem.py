"""A week with whole vehicles in integers: depots, customers, rate rows that cost by the load."""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers, TooLarge, total
from engine.network import UNLIMITED

Flags = NDArray[np.bool_]

NO_LIMIT = -1
"""In `most_loads` and `haulier_most`: no limit."""

NO_HAULIER = -1
"""In `haulier`: the row counts against no haulier's limit."""

LARGEST_COST = 2**58
"""All that any plan may cost, term by term in absolute value, stays below this, so that sums cannot wrap."""


@dataclass(frozen=True, eq=False)
class LoadProblem:
    """Who can send how much to whom, by which haulier, where vehicles are whole.

    All arrays are int64 (flags: bool) and must not be changed afterwards. Quantities share one scale. A
    cost is quantity * cost per unit; charges (`opening_charge`, `per_load`, `trip_minimum`,
    `charge_per_use`) are given in that same scale, so that all costs can be added.

    Depots, one entry each:
    supply:         what it has; the rest stays
    must_move:      how much of it should be sent
    unsent_cost:    of one unit that stays, negative for a credit
    opening_charge: once if anything is sent from there; 0 where it is open already
    most_loads:     how many loads may leave it, NO_LIMIT for any number

    Customers, one entry each:
    demand:         what it ordered; what it does not receive is short
    short_cost:     of one unit short
    rank:           who is served first: 0 before 1 before 2
    may_decline:    served only where that pays; its rank does not matter
    one_depot:      all it receives comes from one single depot (by any of that depot's rows)
    start:          (customers + 1,) the rows of customer j are start[j] up to, not including, start[j+1]

    Rate rows, one entry each; x is the quantity on the row:
    depot:          index of the depot
    haulier:        index into `haulier_most`, NO_HAULIER for none
    per_unit:       cost of one unit, may be negative
    per_load:       cost of each load, full or not
    load_size:      most that one load carries; 0: whatever x is, it is one load
    trip_minimum:   what per_unit * quantity comes to at least, per load; 0 for none
    charge_per_use: once if x > 0
    at_least:       x is never below this
    at_most:        x is never above this, UNLIMITED for none
    smallest_drop:  x is 0 or at least this

    Hauliers:
    haulier_most:   most that all rows of the haulier carry together, NO_LIMIT for any quantity

    A row with x > 0 makes ceil(x / load_size) loads, all full but the last, and costs
    sum over loads of max(per_unit * quantity in it, trip_minimum) + per_load * loads + charge_per_use.

    Raises ValueError for lengths that differ, negative quantities or charges, indices out of range and
    lower limits above upper ones; TooLarge where costs could leave int64.
    """

    supply: Integers
    must_move: Integers
    unsent_cost: Integers
    opening_charge: Integers
    most_loads: Integers
    demand: Integers
    short_cost: Integers
    rank: Integers
    may_decline: Flags
    one_depot: Flags
    start: Integers
    depot: Integers
    haulier: Integers
    per_unit: Integers
    per_load: Integers
    load_size: Integers
    trip_minimum: Integers
    charge_per_use: Integers
    at_least: Integers
    at_most: Integers
    smallest_drop: Integers
    haulier_most: Integers

    def __post_init__(self) -> None:
        for field in fields(self):
            flags = field.name in FLAGS
            object.__setattr__(self, field.name, _array(field.name, getattr(self, field.name), flags))
        _check_lengths(self)
        _check_signs(self)
        _check_indices(self)
        _check_costs(self)

    @classmethod
    def of(cls, **given: Any) -> LoadProblem:
        """A problem from the figures that matter; all others take the value that changes nothing.

        supply, demand, start and depot must be given; lists will do.
        """
        sizes = {
            "depots": len(given["supply"]),
            "customers": len(given["demand"]),
            "rows": len(given["depot"]),
            "hauliers": len(given.get("haulier_most", ())),
        }
        filled: dict[str, Any] = {}
        for place, names in PLACES.items():
            for name in names:
                kind = np.bool_ if name in FLAGS else np.int64
                value = given.pop(name, None)
                if value is None:
                    value = np.full(sizes[place], NEUTRAL.get(name, 0), dtype=kind)
                filled[name] = np.asarray(value, dtype=kind)
        filled["start"] = np.asarray(given.pop("start"), dtype=np.int64)
        if given:
            raise ValueError(f"{', '.join(given)}: no such figures, see LoadProblem for the names.")
        return cls(**filled)

    @property
    def depots(self) -> int:
        """Number of depots."""
        return len(self.supply)

    @property
    def customers(self) -> int:
        """Number of customers."""
        return len(self.demand)

    @property
    def rows(self) -> int:
        """Number of rate rows."""
        return len(self.depot)

    @cached_property
    def customer(self) -> Integers:
        """(rows,) index of the customer that each row sends to."""
        return np.repeat(np.arange(self.customers, dtype=np.int64), np.diff(self.start))

    @cached_property
    def least(self) -> Integers:
        """(rows,) the smallest quantity above 0 that each row may carry."""
        return np.maximum(np.maximum(self.at_least, self.smallest_drop), 1)

    @cached_property
    def most(self) -> Integers:
        """(rows,) the most that each row can carry: its limit, the order, the stock, the haulier's limit."""
        most = np.minimum(self.at_most, self.demand[self.customer])
        most = np.minimum(most, self.supply[self.depot])
        if self.haulier_limited.any():
            limited = self.haulier_limited
            most[limited] = np.minimum(most[limited], self.haulier_most[self.haulier[limited]])
        return most

    @cached_property
    def haulier_limited(self) -> Flags:
        """(rows,) whether the row counts against a haulier's limit."""
        if not len(self.haulier_most):
            return np.zeros(self.rows, dtype=np.bool_)
        limited: Flags = (self.haulier >= 0) & (self.haulier_most[self.haulier] != NO_LIMIT)
        return limited


FLAGS = ("may_decline", "one_depot")

PLACES = {
    "depots": ("supply", "must_move", "unsent_cost", "opening_charge", "most_loads"),
    "customers": ("demand", "short_cost", "rank", "may_decline", "one_depot"),
    "rows": (
        "depot",
        "haulier",
        "per_unit",
        "per_load",
        "load_size",
        "trip_minimum",
        "charge_per_use",
        "at_least",
        "at_most",
        "smallest_drop",
    ),
    "hauliers": ("haulier_most",),
}

NEUTRAL = {"most_loads": NO_LIMIT, "haulier_most": NO_LIMIT, "haulier": NO_HAULIER, "at_most": UNLIMITED}

SIGNED = ("unsent_cost", "short_cost", "per_unit", "most_loads", "haulier_most", "haulier")


def _array(name: str, given: NDArray[Any], flags: bool) -> NDArray[Any]:
    array = np.asarray(given)
    if array.ndim != 1:
        raise ValueError(f"{name} has {array.ndim} dimensions (shape {array.shape}): give a flat list.")
    if array.size and array.dtype.kind not in ("b" if flags else "i"):
        wanted = "true or false" if flags else "whole numbers"
        raise ValueError(f"{name} holds {array.dtype} values: give {wanted}.")
    return np.require(array, dtype=np.bool_ if flags else np.int64, requirements=["C", "W", "A"])


def _check_lengths(problem: LoadProblem) -> None:
    sizes = {"depots": problem.depots, "customers": problem.customers, "rows": problem.rows}
    for place, size in sizes.items():
        for name in PLACES[place]:
            if len(getattr(problem, name)) != size:
                raise ValueError(f"{name} has {len(getattr(problem, name))} entries for {size} {place}.")
    start = problem.start
    if len(start) != problem.customers + 1:
        raise ValueError(f"start has {len(start)} entries for {problem.customers} customers: give one more.")
    if start[0] != 0 or start[-1] != problem.rows or np.any(start[1:] < start[:-1]):
        raise ValueError(f"start must rise from 0 to {problem.rows}, the number of rows.")


def _check_signs(problem: LoadProblem) -> None:
    for name in (name for names in PLACES.values() for name in names):
        values = getattr(problem, name)
        lowest = NO_LIMIT if name in ("most_loads", "haulier_most", "haulier") else 0
        if name in FLAGS or name in ("unsent_cost", "short_cost", "per_unit") or not len(values):
            continue
        if int(values.min()) < lowest:
            place = int(values.argmin())
            raise ValueError(f"{name}[{place}] is {values[place]}: it cannot be below {lowest}.")
    if np.any(problem.at_least > problem.at_most):
        row = int(np.argmax(problem.at_least > problem.at_most))
        raise ValueError(
            f"at_least[{row}] is {problem.at_least[row]} but at_most[{row}] is {problem.at_most[row]}: "
            f"lower the first or raise the second."
        )
    if np.any(problem.must_move > problem.supply):
        depot = int(np.argmax(problem.must_move > problem.supply))
        raise ValueError(f"must_move[{depot}] is more than supply[{depot}], of which it is a part.")


def _check_indices(problem: LoadProblem) -> None:
    for name, size in (("depot", problem.depots), ("haulier", len(problem.haulier_most))):
        values = getattr(problem, name)
        if len(values) and int(values.max()) >= size:
            row = int(values.argmax())
            raise ValueError(f"{name}[{row}] is {values[row]}, but there are {size}: indices start from 0.")


def _check_costs(problem: LoadProblem) -> None:
    """Twice the largest cost of every row, customer and depot, added up in Python's integers."""
    loads = np.where(problem.load_size > 0, -(-problem.most // np.maximum(problem.load_size, 1)), 1)
    largest = sum(
        total_product(np.abs(values), often)
        for values, often in (
            (problem.per_unit, problem.most),
            (problem.per_load + problem.trip_minimum, loads),
            (problem.charge_per_use, np.ones(problem.rows, dtype=np.int64)),
            (problem.short_cost, problem.demand),
            (problem.unsent_cost, problem.supply),
            (problem.opening_charge, np.ones(problem.depots, dtype=np.int64)),
        )
    )
    if largest > LARGEST_COST or total(problem.supply) + total(problem.demand) > LARGEST_COST:
        raise TooLarge(
            f"All costs together reach {largest}, up to {LARGEST_COST} can be computed with exactly: "
            f"use larger units or fewer decimal places."
        )


def total_product(one: Integers, other: Integers) -> int:
    """The sum of one[n] * other[n] as a Python integer."""
    return sum(a * b for a, b in zip(one.tolist(), other.tolist(), strict=True) if a and b)
