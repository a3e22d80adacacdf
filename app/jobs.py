"""Searches by whole loads outside any browser session: one queue for the whole desk, one job for a week.

A thread does the work, since the solver lets go of the interpreter while it counts. Sessions only look: a
browser that is refreshed, or a second tab, finds the job again by its key and the version of the week.
"""

import queue
import threading
import time
from collections.abc import Hashable
from dataclasses import dataclass, field

import engine
from engine.findings import Finding, Severity
from engine.planning.load_plan import Improving
from engine.week import Week

MOST_KEPT = 20
"""So many finished jobs are remembered, so that a refreshed browser does not search again."""


@dataclass(eq=False)
class Job:
    """One search. `best` is what it has come to, `plan` the best plan once it has ended.

    version: of the week's list of changes; first: the plan that it started from
    fault: what went wrong in it, a fault of ours, as a sentence
    """

    key: Hashable
    version: int
    week: Week
    first: engine.Plan
    time_limit: float
    asked: float = field(default_factory=time.monotonic)
    begun: float | None = None
    best: Improving | None = None
    plan: engine.Plan | None = None
    stopped: tuple[Finding, ...] = ()
    fault: str = ""
    stop: threading.Event = field(default_factory=threading.Event)
    done: threading.Event = field(default_factory=threading.Event)

    @property
    def is_done(self) -> bool:
        return self.done.is_set()

    @property
    def is_waiting(self) -> bool:
        """Whether another search is under way before it."""
        return self.begun is None and not self.is_done

    @property
    def seconds(self) -> float:
        """How long it has been searching."""
        return 0.0 if self.begun is None else time.monotonic() - self.begun

    def so_far(self) -> engine.Plan:
        """The best plan so far: valid and checked, with its bound."""
        if self.plan is not None:
            return self.plan
        return self.first if self.best is None else self.best.plan()


_jobs: dict[Hashable, Job] = {}
_waiting: queue.Queue[Job] = queue.Queue()
_lock = threading.Lock()
_worker: threading.Thread | None = None


def found(key: Hashable, version: int) -> Job | None:
    """The job of a week at this version, under way or ended; None where there is none."""
    with _lock:
        job = _jobs.get(key)
    return job if job is not None and job.version == version else None


def begin(key: Hashable, version: int, week: Week, first: engine.Plan, time_limit: float) -> Job:
    """Queue a search for a better plan than `first`; an earlier one under the same key is stopped.

    Where the same version is being searched already, that job is returned.
    """
    with _lock:
        earlier = _jobs.get(key)
        if earlier is not None and earlier.version == version and not earlier.is_done:
            return earlier
        if earlier is not None:
            earlier.stop.set()
        job = Job(key, version, week, first, time_limit)
        _jobs.pop(key, None)
        _jobs[key] = job
        for old in [name for name, one in _jobs.items() if one.is_done][:-MOST_KEPT]:
            del _jobs[old]
        _start_worker()
    _waiting.put(job)
    return job


def waiting_before(job: Job) -> int:
    """How many searches come before a job that waits."""
    with _lock:
        others = [one for one in _jobs.values() if not one.is_done and one is not job]
    return sum(one.asked <= job.asked for one in others)


def _start_worker() -> None:
    global _worker
    if _worker is None or not _worker.is_alive():
        _worker = threading.Thread(target=_work, name="searches", daemon=True)
        _worker.start()


def _work() -> None:
    while True:
        job = _waiting.get()
        try:
            _search(job)
        finally:
            job.done.set()


def _search(job: Job) -> None:
    job.begun = time.monotonic()
    if job.stop.is_set():
        job.plan = job.first
        return

    def improved(news: Improving) -> None:
        job.best = news

    try:
        job.plan = engine.plan_week(
            job.week, near=job.first, improved=improved, should_stop=job.stop, time_limit=job.time_limit
        )
    except engine.NotPlannable as refused:
        job.stopped = refused.findings
    except engine.TooLarge as too_large:
        job.stopped = (Finding(Severity.STOPS, "too large", str(too_large)),)
    except Exception as fault:  # the thread must outlive a fault, and the page must say it
        job.fault = f"The search ended by a fault of ours: {type(fault).__name__}: {fault}"
