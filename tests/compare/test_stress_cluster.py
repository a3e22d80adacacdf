"""A run on a real Dask cluster of this machine, one of whose workers is killed in the middle."""

import os
import signal
from collections.abc import Iterator
from decimal import Decimal
from typing import Any

import dask
import pytest
from distributed import Client, LocalCluster

from engine.compare.stress_cases import depots_lost, drawn
from engine.compare.stress_cluster import NoCluster, cluster
from engine.compare.stress_draws import Draws, Spread
from engine.compare.stress_ground import ground_of
from engine.compare.stress_run import stress
from engine.planning.planner import plan_week
from tests.speed_reasons import dense_week


@pytest.fixture
def patience() -> Iterator[None]:
    """On a busy machine a process may take its time to start and to answer."""
    with dask.config.set(
        {"distributed.comm.timeouts.connect": "120s", "distributed.comm.timeouts.tcp": "120s"}
    ):
        yield


@pytest.mark.usefixtures("patience")
def test_no_case_is_lost_or_counted_twice_when_a_worker_is_killed() -> None:
    plan = plan_week(dense_week(4, 20))
    ground = ground_of(plan)
    draws = Draws(5, orders=Spread("even", Decimal(-20), Decimal(20)))
    cases = [*depots_lost(plan), *drawn(draws, 200)]
    killed: list[int] = []
    with LocalCluster(
        n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None, silence_logs=50
    ) as local:
        with Client(local, set_as_default=False) as client:
            pids: dict[Any, int] = client.run(os.getpid)

        def kill_one(done: int, _: int) -> None:
            if done >= 20 and not killed:
                killed.append(next(iter(pids.values())))
                os.kill(killed[0], signal.SIGKILL)

        with cluster(local.scheduler_address) as (executor, workers):
            assert workers == 2
            run = stress(ground, cases, executor, workers=workers, progress=kill_one)
    assert killed
    assert list(run.outcomes) == cases
    assert run.refused == 0
    assert run.outcomes == stress(ground, cases).outcomes


def test_a_cluster_that_is_not_there_is_said(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("engine.compare.stress_cluster.LONGEST_WAIT", 1)
    with pytest.raises(NoCluster, match="No Dask scheduler answers"), cluster("tcp://127.0.0.1:9"):
        pass
