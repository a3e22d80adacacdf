"""The one way to solve a week with whole vehicles."""

from __future__ import annotations

import threading
import time
from collections.abc import Callable
from functools import partial

import numpy as np

from engine.exact import Integers, TooLarge
from engine.loads.answer import Ended, LoadFlow, Progress
from engine.loads.cost import aims_of, row_costs, score_of, sent_by, short_of
from engine.loads.forced import least_plan
from engine.loads.linear import loads_cap, relaxed_lines, solve_lines
from engine.loads.problem import LoadProblem
from engine.loads.proof import check
from engine.loads.search import Best, Told, mixture_first, polish, search
from engine.loads.stage import stage_of
from engine.loads.whole import as_network
from engine.network import Contradiction

Stop = Callable[[], bool] | threading.Event
Tell = Callable[[Progress], None]

SHARE_OF_AN_AIM = 0.4
"""Of the time that is left, at most so much goes to an aim that is not proved yet."""


def least_cost_loads(
    problem: LoadProblem,
    start: LoadFlow | None = None,
    progress: Tell | None = None,
    should_stop: Stop | None = None,
    time_limit: float | None = None,
) -> LoadFlow:
    """The best plan found, by the aims in order and then by cost, with a bound proved in integers.

    start:       an earlier plan, of this or a changed problem with the same rows; used where it still fits
    progress:    told of every better plan and bound
    should_stop: an event, or a function that is asked often; when set (or true) the best plan is returned
    time_limit:  seconds after which the best plan is returned
    A KeyboardInterrupt counts as a stop. A first plan is always made, however early the stop.

    Raises NoPlan if lower limits cannot be kept together.
    """
    begin = time.monotonic()
    asked = should_stop.is_set if isinstance(should_stop, threading.Event) else should_stop
    stopped = threading.Event()

    def stop_at(seconds: float | None) -> Callable[[], bool]:
        def stop() -> bool:
            if asked is not None and asked():
                stopped.set()
            late = seconds is not None and time.monotonic() - begin >= seconds
            return late or stopped.is_set()

        return stop

    least = least_plan(problem)
    network = as_network(problem)
    if network is not None:
        score = score_of(problem, network)
        return _answer(problem, network, score.aims, score.cost, None, ("network", "proved", begin))
    best = Best(problem, (least, score_of(problem, least)))
    bounds = (0,) * len(best.score.aims)
    told = Told(_cost_bound(problem))

    def so_far(ended: Ended) -> LoadFlow:
        aims = tuple(min(a, b) for a, b in zip(bounds, best.score.aims, strict=True))
        bound = min(told.bound, best.score.cost)
        return _answer(problem, best.quantity, aims, bound, told.solver, ("loads", ended, begin))

    def tell(doing: str) -> None:
        if progress is not None:
            progress(Progress(doing, so_far("stopped"), time.monotonic() - begin))

    try:
        bounds = _first(problem, best, start)
        tell("A first plan")
        best.tell = lambda: tell("A better plan")
        known, wanted = None, bounds
        if best.score.aims > bounds:
            # prices of plans as good as the bounds mostly lead to one, which is sooner than aim by aim
            known = mixture_first(stage_of(problem, bounds, len(bounds)), best, stop_at(time_limit))
        for place in range(len(bounds)):
            if best.score.aims[place] > bounds[place]:
                left = None if time_limit is None else time_limit - (time.monotonic() - begin)
                limit = None if left is None else time.monotonic() - begin + SHARE_OF_AN_AIM * left
                aim = Told(bounds[place])
                stage = stage_of(problem, best.score.aims, place)
                search(stage, best, partial(_aim, best, place), aim, stop_at(limit), False)
                # what was known of later aims held for plans that reach the first bound of this one
                bounds = (*bounds[:place], aim.bound, *(0 for _ in bounds[place + 1 :]))
        told.tell = tell
        stage = stage_of(problem, best.score.aims, len(bounds))
        if best.score.aims != wanted:
            known = None
        search(stage, best, lambda: best.score.cost, told, stop_at(time_limit), True, known)
    except KeyboardInterrupt:
        stopped.set()
    best.tell = lambda: None
    final = so_far("stopped" if stopped.is_set() else "time limit")
    return final if not final.proved else so_far("proved")


def _aim(best: Best, place: int) -> int:
    return best.score.aims[place]


def _first(problem: LoadProblem, best: Best, start: LoadFlow | None) -> tuple[int, ...]:
    """A first plan, and what no plan can do better than in each aim.

    The bound of an aim holds for plans that reach the bounds of those before it; where the plan does not, no
    more is known of the later aims than that they cannot be below 0.
    """
    if start is not None and len(start.quantity) == problem.rows:
        polish(best, np.minimum(start.quantity, problem.most))
    try:
        relaxed = solve_lines(problem, relaxed_lines(problem, _usual_unit(problem)), loads_cap(problem))
        bounds = score_of(problem, relaxed).aims
        polish(best, relaxed)
    except (Contradiction, TooLarge):
        bounds = (0,) * len(best.score.aims)
        polish(best, best.quantity)
    known = 0
    while known < len(bounds) and best.score.aims[known] == bounds[known]:
        known += 1
    return (*bounds[: known + 1], *(0 for _ in bounds[known + 1 :]))


def _usual_unit(problem: LoadProblem) -> Integers:
    """(rows,) about what a unit costs on each row, if it carries what it can."""
    quantity = np.maximum(np.minimum(problem.most, problem.demand[problem.customer]), 0)
    return row_costs(problem, quantity) // np.maximum(quantity, 1)


def _cost_bound(problem: LoadProblem) -> int:
    """A bound that needs no search: every unit at its least cost, alone."""
    negative = np.minimum(problem.per_unit, 0) * np.maximum(problem.most, 0)
    short = np.minimum(problem.short_cost, 0) * problem.demand
    unsent = np.minimum(problem.unsent_cost, 0) * problem.supply
    return int(negative.sum() + short.sum() + unsent.sum())


def _answer(
    problem: LoadProblem,
    quantity: Integers,
    aim_bounds: tuple[int, ...],
    bound: int,
    solver: int | None,
    about: tuple[str, Ended, float],
) -> LoadFlow:
    """The plan with its loads, checked once more."""
    how, ended, begin = about
    cost, loads = check(problem, quantity)
    return LoadFlow(
        problem=problem,
        quantity=quantity,
        loads=np.array(loads, dtype=np.int64),
        short=short_of(problem, quantity),
        unsent=problem.supply - sent_by(problem, quantity),
        aims=aims_of(problem, score_of(problem, quantity).aims, aim_bounds),
        cost=cost,
        lower_bound=bound,
        solver_bound=solver if solver is not None and solver > bound else None,
        how="network" if how == "network" else "loads",
        ended=ended,
        seconds=time.monotonic() - begin,
    )
