"""The integer model of few changes, given to HiGHS: which lanes to change. What it says is a proposal.

Money above the least cost is minimised over quantities and one yes-or-no a lane, with at most so many yes.
HiGHS reckons in floating point: the lanes that it picks are solved again exactly by the network, so that a
plan's cost never rests on it. Its bound does, and is handed out as the solver's word, less `CAUTION`.
"""

from dataclasses import dataclass

import highspy
import numpy as np
import numpy.typing as npt
import scipy.sparse as sp

from engine.exact import to_integer
from engine.planning.steady_lanes import NO_LANE, Fixed, Flags, Integers, Lanes, limits_of, money_of

Reals = npt.NDArray[np.float64]
CAUTION = 1e-7
"""Share of the bound, and the least amount of money, that is taken off what HiGHS claims."""

INTEGRALITY = 1e-9
"""A yes-or-no may be off by so little: times a lane's quantity and rate, far below a minor unit."""


@dataclass(frozen=True, eq=False)
class Found:
    """The lanes to change (None: none were found), and what HiGHS claims no plan costs less than."""

    free: Flags | None
    bound: float
    finished: bool


def search(lanes: Lanes, allowed: Flags, most: int, seconds: float, known: Fixed | None = None) -> Found:
    """Which of the allowed lanes to change, at most `most` of those that need not change.

    allowed: (lanes,) the others stay as issued; known: a plan to begin with
    bound: money above the least cost in whole currency units, infinite where no plan is as good in its aims
    """
    built = _Built(lanes, allowed, most)
    solver = built.solver
    solver.setOptionValue("time_limit", max(seconds, 0.05))
    if known is not None and int((known.changed & ~lanes.changed).sum()) <= most:
        solution = highspy.HighsSolution()
        solution.col_value = [*(known.quantity / built.grain), *known.changed[built.choice].astype(float)]
        solver.setSolution(solution)
    solver.run()
    status, info = solver.getModelStatus(), solver.getInfo()
    if status == highspy.HighsModelStatus.kInfeasible:
        return Found(None, float("inf"), True)
    finished = status == highspy.HighsModelStatus.kOptimal
    bound = info.mip_dual_bound if np.isfinite(info.mip_dual_bound) else 0.0
    bound = max(0.0, bound - max(CAUTION, CAUTION * abs(bound)))
    if info.primal_solution_status != 2:
        return Found(None, bound, finished)
    values = np.array(solver.getSolution().col_value)[lanes.problem.rows :]
    free = lanes.changed.copy()
    free[built.choice[values > 0.5]] = True
    return Found(free, bound, finished)


class _Built:
    """The model as HiGHS takes it: quantities in units, money in currency units above the least cost."""

    def __init__(self, lanes: Lanes, allowed: Flags, most: int) -> None:
        problem, model = lanes.problem, lanes.model
        self.grain = float(10**lanes.places)
        self.choice = np.flatnonzero(allowed & ~lanes.changed)
        lower, upper = _bounds(lanes, allowed)
        rows, chosen = problem.rows, len(self.choice)
        spare = _spare(lanes)
        money = float(10**model.money_places)
        matrix, row_lower, row_upper = _constraints(lanes, self.choice, most)
        lp = highspy.HighsLp()
        lp.num_col_, lp.num_row_ = rows + chosen, matrix.shape[0]
        lp.col_cost_ = np.concatenate([spare / money, np.zeros(chosen)])
        lp.col_lower_ = np.concatenate([lower / self.grain, np.zeros(chosen)])
        lp.col_upper_ = np.concatenate([upper / self.grain, np.ones(chosen)])
        lp.integrality_ = [highspy.HighsVarType.kContinuous] * rows + [highspy.HighsVarType.kInteger] * chosen
        lp.offset_ = -money_of(spare, lanes.best) / (money * self.grain)
        lp.row_lower_, lp.row_upper_ = row_lower, row_upper
        lp.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
        lp.a_matrix_.start_, lp.a_matrix_.index_, lp.a_matrix_.value_ = (
            matrix.indptr,
            matrix.indices,
            matrix.data,
        )
        self.solver = highspy.Highs()  # type: ignore[no-untyped-call]
        self.solver.silent()
        self.solver.setOptionValue("mip_rel_gap", 0.0)
        self.solver.setOptionValue("mip_abs_gap", CAUTION)
        self.solver.setOptionValue("mip_feasibility_tolerance", INTEGRALITY)
        self.solver.setOptionValue("primal_feasibility_tolerance", INTEGRALITY)
        self.solver.passModel(lp)


def _spare(lanes: Lanes) -> Integers:
    """(rows,) money less the prices at both ends: the same sums up to a constant, in small numbers."""
    plan, problem = lanes.plan, lanes.problem
    places = lanes.model.money_places
    depot = np.array([to_integer(one.price, places) for one in plan.depot_prices] + [0], dtype=np.int64)
    customer = np.array([to_integer(one.price, places) for one in plan.customer_prices] + [0], dtype=np.int64)
    return lanes.model.money - depot[problem.depot] - customer[problem.customer]


def _bounds(lanes: Lanes, allowed: Flags) -> tuple[Integers, Integers]:
    """(rows,) limits; what counts against an aim that nobody need miss is fixed at 0."""
    problem = lanes.problem
    lower, upper = limits_of(problem)
    reach = np.minimum(problem.supply[problem.depot], problem.demand[problem.customer])
    upper = np.maximum(np.minimum(upper, reach), lower)
    weight = problem.cost - lanes.model.money
    for value, total in lanes.aims.items():
        if total == 0:
            upper[weight == value] = 0
    unused = ~(allowed | lanes.changed) & (lanes.earlier == 0)
    upper[(lanes.row_lane != NO_LANE) & unused[lanes.row_lane]] = 0
    return lower, upper


def _constraints(lanes: Lanes, choice: Integers, most: int) -> tuple[sp.csr_matrix, Reals, Reals]:
    """Sums at depots and customers, aims as reached, lanes between issued and limit, and how many change."""
    problem, grain = lanes.problem, float(10**lanes.places)
    columns = problem.rows + len(choice)
    every = np.arange(problem.rows)
    ones = np.ones(problem.rows)
    parts = [
        sp.csr_matrix((ones, (problem.depot, every)), shape=(problem.depots, columns)),
        sp.csr_matrix((ones, (problem.customer, every)), shape=(problem.customers, columns)),
    ]
    low, high = (
        [problem.supply / grain, problem.demand / grain],
        [problem.supply / grain, problem.demand / grain],
    )
    weight = problem.cost - lanes.model.money
    for value, total in lanes.aims.items():
        if total:
            counted = np.flatnonzero(weight == value)
            parts.append(
                sp.csr_matrix(
                    (np.ones(len(counted)), (np.zeros(len(counted), int), counted)), shape=(1, columns)
                )
            )
            low.append(np.array([total / grain]))
            high.append(np.array([total / grain]))
    place = np.full(len(lanes.names), -1)
    place[choice] = np.arange(len(choice))
    tied = np.flatnonzero(~lanes.changed)  # every lane that can stay
    at = np.full(len(lanes.names), -1)
    at[tied] = np.arange(len(tied))
    rows = np.flatnonzero((lanes.row_lane != NO_LANE) & ~lanes.changed[lanes.row_lane])
    can = tied[place[tied] >= 0]
    sums = (np.ones(len(rows)), (at[lanes.row_lane[rows]], rows))
    up = (-(lanes.most - lanes.earlier)[can] / grain, (at[can], problem.rows + place[can]))
    down = ((lanes.earlier - lanes.least)[can] / grain, (at[can], problem.rows + place[can]))
    for more in (up, down):
        parts.append(
            sp.csr_matrix(
                (
                    np.concatenate([sums[0], more[0]]),
                    (np.concatenate([sums[1][0], more[1][0]]), np.concatenate([sums[1][1], more[1][1]])),
                ),
                shape=(len(tied), columns),
            )
        )
    issued = lanes.earlier[tied] / grain
    free = np.full(len(tied), highspy.kHighsInf)
    low += [-free, issued]
    high += [issued, free]
    parts.append(
        sp.csr_matrix(
            (np.ones(len(choice)), (np.zeros(len(choice), int), problem.rows + np.arange(len(choice)))),
            shape=(1, columns),
        )
    )
    low.append(np.array([0.0]))
    high.append(np.array([float(most)]))
    return sp.vstack(parts).tocsr(), np.concatenate(low), np.concatenate(high)
