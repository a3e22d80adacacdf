"""What the search at customers reads and writes: arrays, bundled for kernels."""

from __future__ import annotations

from typing import NamedTuple

from engine.exact import Integers

NEVER = 2**61
"""Stands for the cost of what cannot be done."""


class Rows(NamedTuple):
    """Rate rows and customers as the search reads them; costs multiplied by the scale of prices.

    start:      (customers + 1,)
    depot:      (rows,)
    per_unit, trip_minimum, load_size: (rows,) as in LoadProblem
    least:      (rows,) smallest quantity above 0
    most:       (rows,) largest quantity; below `least` if the row carries nothing
    forced:     (rows,) 1 if the row cannot carry 0
    demand:     (customers,)
    short_most: (customers,) most that may be short
    one_depot:  (customers,) 1 if all must come from one depot
    """

    start: Integers
    depot: Integers
    per_unit: Integers
    trip_minimum: Integers
    load_size: Integers
    least: Integers
    most: Integers
    forced: Integers
    demand: Integers
    short_most: Integers
    one_depot: Integers


class Priced(NamedTuple):
    """What comes on top of `per_unit`, all multiplied by the scale of prices.

    unit:  (rows,) of each unit: prices of the depot's stock and of the haulier's limit
    load:  (rows,) of each load, its own charge included, never negative
    use:   (rows,) once if anything is carried, the charge per use included, never negative
    short: (customers,) of each unit short
    """

    unit: Integers
    load: Integers
    use: Integers
    short: Integers


class Answers(NamedTuple):
    """The cheapest ways; on entry `quantity` and `short` may hold ways that are known already.

    quantity: (rows,)
    short:    (customers,)
    value:    (customers,) cost of that way, NEVER if there is none
    lower:    (customers,) no way costs less
    """

    quantity: Integers
    short: Integers
    value: Integers
    lower: Integers


class Corners(NamedTuple):
    """Corners of the rows of one customer: those of its row n are at first[n] up to first[n+1].

    ratio: (rows of the customer,) what a unit costs at least on each row, NEVER where none can be had
    """

    first: Integers
    x: Integers
    cost: Integers
    ratio: Integers


class Sums(NamedTuple):
    """Reachable sums, step by step: their cost, how they came about; and room to sort them."""

    sum: Integers
    cost: Integers
    parent: Integers
    chosen: Integers
    order: Integers
    kept: Integers


class Room(NamedTuple):
    """What can still be given, and whose rows are whose.

    supply:   (depots,) units
    vehicles: (depots,) loads
    haulier:  (hauliers,) units
    whose:    (rows,) index of the haulier, or -1
    limit:    (rows,) the rows' own upper limits; `Rows.most` is changed as room changes
    """

    supply: Integers
    vehicles: Integers
    haulier: Integers
    whose: Integers
    limit: Integers


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


class Scratch(NamedTuple):
    """Room to work in.

    before:  (customers taken out, rows of one) their quantities before
    chosen:  (customers taken out,) who they are
    value:   (customers taken out,) what they cost before
    """

    corners: Corners
    sums: Sums
    active: Integers
    best: Integers
    before: Integers
    chosen: Integers
    value: Integers
