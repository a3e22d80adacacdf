"""The linear programme over ways to serve customers, and the generation of its columns.

Every customer takes a mixture of its ways; depots, hauliers, openings and aims couple them (Dantzig & Wolfe
1960; Gilmore & Gomory 1961). Its prices give new ways and the proved bound; prices are drawn towards the best
ones known, which settles them sooner (Wentges 1997).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import highspy
import numpy as np
from scipy.sparse import coo_array

from engine.exact import Integers
from engine.loads.arrays import NEVER, Answers
from engine.loads.cost import loads_on, short_of
from engine.loads.highs import INFINITE, OPTIMAL, quiet
from engine.loads.patterns import Patterns, allowed, joined, no_patterns, patterns_of
from engine.loads.prices import Floats, Prices, answers_for, between, bound_at, no_prices
from engine.loads.problem import NO_LIMIT
from engine.loads.stage import Node, Stage, rounded_up, rows_of

TOWARDS_BEST = 0.6
"""Share of the best prices known in the prices that are tried."""

ROUNDS = 400
"""Most rounds at one node; prices settle far earlier."""

SETTLED = 1e-10
"""Part of the programme's value that the bound may lack when prices count as settled."""


@dataclass
class Master:
    """The linear programme of one stage while it grows.

    Its quantities are in units of `quantity_unit`, its costs in units of `cost_unit`.
    at:        where each kind of its rows begins; `use_row` maps a rate row to its row, -1 for none
    patterns:  the ways, in the order of their columns behind the first `fixed` columns
    """

    stage: Stage
    solver: highspy.Highs
    quantity_unit: float
    cost_unit: float
    at: dict[str, int]
    columns: dict[str, int]
    fixed: int
    use_row: Integers
    patterns: Patterns = field(default_factory=no_patterns)
    penalty: float = 1.0
    node: Node | None = None


@dataclass(frozen=True, eq=False)
class Bounded:
    """What was found out about a node.

    bound:  no plan of it costs less, in units of cost; None if it has no plan
    weight: (ways,) how the linear programme mixes the ways; empty if it was not needed to the end
    opened: (depots,) how far each depot is open in it
    prices: that prove the bound
    exact:  whether the mixture serves everybody and prices have settled
    """

    bound: int | None
    weight: Floats
    opened: Floats
    prices: Prices
    exact: bool


def master_of(stage: Stage) -> Master:
    """The programme without any ways yet: depots, and a penalty for serving a customer in none."""
    problem = stage.problem
    depots, customers = problem.depots, problem.customers
    quantity_unit = max(1.0, float(np.mean(problem.demand)) if customers else 1.0)
    cost_unit = _usual_cost(stage)
    loads = np.flatnonzero(problem.most_loads != NO_LIMIT)
    hauliers = np.flatnonzero(problem.haulier_most != NO_LIMIT)
    opening = np.flatnonzero(problem.opening_charge > 0)
    at, row = {}, 0
    for name, size in (
        ("serve", customers),
        ("depot", depots),
        ("load", depots),
        ("haulier", len(problem.haulier_most)),
        ("cap", len(stage.caps)),
        ("must", 1),
        ("moved", depots),
        ("open", depots),
        ("end", 0),
    ):
        at[name] = row
        row += size
    lower, upper = np.full(row, -INFINITE), np.full(row, INFINITE)
    lower[:customers] = upper[:customers] = 1.0
    lower[at["depot"] : at["depot"] + depots] = upper[at["depot"] : at["depot"] + depots] = 0.0
    upper[at["load"] + loads] = problem.most_loads[loads]
    upper[at["haulier"] + hauliers] = problem.haulier_most[hauliers] / quantity_unit
    upper[at["cap"] : at["must"]] = [most / quantity_unit for _, most in stage.caps]
    if stage.must_most is not None:
        upper[at["must"]] = stage.must_most / quantity_unit
    lower[at["moved"] : at["open"]] = problem.must_move / quantity_unit
    upper[at["open"] + opening] = 0.0

    solver = quiet()
    solver.setOptionValue("presolve", "off")
    solver.setOptionValue("solver", "simplex")
    model = highspy.HighsLp()
    model.num_row_, model.num_col_ = row, 0
    model.row_lower_, model.row_upper_ = lower, upper
    solver.passModel(model)
    names = ("sent", "kept", "open", "lack")
    columns = {name: customers + n * depots for n, name in enumerate(names)}
    ones, each = np.ones(customers), np.arange(depots)
    _add(solver, ones * 1.0, ones * INFINITE, (np.arange(customers), np.arange(customers), ones))
    supply = problem.supply / quantity_unit
    unit = quantity_unit / cost_unit
    entries = [(each, at["depot"] + each, -np.ones(depots)), (each, at["moved"] + each, np.ones(depots))]
    entries.append((each, at["open"] + each, np.ones(depots)))
    credit: Floats = (problem.unsent_cost * -unit).astype(np.float64)
    _add(solver, credit, supply, _together(entries))
    entries = [
        (each, np.full(depots, at["must"]), np.ones(depots)),
        (each, at["moved"] + each, np.ones(depots)),
    ]
    _add(
        solver, np.full(depots, stage.must_cost * unit), problem.must_move / quantity_unit, _together(entries)
    )
    _add(solver, problem.opening_charge / cost_unit, np.ones(depots), (each, at["open"] + each, -supply))
    _add(solver, np.ones(depots), np.full(depots, INFINITE), (each, at["moved"] + each, np.ones(depots)))
    use_row = np.full(problem.rows, -1, dtype=np.int64)
    return Master(stage, solver, quantity_unit, cost_unit, at, columns, customers + 4 * depots, use_row)


Entries = tuple[Integers, Integers, Floats]
"""Column, row and value of some coefficients."""


def _together(entries: list[Entries]) -> Entries:
    column, row, value = (np.concatenate(part) for part in zip(*entries, strict=True))
    return column, row, value


def _add(solver: highspy.Highs, cost: Floats, upper: Floats, entries: Entries) -> None:
    """Adds columns from 0 to `upper`; entries of one place are added up."""
    column, row, value = entries
    count = len(cost)
    if not count:
        return
    matrix = coo_array((value, (row, column)), shape=(solver.getNumRow(), count)).tocsc()
    matrix.sum_duplicates()
    solver.addCols(
        count,
        cost.astype(np.float64),
        np.zeros(count),
        upper.astype(np.float64),
        matrix.nnz,
        matrix.indptr[:-1].astype(np.int32),
        matrix.indices.astype(np.int32),
        matrix.data,
    )


def _usual_cost(stage: Stage) -> float:
    """About what a customer costs, so that costs in the programme are near 1."""
    problem = stage.problem
    if not problem.rows:
        return 1.0
    whole_order = np.minimum(problem.most, problem.demand[problem.customer])
    size = np.maximum(problem.load_size, 1)
    loads = np.where(problem.load_size > 0, -(-whole_order // size), 1)
    cost = np.abs(problem.per_unit) * whole_order + problem.per_load * loads + problem.charge_per_use
    return max(1.0, float(np.mean(cost)), float(np.mean(np.abs(problem.short_cost) * problem.demand)) / 100)


def add_patterns(master: Master, new: Patterns) -> None:
    """Adds ways as columns."""
    problem, at = master.stage.problem, master.at
    way, row, unit = new.way, new.row, master.quantity_unit
    x = new.quantity / unit
    ways = np.arange(len(new.customer), dtype=np.int64)
    entries: list[Entries] = [(ways, new.customer, np.ones(len(ways)))]
    entries.append((way, at["depot"] + problem.depot[row], x))
    entries.append((way, at["load"] + problem.depot[row], _loads(master, new)))
    limited = problem.haulier_limited[row]
    entries.append((way[limited], at["haulier"] + problem.haulier[row[limited]], x[limited]))
    for n, (group, _) in enumerate(master.stage.caps):
        inside = ways[group[new.customer]]
        entries.append((inside, np.full(len(inside), at["cap"] + n), new.short[inside] / unit))
    used = master.use_row[row] >= 0
    entries.append((way[used], master.use_row[row[used]], np.ones(int(used.sum()))))
    upper = np.full(len(ways), INFINITE)
    if master.node is not None:
        upper[~allowed(master.stage, master.node, new)] = 0.0
    _add(master.solver, new.cost / master.cost_unit, upper, _together(entries))
    master.patterns = joined(master.patterns, new)


def add_plan(master: Master, quantity: Integers) -> None:
    """Adds the ways of a plan, with which every customer can be served within all limits."""
    problem = master.stage.problem
    everybody = np.arange(problem.customers, dtype=np.int64)
    never = np.full(problem.customers, NEVER, dtype=np.int64)
    answers = Answers(quantity, short_of(problem, quantity), never, never)
    add_patterns(master, patterns_of(master.stage, everybody, answers))


def _loads(master: Master, patterns: Patterns) -> Floats:
    """(entries,) loads of each entry, 0 at depots without a limit."""
    problem = master.stage.problem
    size = problem.load_size[patterns.row]
    x = patterns.quantity
    loads = -(-x // np.where(size > 0, size, np.maximum(x, 1)))
    limited = problem.most_loads[problem.depot[patterns.row]] != NO_LIMIT
    return np.where(limited, loads, 0).astype(np.float64)


def move_to(master: Master, node: Node) -> None:
    """Limits the programme to the plans of a node."""
    stage, solver, unit = master.stage, master.solver, master.quantity_unit
    problem = stage.problem
    master.node = node
    ways = len(master.patterns.customer)
    if ways:
        upper = np.where(allowed(stage, node, master.patterns), INFINITE, 0.0)
        place = (master.fixed + np.arange(ways)).astype(np.int32)
        solver.changeColsBounds(ways, place, np.zeros(ways), upper)
    each = np.arange(problem.depots)
    most = np.where(node.opened == 0, 0, problem.supply) / unit
    place = (master.columns["sent"] + each).astype(np.int32)
    solver.changeColsBounds(len(each), place, np.zeros(len(each)), most)
    place = (master.columns["open"] + each).astype(np.int32)
    charged = problem.opening_charge > 0
    low = np.where(charged & (node.opened == 1), 1.0, 0.0)
    high = np.where(node.opened == 0, 0.0, 1.0)
    solver.changeColsBounds(len(each), place, low, high)


def settle(
    master: Master,
    node: Node,
    cutoff: int | None,
    should_stop: Callable[[], bool],
    start: Prices | None = None,
    tell: Callable[[int], None] | None = None,
    tolerance: float = SETTLED,
) -> Bounded:
    """Generates ways until the node's bound reaches `cutoff`, or no better bound is to be had.

    start: prices to begin with; tell: told of every better bound; tolerance: part of the cost that may lack
    """
    stage = master.stage
    move_to(master, node)
    rows = rows_of(stage, node)
    answers = answers_for(stage)
    best_prices = no_prices(stage) if start is None else start
    best = bound_at(stage, node, rows, best_prices, answers)
    if best is None:
        return Bounded(None, np.zeros(0), np.zeros(0), best_prices, False)
    if len(master.patterns.customer) <= stage.problem.customers:
        everybody = np.arange(stage.problem.customers, dtype=np.int64)
        add_patterns(master, patterns_of(stage, everybody, answers))
    share = TOWARDS_BEST
    for turn in range(ROUNDS):
        # limits that have moved leave the basis fit for the dual simplex, new columns for the primal one
        master.solver.setOptionValue("simplex_strategy", 1 if turn == 0 else 4)
        solved = _solve(master)
        if solved is None:
            return Bounded(rounded_up(stage, best), np.zeros(0), np.zeros(0), best_prices, False)
        value, prices, worth = solved
        reached = rounded_up(stage, best)
        done = (cutoff is not None and reached >= cutoff) or should_stop()
        if done:
            break
        lacking = value - best / stage.scale
        if lacking <= tolerance * max(abs(value), 1.0) and not _more_rows(master):
            if not _penalised(master):
                break
            if not _raise_penalty(master):
                break
            continue
        tried = between(best_prices, prices, share)
        bound = bound_at(stage, node, rows, tried, answers)
        if bound is None:
            return Bounded(None, np.zeros(0), np.zeros(0), best_prices, False)
        new = _improving(master, answers, prices, worth)
        if bound > best:
            best, best_prices = bound, tried
            if tell is not None:
                tell(rounded_up(stage, best))
        if len(new):
            add_patterns(master, patterns_of(stage, new, answers))
            share = TOWARDS_BEST
        elif share > 0.01:
            share = share / 2 if share > 0.1 else 0.0
        elif _more_rows(master) or (_penalised(master) and _raise_penalty(master)):
            share = TOWARDS_BEST
        else:
            break
    weight, opened = _mixture(master)
    return Bounded(rounded_up(stage, best), weight, opened, best_prices, not _penalised(master))


def whole_ways(master: Master) -> highspy.Highs:
    """A solver of its own for the programme where every way is taken wholly or not at all."""
    model = master.solver.getLp()
    kinds = highspy.HighsVarType
    opening = range(master.columns["open"], master.columns["lack"])
    whole = [kinds.kContinuous] * master.fixed + [kinds.kInteger] * len(master.patterns.customer)
    upper = np.array(model.col_upper_)
    for column in opening:
        whole[column] = kinds.kInteger
    upper[_penalties(master)] = 0.0
    upper[master.fixed :] = np.minimum(upper[master.fixed :], 1.0)
    model.integrality_, model.col_upper_ = whole, upper
    solver = quiet()
    solver.passModel(model)
    return solver


def _solve(master: Master) -> tuple[float, Prices, Floats] | None:
    """Solves the programme: value, prices, what each customer may cost; None if it fails."""
    solver, at, problem = master.solver, master.at, master.stage.problem
    solver.run()
    if solver.getModelStatus() != OPTIMAL:
        solver.clearSolver()
        solver.run()
        if solver.getModelStatus() != OPTIMAL:
            return None
    dual = np.array(solver.getSolution().row_dual) * master.cost_unit
    per_unit = master.quantity_unit
    use = np.zeros(problem.rows)
    known = master.use_row >= 0
    use[known] = -dual[master.use_row[known]]
    prices = Prices(
        -dual[at["depot"] : at["load"]] / per_unit,
        -dual[at["load"] : at["haulier"]],
        -dual[at["haulier"] : at["cap"]] / per_unit,
        -dual[at["cap"] : at["must"]] / per_unit,
        -dual[at["must"] : at["moved"]] / per_unit,
        use,
    )
    unsent = float((problem.unsent_cost * problem.supply).sum())
    value = solver.getInfo().objective_function_value * master.cost_unit + unsent
    return value, prices, dual[: problem.customers]


def _improving(master: Master, answers: Answers, prices: Prices, worth: Floats) -> Integers:
    """Customers whose way in `answers` would better the programme at its own prices."""
    stage = master.stage
    problem = stage.problem
    unit = prices.depot[problem.depot]
    if len(prices.haulier):
        unit = unit + np.where(problem.haulier_limited, prices.haulier[problem.haulier], 0.0)
    loads = loads_on(problem, answers.quantity)
    limited = (problem.most_loads != NO_LIMIT)[problem.depot]
    cost = unit * answers.quantity + np.where(limited, prices.load[problem.depot], 0.0) * loads
    cost = cost + prices.use * (answers.quantity > 0)
    reduced = np.bincount(problem.customer, cost, problem.customers)
    for (group, _), price in zip(stage.caps, prices.cap, strict=True):
        reduced = reduced + price * group * answers.short
    own = patterns_of(stage, np.arange(problem.customers, dtype=np.int64), answers)
    reduced = reduced + own.cost
    tolerance = 1e-7 * (np.abs(worth) + 1e-3 * master.cost_unit)
    return np.flatnonzero((reduced < worth - tolerance) & (answers.value != NEVER))


def _mixture(master: Master) -> tuple[Floats, Floats]:
    """How the programme mixes the ways, and how far depots are open."""
    value = np.array(master.solver.getSolution().col_value)
    begin = master.columns["open"]
    return value[master.fixed :], value[begin : begin + master.stage.problem.depots]


def _penalties(master: Master) -> Integers:
    """Columns that stand for serving a customer in no way, and for goods that must move and do not."""
    lack = master.columns["lack"] + np.arange(master.stage.problem.depots)
    return np.concatenate([np.arange(master.stage.problem.customers), lack])


def _penalised(master: Master) -> bool:
    """Whether some customer is served in no way at all, or goods stay that must not."""
    value = np.array(master.solver.getSolution().col_value)
    return bool((value[_penalties(master)] > 1e-6).any())


def _raise_penalty(master: Master) -> bool:
    """Makes that dearer; False once it is dear beyond all measure."""
    if master.penalty >= 1e7:
        return False
    master.penalty *= 30
    columns = _penalties(master)
    cost = np.full(len(columns), master.penalty)
    master.solver.changeColsCost(len(columns), columns.astype(np.int32), cost)
    return True


def _more_rows(master: Master) -> bool:
    """Adds rows that keep a rate row from being used more than its depot is open; False if all are kept."""
    problem, patterns = master.stage.problem, master.patterns
    charged = problem.opening_charge > 0
    if not charged.any():
        return False
    weight, opened = _mixture(master)
    used = np.bincount(patterns.row, weight[patterns.way], problem.rows)
    broken = charged[problem.depot] & (used > opened[problem.depot] + 1e-6) & (master.use_row < 0)
    found = np.flatnonzero(broken)
    if not len(found):
        return False
    first = master.solver.getNumRow()
    master.use_row[found] = first + np.arange(len(found))
    inside = master.use_row[patterns.row] >= first
    column = np.concatenate(
        [master.fixed + patterns.way[inside], master.columns["open"] + problem.depot[found]]
    )
    row = np.concatenate([master.use_row[patterns.row[inside]] - first, np.arange(len(found))])
    value = np.concatenate([np.ones(int(inside.sum())), -np.ones(len(found))])
    matrix = coo_array((value, (row, column)), shape=(len(found), master.solver.getNumCol())).tocsr()
    master.solver.addRows(
        len(found),
        np.full(len(found), -INFINITE),
        np.zeros(len(found)),
        matrix.nnz,
        matrix.indptr[:-1].astype(np.int32),
        matrix.indices.astype(np.int32),
        matrix.data,
    )
    return True
