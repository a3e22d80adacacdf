"""A stress run: many cases in parts, on any executor, with progress and a stop that keeps what is done.

Results are kept by case: a case that comes back twice is counted once, a part that is lost with its worker
is handed out again.
"""

import time
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass, field
from multiprocessing import get_context
from signal import SIG_IGN, SIGINT, signal

from engine.compare.stress_cases import Case
from engine.compare.stress_ground import Ground
from engine.compare.stress_kernels import prepare
from engine.compare.stress_solve import Outcome, outcome_of
from engine.compare.stress_whole import WholeGround, whole_outcome
from engine.network import prepare as prepare_network

Progress = Callable[[int, int], None]
"""Told how many cases are done, and of how many."""

LARGEST_PART = 50
PARTS_EACH = 8
"""So many parts come to each worker, so that none waits long for the last one."""

TRIES = 5
"""A part that is lost so often is given up."""

PAUSE = 0.2
"""Seconds after which a run that waits looks whether it is to stop."""


class PartLost(RuntimeError):
    """A part of the run was lost again and again; what is done so far is in `run`."""

    def __init__(self, message: str, run: "Run") -> None:
        self.run = run
        super().__init__(message)


@dataclass
class Run:
    """What a run has come to. `outcomes` has each case once, in the order in which they were asked.

    refused:  results that came back for a case that was there already
    again:    parts that were handed out again
    stopped:  whether it was stopped before all was done
    seconds:  processor time of the cases alone, wherever they were solved
    """

    asked: int
    outcomes: dict[Case, Outcome] = field(default_factory=dict)
    refused: int = 0
    again: int = 0
    stopped: bool = False
    seconds: float = 0.0

    def take(self, found: Sequence[Outcome], seconds: float) -> None:
        """Puts results in, those of cases that are there already not."""
        self.seconds += seconds
        for outcome in found:
            if outcome.case in self.outcomes:
                self.refused += 1
            else:
                self.outcomes[outcome.case] = outcome


def stress(
    ground: Ground | WholeGround,
    cases: Sequence[Case],
    executor: Executor | None = None,
    *,
    workers: int = 2,
    progress: Progress | None = None,
    stop: Callable[[], bool] | None = None,
    renew: Callable[[], Executor] | None = None,
) -> Run:
    """Solves the cases, each once, every plan proved.

    Args:
        ground: the plan to be stressed, see `ground_of`; with whole loads a `WholeGround`.
        cases: what may happen; one that is asked twice is solved once.
        executor: where parts are solved; None solves case after case here. With whole loads each search keeps
            several cores busy by itself, and cases follow each other here in any case.
        workers: how many parts the executor works on at a time.
        progress: told of each part that is done.
        stop: asked now and then; once it says so, no more is begun and what is done is kept.
        renew: gives a new executor where one has broken down with its workers.

    Raises:
        PartLost: a part was lost `TRIES` times.
    """
    wanted = tuple(dict.fromkeys(cases))
    run = Run(len(wanted))
    tell, asked_to_stop = progress or (lambda done, of: None), stop or (lambda: False)
    tell(0, run.asked)
    if executor is None or isinstance(ground, WholeGround):
        for case in wanted:
            if asked_to_stop():
                run.stopped = True
                break
            run.take(*part_of(ground, (case,)))
            tell(len(run.outcomes), run.asked)
    else:
        _spread(ground, list(_parts(wanted, workers)), executor, workers, run, tell, asked_to_stop, renew)
    run.outcomes = {case: run.outcomes[case] for case in wanted if case in run.outcomes}
    return run


def part_of(ground: Ground | WholeGround, cases: Sequence[Case]) -> tuple[list[Outcome], float]:
    """The outcomes of some cases, and the processor time that they took this thread."""
    if isinstance(ground, WholeGround):
        begun = time.thread_time()
        return [whole_outcome(ground, case) for case in cases], time.thread_time() - begun
    _ = ground.near  # what is made once is no part of a case
    begun = time.thread_time()
    return [outcome_of(ground, case) for case in cases], time.thread_time() - begun


def processes(workers: int) -> ProcessPoolExecutor:
    """An executor of processes of this machine that are started afresh, their machine code loaded."""
    return ProcessPoolExecutor(workers, mp_context=get_context("spawn"), initializer=_begin)


def _begin() -> None:
    """A worker leaves a stop from the keyboard to the process that started it, which keeps what is done."""
    signal(SIGINT, SIG_IGN)
    ready()


def ready() -> bool:
    """Loads a process's machine code, so that no case waits for it."""
    prepare_network()
    prepare()
    return True


def _parts(cases: Sequence[Case], workers: int) -> Iterator[tuple[Case, ...]]:
    size = min(LARGEST_PART, max(1, len(cases) // (PARTS_EACH * workers)))
    for first in range(0, len(cases), size):
        yield tuple(cases[first : first + size])


def _spread(
    ground: Ground,
    parts: list[tuple[Case, ...]],
    executor: Executor,
    workers: int,
    run: Run,
    tell: Progress,
    asked_to_stop: Callable[[], bool],
    renew: Callable[[], Executor] | None,
) -> None:
    """Keeps every worker busy with one part and one waiting, until all are done or a stop is asked for."""
    line = parts[::-1]
    tries: dict[tuple[Case, ...], int] = {}
    out: dict[Future[tuple[list[Outcome], float]], tuple[tuple[Case, ...], Executor]] = {}
    while line or out:
        if asked_to_stop():
            run.stopped = True
            for future in out:
                future.cancel()
            break
        broken = False
        try:
            while line and len(out) < 2 * workers:
                out[executor.submit(part_of, ground, line[-1])] = (line[-1], executor)
                line.pop()
        except BrokenProcessPool:
            broken = True
        done, _ = wait(out, timeout=0 if broken else PAUSE, return_when=FIRST_COMPLETED)
        for future in done:
            part, by = out.pop(future)
            try:
                run.take(*future.result())
            except (ArithmeticError, ValueError, TypeError, KeyboardInterrupt):
                raise  # not lost: another try would only repeat it
            except BaseException as lost:
                broken = broken or (by is executor and isinstance(lost, BrokenProcessPool))
                tries[part] = tries.get(part, 0) + 1
                if tries[part] >= TRIES:
                    raise PartLost(
                        f"A part of the run was lost {TRIES} times, the last time to {type(lost).__name__}. "
                        "Try again with fewer workers.",
                        run,
                    ) from lost
                run.again += 1
                line.insert(0, part)
            tell(len(run.outcomes), run.asked)
        if broken:
            executor = _renewed(renew, run)


def _renewed(renew: Callable[[], Executor] | None, run: Run) -> Executor:
    if renew is None:
        raise PartLost("The workers broke down. Try again with fewer of them.", run)
    return renew()
