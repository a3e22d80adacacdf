"""A stress run beside the page: a thread works, the page looks now and then, Stop keeps what is done.

The kernels let go of the interpreter while they work, so the desk stays quick meanwhile.
"""

import threading
from collections.abc import Sequence
from dataclasses import dataclass, field

import streamlit as st

from engine.compare.stress import Stressed, stressed
from engine.compare.stress_cases import Case
from engine.compare.stress_ground import NeedsWholeLoads
from engine.exact import TooLarge
from engine.planning.plan import Plan

KEY = "stress-job"


@dataclass(eq=False)
class Job:
    """One run for one plan. `found` is there once it has ended, or `fault` with the reason why not."""

    plan: Plan
    cases: Sequence[Case]
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


def job_of(plan: Plan) -> Job | None:
    """This session's run for this plan; one for an earlier plan is stopped and forgotten."""
    job: Job | None = st.session_state.get(KEY)
    if job is not None and job.plan is not plan:
        job.stop.set()
        del st.session_state[KEY]
        return None
    return job


def begin(plan: Plan, cases: Sequence[Case]) -> Job:
    """Starts a run; one that goes on is stopped."""
    before: Job | None = st.session_state.get(KEY)
    if before is not None:
        before.stop.set()
    job = Job(plan, cases)
    st.session_state[KEY] = job
    threading.Thread(target=_work, args=(job,), name="stress", daemon=True).start()
    return job


def _work(job: Job) -> None:
    def progress(done: int, _: int) -> None:
        job.finished = done

    try:
        job.found = stressed(job.plan, job.cases, progress=progress, stop=job.stop.is_set)
    except NeedsWholeLoads as refused:
        job.fault = f"{refused} Such a week cannot be stressed yet."
    except TooLarge as too_large:
        job.fault = str(too_large)
    except Exception as fault:  # the page must say it, nobody waits for this thread
        job.fault = f"The run ended by a fault of ours: {type(fault).__name__}: {fault}"
    finally:
        job.done.set()
