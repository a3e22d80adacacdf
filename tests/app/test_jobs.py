"""Searches in the background: one at a time, found again by key and version, stopped with the best kept."""

import threading
from collections.abc import Iterator
from dataclasses import replace

import pytest

import engine
from app import jobs
from app.jobs import Job
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.week import Week
from tests.records.making import D

PATIENCE = 60


def week(ordered: int = 62) -> Week:
    return Week.of(
        (Depot("Quarry", D(500)),),
        (Customer("Elm", (Order(D(ordered)),)),),
        (RateRow("Quarry", "Elm", D(240), per="load"),),
        Rules(load_size=D(25)),
    )


@pytest.fixture(scope="module")
def plan() -> engine.Plan:
    return engine.plan_week(week(), time_limit=None)


class Held:
    """A stand-in for the search that goes on until it is let go, so that the queue can be looked at."""

    def __init__(self, plan: engine.Plan) -> None:
        self.plan, self.going, self.let_go = plan, threading.Event(), threading.Event()
        self.at_once, self.most, self.lock = 0, 0, threading.Lock()

    def __call__(self, week: Week, should_stop: threading.Event, **_: object) -> engine.Plan:
        with self.lock:
            self.at_once += 1
            self.most = max(self.most, self.at_once)
        self.going.set()
        for _ in range(PATIENCE * 100):
            if should_stop.is_set() or self.let_go.wait(0.01):
                break
        with self.lock:
            self.at_once -= 1
        return replace(self.plan, week=week)


@pytest.fixture
def held(plan: engine.Plan, monkeypatch: pytest.MonkeyPatch) -> Iterator[Held]:
    search = Held(plan)
    monkeypatch.setattr(engine, "plan_week", search)
    yield search
    search.let_go.set()


def begun(key: str, version: int, plan: engine.Plan) -> Job:
    return jobs.begin(key, version, plan.week, plan, 30.0)


def test_one_search_at_a_time_the_others_wait_in_line(plan: engine.Plan, held: Held) -> None:
    first, second, third = (begun(f"line {n}", 0, plan) for n in range(3))
    assert held.going.wait(PATIENCE)
    assert [job.is_waiting for job in (first, second, third)] == [False, True, True]
    assert [jobs.waiting_before(job) for job in (first, second, third)] == [0, 1, 2]
    assert third.so_far() is plan
    held.let_go.set()
    assert all(job.done.wait(PATIENCE) for job in (first, second, third))
    assert held.most == 1


def test_a_job_is_found_again_by_every_tab_until_the_week_changes(plan: engine.Plan, held: Held) -> None:
    job = begun("tabs", 3, plan)
    assert begun("tabs", 3, plan) is job
    assert jobs.found("tabs", 3) is job
    assert jobs.found("tabs", 4) is None
    newer = begun("tabs", 4, plan)
    assert job.stop.is_set()
    assert job.done.wait(PATIENCE)
    assert jobs.found("tabs", 3) is None
    assert jobs.found("tabs", 4) is newer
    held.let_go.set()
    assert newer.done.wait(PATIENCE)
    assert jobs.found("tabs", 4) is newer


def test_a_job_stopped_before_its_turn_keeps_the_plan_it_had(plan: engine.Plan, held: Held) -> None:
    first = begun("turn 1", 0, plan)
    assert held.going.wait(PATIENCE)
    second = begun("turn 2", 0, plan)
    second.stop.set()
    held.let_go.set()
    assert first.done.wait(PATIENCE)
    assert second.done.wait(PATIENCE)
    assert second.plan is plan
    assert not second.fault


def test_a_fault_is_said_and_the_next_search_goes_on(
    plan: engine.Plan, monkeypatch: pytest.MonkeyPatch
) -> None:
    def faulty(*_: object, **__: object) -> engine.Plan:
        raise RuntimeError("a screw is loose")

    with monkeypatch.context() as patched:
        patched.setattr(engine, "plan_week", faulty)
        broken = begun("fault", 0, plan)
        assert broken.done.wait(PATIENCE)
    assert "a screw is loose" in broken.fault
    assert broken.so_far() is plan
    whole = begun("no fault", 0, plan)
    assert whole.done.wait(PATIENCE)
    assert whole.so_far().total_cost == plan.total_cost


def test_a_real_search_tells_of_its_best_plan_and_is_proved(plan: engine.Plan) -> None:
    job = begun("real", 0, plan)
    assert job.done.wait(PATIENCE)
    found = job.so_far()
    assert (found.total_cost, found.proof.exact) == (D(720), True)


def test_only_so_many_ended_searches_are_remembered(plan: engine.Plan, held: Held) -> None:
    held.let_go.set()
    made = [begun(f"old {n}", 0, plan) for n in range(jobs.MOST_KEPT + 5)]
    assert all(job.done.wait(PATIENCE) for job in made)
    begun("last", 0, plan)
    assert jobs.found("old 0", 0) is None
    assert jobs.found(f"old {jobs.MOST_KEPT + 4}", 0) is made[-1]
