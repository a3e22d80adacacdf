"""The week as one integer model for HiGHS: built sparse, tightened where that pays.

The whole of it is what a general code makes of a week; of parts of it, with the other customers as they are,
it betters a plan. What comes back is rounded to whole loads and solved again exactly elsewhere.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import highspy
import numpy as np
from numpy.typing import NDArray

from engine.exact import Integers, total
from engine.loads.cost import row_costs, sent_by, short_of
from engine.loads.highs import INFINITE, OPTIMAL, quiet, run_until
from engine.loads.problem import NO_LIMIT, Flags, LoadProblem
from engine.loads.stage import Stage

Floats = NDArray[np.float64]


@dataclass
class Sparse:
    """A model while it is written: columns, and rows with their coefficients."""

    cost: list[float] = field(default_factory=list)
    lower: list[float] = field(default_factory=list)
    upper: list[float] = field(default_factory=list)
    whole: list[bool] = field(default_factory=list)
    row_lower: list[float] = field(default_factory=list)
    row_upper: list[float] = field(default_factory=list)
    begin: list[int] = field(default_factory=list)
    column: list[int] = field(default_factory=list)
    value: list[float] = field(default_factory=list)

    def add(self, cost: float, lower: float, upper: float, whole: bool = False) -> int:
        """A column; returns its number."""
        self.cost.append(cost)
        self.lower.append(lower)
        self.upper.append(upper)
        self.whole.append(whole)
        return len(self.cost) - 1

    def limit(self, lower: float, upper: float, entries: list[tuple[int, float]]) -> None:
        """A row."""
        self.row_lower.append(lower)
        self.row_upper.append(upper)
        self.begin.append(len(self.column))
        self.column.extend(column for column, _ in entries)
        self.value.extend(value for _, value in entries)

    def solver(self) -> highspy.Highs:
        """HiGHS with this model."""
        model = highspy.HighsLp()
        model.num_col_, model.num_row_ = len(self.cost), len(self.row_lower)
        model.col_cost_, model.col_lower_, model.col_upper_ = map(
            np.array, (self.cost, self.lower, self.upper)
        )
        model.row_lower_, model.row_upper_ = np.array(self.row_lower), np.array(self.row_upper)
        model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
        model.a_matrix_.start_ = np.array([*self.begin, len(self.column)])
        model.a_matrix_.index_ = np.array(self.column)
        model.a_matrix_.value_ = np.array(self.value)
        kinds = highspy.HighsVarType
        model.integrality_ = [kinds.kInteger if one else kinds.kContinuous for one in self.whole]
        solver = quiet()
        solver.passModel(model)
        return solver


@dataclass(frozen=True, eq=False)
class Compact:
    """A model with what its columns stand for; -1 where there is none.

    quantity, loads, used: (rows,) columns of the quantity, of the number of loads, of being used
    unit, money: what quantities and costs are divided by
    constant:    cost of all that is not in the model
    """

    solver: highspy.Highs
    quantity: Integers
    loads: Integers
    used: Integers
    unit: float
    money: float
    constant: float


@dataclass(frozen=True, eq=False)
class Found:
    """What HiGHS came back with; both may be missing.

    quantity: (rows,) rounded to integers
    bound:    what it claims that no plan of the model costs less than
    """

    quantity: Integers | None
    bound: float | None
    optimal: bool


def compact(stage: Stage, open_rows: Flags, kept: Integers, tight: bool = True) -> Compact:
    """The model of the rows in `open_rows`, with the quantities `kept` on all others.

    tight: with the least number of loads that each order needs as a cut
    """
    problem = stage.problem
    free = np.zeros(problem.customers, dtype=np.bool_)
    free[problem.customer[open_rows]] = True
    kept = np.where(open_rows, 0, kept)
    unit, money = _units(problem)
    model = Sparse()
    columns = {name: np.full(problem.rows, -1, dtype=np.int64) for name in ("quantity", "loads", "used")}
    rows = np.flatnonzero(open_rows & (problem.most >= problem.least))
    openings = _openings(problem, model, money, kept)
    for row in rows.tolist():
        _row_columns(problem, model, columns, openings, (row, unit, money))
    _customers(stage, model, columns, free, (unit, money), kept, tight)
    _depots(stage, model, columns, openings, (unit, money), kept)
    constant = _constant(problem, free, kept)
    return Compact(
        model.solver(), columns["quantity"], columns["loads"], columns["used"], unit, money, constant
    )


def _constant(problem: LoadProblem, free: Flags, kept: Integers) -> float:
    """What costs the same in every plan of the model: kept rows, stocks as if all of the rest stayed."""
    sent, received = sent_by(problem, kept), problem.demand - short_of(problem, kept)
    cost = total(row_costs(problem, kept)) + total(problem.opening_charge[sent > 0])
    cost += total(problem.unsent_cost * (problem.supply - sent))
    cost += total((problem.short_cost * (problem.demand - received))[~free])
    return float(cost)


def _units(problem: LoadProblem) -> tuple[float, float]:
    sizes = problem.load_size[problem.load_size > 0]
    unit = float(np.median(sizes)) if len(sizes) else max(1.0, float(np.mean(problem.demand)))
    cost = np.abs(problem.per_unit) * np.minimum(problem.most, int(unit)) + problem.per_load
    cost = cost + problem.charge_per_use
    return unit, max(1.0, float(np.median(cost)) / 100 if len(cost) else 1.0)


def _openings(problem: LoadProblem, model: Sparse, money: float, kept: Integers) -> Integers:
    """(depots,) the column of each depot's opening, -1 where it costs nothing or is open anyway."""
    busy = np.zeros(problem.depots, dtype=np.bool_)
    busy[problem.depot[kept > 0]] = True
    columns = np.full(problem.depots, -1, dtype=np.int64)
    for i in np.flatnonzero((problem.opening_charge > 0) & ~busy).tolist():
        columns[i] = model.add(float(problem.opening_charge[i]) / money, 0.0, 1.0, True)
    return columns


def _row_columns(
    problem: LoadProblem,
    model: Sparse,
    columns: dict[str, Integers],
    openings: Integers,
    about: tuple[int, float, float],
) -> None:
    """Quantity, loads and use of one row, tied together."""
    row, unit, money = about
    most, least, size = (int(part[row]) for part in (problem.most, problem.least, problem.load_size))
    forced = int(problem.at_least[row]) > 0
    rate, trip, use = (
        int(part[row]) for part in (problem.per_unit, problem.trip_minimum, problem.charge_per_use)
    )
    by_load = int(problem.per_load[row])
    i = int(problem.depot[row])
    x = model.add(rate * unit / money, least / unit if forced else 0.0, most / unit)
    columns["quantity"][row] = x
    limited = int(problem.most_loads[i]) != NO_LIMIT
    single = size == 0 or size >= most
    steps = by_load > 0 or trip > 0 or limited
    loads = -1
    if steps and not single:
        loads = model.add(by_load / money, 1.0 if forced else 0.0, float(-(-most // size)), True)
        columns["loads"][row] = loads
        model.limit(-INFINITE, 0.0, [(x, 1.0), (loads, -size / unit)])
    one_depot = bool(problem.one_depot[problem.customer[row]])
    if use > 0 or least > 1 or one_depot or (steps and single) or openings[i] >= 0:
        used = model.add((use + (by_load if single else 0)) / money, 1.0 if forced else 0.0, 1.0, True)
        columns["used"][row] = used
        model.limit(-INFINITE, 0.0, [(x, 1.0), (used, -most / unit)])
        if least > 1 and not forced:
            model.limit(0.0, INFINITE, [(x, 1.0), (used, -least / unit)])
        if loads >= 0:
            model.limit(0.0, INFINITE, [(loads, 1.0), (used, -1.0)])
        if openings[i] >= 0:
            model.limit(-INFINITE, 0.0, [(used, 1.0), (int(openings[i]), -1.0)])
    if trip > 0:
        lacking = model.add(1.0 / money * unit, 0.0, INFINITE)
        if single:
            entries = [(lacking, unit), (x, rate * unit), (columns["used"][row], -float(trip))]
            model.limit(0.0, INFINITE, [(int(c), v / money) for c, v in entries])
        elif rate * size <= trip:
            entries = [(lacking, unit), (x, rate * unit), (loads, -float(trip))]
            model.limit(0.0, INFINITE, [(int(c), v / money) for c, v in entries])
        else:
            entries = [(lacking, unit), (x, rate * unit), (loads, -float(rate * size))]
            model.limit((trip - rate * size) / money, INFINITE, [(int(c), v / money) for c, v in entries])


def _customers(
    stage: Stage,
    model: Sparse,
    columns: dict[str, Integers],
    free: Flags,
    units: tuple[float, float],
    kept: Integers,
    tight: bool,
) -> None:
    """Sums at customers, what is short, caps on it, and one depot only."""
    problem = stage.problem
    unit, money = units
    short_column = np.full(problem.customers, -1, dtype=np.int64)
    received = np.zeros(problem.customers, dtype=np.int64)
    np.add.at(received, problem.customer, kept)
    for j in np.flatnonzero(free).tolist():
        rows = range(int(problem.start[j]), int(problem.start[j + 1]))
        entries = [(int(columns["quantity"][row]), 1.0) for row in rows if columns["quantity"][row] >= 0]
        if stage.short_most[j] > 0:
            short_column[j] = model.add(
                float(problem.short_cost[j]) * unit / money, 0.0, float(stage.short_most[j]) / unit
            )
            entries.append((int(short_column[j]), 1.0))
        needed = float(problem.demand[j] - received[j]) / unit
        model.limit(needed, needed, entries)
        loads = [row for row in rows if columns["loads"][row] >= 0]
        sizes = {int(problem.load_size[row]) for row in loads}
        if tight and not stage.short_most[j] and len(sizes) == 1 and len(loads) == len(entries):
            enough = -(-int(problem.demand[j] - received[j]) // sizes.pop())
            model.limit(float(enough), INFINITE, [(int(columns["loads"][row]), 1.0) for row in loads])
        if problem.one_depot[j]:
            _one_depot(problem, model, columns, j)
    for group, most in stage.caps:
        outside = int((problem.demand - received)[group & ~free].sum())
        entries = [(int(short_column[j]), 1.0) for j in np.flatnonzero(group & free) if short_column[j] >= 0]
        if entries:
            model.limit(-INFINITE, (most - outside) / unit, entries)


def _one_depot(problem: LoadProblem, model: Sparse, columns: dict[str, Integers], j: int) -> None:
    chosen: dict[int, int] = {}
    for row in range(int(problem.start[j]), int(problem.start[j + 1])):
        used = int(columns["used"][row])
        if used < 0:
            continue
        i = int(problem.depot[row])
        if i not in chosen:
            chosen[i] = model.add(0.0, 0.0, 1.0, True)
        model.limit(-INFINITE, 0.0, [(used, 1.0), (chosen[i], -1.0)])
    if chosen:
        model.limit(-INFINITE, 1.0, [(column, 1.0) for column in chosen.values()])


def _depots(
    stage: Stage,
    model: Sparse,
    columns: dict[str, Integers],
    openings: Integers,
    units: tuple[float, float],
    kept: Integers,
) -> None:
    """Stocks, loads, what must move, openings, and the hauliers' limits."""
    problem = stage.problem
    unit, money = units
    gone = np.zeros(problem.depots, dtype=np.int64)
    np.add.at(gone, problem.depot, kept)
    size = np.where(problem.load_size > 0, problem.load_size, np.maximum(kept, 1))
    many = -(-kept // size)
    at: list[list[int]] = [[] for _ in range(problem.depots)]
    for row in np.flatnonzero(columns["quantity"] >= 0).tolist():
        at[int(problem.depot[row])].append(row)
    missing = []
    for i, rows in enumerate(at):
        entries = [(int(columns["quantity"][row]), 1.0) for row in rows]
        supply = float(problem.supply[i] - gone[i]) / unit
        credit = -float(problem.unsent_cost[i]) * unit / money
        for column, _ in entries:
            model.cost[column] += credit
        needed = int(problem.must_move[i] - gone[i])
        if needed > 0 and (stage.must_most is not None or stage.must_cost):
            lacks = model.add(stage.must_cost * unit / money, 0.0, needed / unit)
            missing.append((lacks, 1.0))
            model.limit(needed / unit, INFINITE, [*entries, (lacks, 1.0)])
        if openings[i] >= 0:
            entries = [*entries, (int(openings[i]), -supply)]
            supply = 0.0
        if entries:
            model.limit(-INFINITE, supply, entries)
        if problem.most_loads[i] != NO_LIMIT:
            vehicles = [
                int(columns["loads"][row] if columns["loads"][row] >= 0 else columns["used"][row])
                for row in rows
            ]
            left = float(problem.most_loads[i] - many[problem.depot == i].sum())
            model.limit(-INFINITE, left, [(column, 1.0) for column in vehicles])
    if stage.must_most is not None and missing:
        model.limit(-INFINITE, stage.must_most / unit, missing)
    for haulier in np.flatnonzero(problem.haulier_most != NO_LIMIT).tolist():
        mine = problem.haulier == haulier
        entries = [(int(c), 1.0) for c in columns["quantity"][mine & (columns["quantity"] >= 0)]]
        left = float(problem.haulier_most[haulier] - kept[mine].sum()) / unit
        if entries:
            model.limit(-INFINITE, left, entries)


def run(
    model: Compact,
    start: Integers | None,
    should_stop: Callable[[], bool],
    seconds: float,
    tell: Callable[[Integers], None] | None = None,
) -> Found:
    """Solves the model, from a plan if there is one, until it is done or told to stop.

    tell: told of every better plan on the way, rounded to integers; from another thread
    """
    solver = model.solver
    if start is not None:
        place = np.flatnonzero(model.quantity >= 0)
        used = np.flatnonzero(model.used >= 0)
        columns = np.concatenate([model.quantity[place], model.used[used]]).astype(np.int32)
        values = np.concatenate([start[place] / model.unit, (start[used] > 0).astype(np.float64)])
        solver.setSolution(len(columns), columns, values)
    run_until(solver, should_stop, seconds, None if tell is None else lambda v: tell(_quantity(model, v)))
    info = solver.getInfo()
    bound = float(info.mip_dual_bound)
    optimal = solver.getModelStatus() == OPTIMAL
    claimed = bound * model.money + model.constant if np.isfinite(bound) else None
    if info.primal_solution_status != highspy.SolutionStatus.kSolutionStatusFeasible:
        return Found(None, claimed, optimal)
    return Found(_quantity(model, np.array(solver.getSolution().col_value)), claimed, optimal)


def _quantity(model: Compact, value: Floats) -> Integers:
    """(rows,) what the columns say, rounded."""
    quantity = np.zeros(len(model.quantity), dtype=np.int64)
    known = model.quantity >= 0
    quantity[known] = np.rint(value[model.quantity[known]] * model.unit).astype(np.int64)
    return quantity
