"""Stress runs outside any browser session: a thread works, sessions look, Stop keeps what is done.

A run goes by its week and the week's version, so that a browser that is refreshed, or a second tab, finds
it again with its progress and its results. The kernels let go of the interpreter while they work, so the
desk stays quick meanwhile.
"""

import threading
from collections.abc import Hashable, Sequence
from dataclasses import dataclass, field
from datetime import datetime

from engine.compare.stress import Stressed, stressed
from engine.compare.stress_cases import Case
from engine.compare.stress_whole import SECONDS_A_CASE, NotDrawn
from engine.exact import TooLarge
from engine.planning.plan import Plan

MOST_KEPT = 12
"""So many runs that have ended are remembered."""


@dataclass(eq=False)
class Job:
    """One run for one plan. `found` is there once it has ended, or `fault` with the reason why not.

    version: how many changes the week had; begun: when, by this machine's clock
    seconds: with whole loads, how long each case is searched for
    """

    version: int
    plan: Plan
    cases: Sequence[Case]
    seconds: float = SECONDS_A_CASE
    begun: datetime = field(default_factory=lambda: datetime.now().astimezone())
    finished: int = 0
    found: Stressed | None = None
    fault: str = ""
    stop: threading.Event = field(default_factory=threading.Event)
    done: threading.Event = field(default_factory=threading.Event)

    @property
    def is_done(self) -> bool:
        return self.done.is_set()

    @property
    def share(self) -> float:
        """How much of it is done, from 0 to 1."""
        return min(1.0, self.finished / max(1, len(self.cases)))


_jobs: dict[Hashable, Job] = {}
_lock = threading.Lock()


def job_of(key: Hashable, version: int) -> Job | None:
    """The run of a week at this version, under way or ended; one for an earlier version is stopped."""
    with _lock:
        job = _jobs.get(key)
    if job is not None and job.version < version:
        job.stop.set()
    return job if job is not None and job.version == version else None


def begin(
    key: Hashable, version: int, plan: Plan, cases: Sequence[Case], seconds: float = SECONDS_A_CASE
) -> Job:
    """Starts a run; one of the same week that goes on is stopped."""
    job = Job(version, plan, cases, seconds)
    with _lock:
        before = _jobs.pop(key, None)
        if before is not None:
            before.stop.set()
        _jobs[key] = job
        for old in [name for name, one in _jobs.items() if one.is_done][:-MOST_KEPT]:
            del _jobs[old]
    threading.Thread(target=_work, args=(job,), name="stress", daemon=True).start()
    return job


def _work(job: Job) -> None:
    def progress(done: int, _: int) -> None:
        job.finished = done

    try:
        job.found = stressed(
            job.plan, job.cases, progress=progress, stop=job.stop.is_set, seconds=job.seconds
        )
    except (NotDrawn, TooLarge) as refused:
        job.fault = str(refused)
    except Exception as fault:  # the page must say it, nobody waits for this thread
        job.fault = f"The run ended by a fault of ours: {type(fault).__name__}: {fault}"
    finally:
        job.done.set()
