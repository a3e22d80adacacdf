"""The one way to solve a week with whole vehicles."""

from __future__ import annotations

import threading
from collections.abc import Callable

from engine.loads.answer import LoadFlow, Progress
from engine.loads.problem import LoadProblem

Stop = Callable[[], bool] | threading.Event
Tell = Callable[[Progress], None]


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
    raise NotImplementedError
