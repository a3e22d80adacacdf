"""The desk's search by whole loads: a plan at once, a better one from a job that other tabs see too."""

from collections.abc import Hashable
from dataclasses import dataclass

import engine
from app import jobs
from app.jobs import Job
from engine.planning.planner import USUAL_SECONDS
from engine.planning.spread import has_whole_loads
from engine.week import Week

FIRST_SECONDS = 0.0
"""The first plan is shown at once; the search goes on in a job."""


@dataclass
class Searching:
    """What a session knows of its search: the job it looks at, and the time a search may take."""

    seconds: float = USUAL_SECONDS
    job: Job | None = None

    @property
    def is_on(self) -> bool:
        """Whether a better plan may still come."""
        return self.job is not None and not self.job.is_done


def needs_search(week: Week) -> bool:
    """Whether the week's plan is searched for by whole loads rather than solved at once."""
    return has_whole_loads(week)


def first_plan(week: Week, near: engine.Plan | None) -> engine.Plan:
    """A valid plan within about a second, with its bound; a job makes it better.

    Raises:
        NotPlannable, TooLarge: as `engine.plan_week`.
    """
    return engine.plan_week(week, near=near, time_limit=FIRST_SECONDS)


def search(
    searching: Searching, key: Hashable, version: int, week: Week, near: engine.Plan | None
) -> engine.Plan:
    """The plan to show for a week: that of a job which is there already, or a first one, and a job begun.

    Raises:
        NotPlannable, TooLarge: as `engine.plan_week`.
    """
    job = jobs.found(key, version)
    if job is not None and not job.fault:
        searching.job = job
        return job.so_far()
    first = near if near is not None and near.week is week and near.whole else first_plan(week, near)
    searching.job = None
    if not first.proof.exact:
        searching.job = jobs.begin(key, version, week, first, searching.seconds)
    return first


def longer(searching: Searching, key: Hashable, version: int, plan: engine.Plan) -> None:
    """Search on from a plan, for the time that the desk gives."""
    searching.job = jobs.begin(key, version, plan.week, plan, searching.seconds)
