"""A run of many cases: the same outcomes however it is spread, each once, with progress and stop."""

from collections.abc import Callable
from concurrent.futures import Executor, Future, ThreadPoolExecutor
from decimal import Decimal
from typing import Any

import pytest

from engine.compare.stress_cases import Case, all_by, depots_lost, drawn, lanes_lost
from engine.compare.stress_draws import Draws, Spread
from engine.compare.stress_ground import Ground, ground_of
from engine.compare.stress_run import TRIES, PartLost, part_of, processes, stress
from engine.planning.planner import plan_week
from tests.speed_reasons import dense_week

D = Decimal
DRAWS = Draws(
    11, Spread("triangular", D(-20), D(20)), Spread("even", D(-10), D(0)), Spread("even", D(0), D(9))
)


@pytest.fixture(scope="module")
def ground() -> Ground:
    return ground_of(plan_week(dense_week(5, 30)))


@pytest.fixture(scope="module")
def cases() -> list[Case]:
    plan = plan_week(dense_week(5, 30))
    return [*depots_lost(plan), *lanes_lost(plan), *all_by("rates", [D(5)]), *drawn(DRAWS, 60)]


class Unsteady(Executor):
    """Loses the first tries of every third part, and hands some parts in twice."""

    def __init__(self, losses: int) -> None:
        self.losses = losses
        self.seen: dict[Any, int] = {}

    def submit(self, work: Callable[..., Any], /, *args: Any, **named: Any) -> Future[Any]:
        future: Future[Any] = Future()
        cases = args[1]
        count = self.seen[cases] = self.seen.get(cases, 0) + 1
        if cases[0].number % 3 == 0 and count <= self.losses:
            future.set_exception(OSError("the worker is gone"))
        else:
            outcomes, seconds = work(*args)
            future.set_result((outcomes + outcomes[:1], seconds))
        return future


def test_any_executor_gives_the_same(ground: Ground, cases: list[Case]) -> None:
    here = stress(ground, cases)
    with ThreadPoolExecutor(2) as threads:
        spread = stress(ground, cases, threads)
        twice = stress(ground, [*cases, *cases[:3]], threads)
    assert list(here.outcomes) == list(spread.outcomes) == list(twice.outcomes) == cases
    assert here.outcomes == spread.outcomes == twice.outcomes
    assert not any(outcome.why for outcome in here.outcomes.values())
    assert here.refused == spread.refused == twice.refused == 0


def test_what_is_lost_is_handed_out_again_and_what_comes_twice_counts_once(
    ground: Ground, cases: list[Case]
) -> None:
    run = stress(ground, cases, Unsteady(losses=TRIES - 1), workers=2)
    assert list(run.outcomes) == cases
    assert run.again >= TRIES - 1
    assert run.refused > 5
    with pytest.raises(PartLost, match="OSError") as lost:
        stress(ground, cases, Unsteady(losses=TRIES), workers=2)
    assert 0 < len(lost.value.run.outcomes) < len(cases)


def test_workers_that_die_are_replaced(ground: Ground, cases: list[Case]) -> None:
    """Every process of the first pool is killed once the first part is back; the rest is done by another."""
    pools = [processes(1)]
    killed = []

    def kill(done: int, _: int) -> None:
        if done and not killed:
            for process in list(pools[0]._processes.values()):
                process.kill()
                killed.append(process)

    def renew() -> Executor:
        pools.append(processes(1))
        return pools[-1]

    run = stress(ground, cases, pools[0], workers=1, progress=kill, renew=renew)
    for pool in pools:
        pool.shutdown()
    assert len(killed) > 0
    assert len(pools) == 2
    assert run.again > 0
    assert run.outcomes == stress(ground, cases).outcomes


@pytest.mark.parametrize("threads", [0, 2])
def test_a_stop_keeps_what_is_done(ground: Ground, cases: list[Case], threads: int) -> None:
    told: list[tuple[int, int]] = []
    pool = ThreadPoolExecutor(threads) if threads else None
    run = stress(
        ground, cases, pool, progress=lambda done, of: told.append((done, of)), stop=lambda: told[-1][0] >= 9
    )
    assert run.stopped
    assert 9 <= len(run.outcomes) < len(cases)
    assert told[0] == (0, len(cases))
    assert told == sorted(told)
    whole = stress(ground, cases).outcomes
    assert all(whole[case] == outcome for case, outcome in run.outcomes.items())


def test_a_fault_of_ours_is_not_tried_again(ground: Ground) -> None:
    with ThreadPoolExecutor(1) as pool, pytest.raises(ValueError, match="give it Draws"):
        stress(ground, [Case("drawn")], pool)


def test_the_ground_is_unpacked_once(ground: Ground) -> None:
    import pickle

    one, other = (pickle.loads(pickle.dumps(ground)) for _ in range(2))
    assert one is other
    case = Case("rates", percent=D(3))
    assert part_of(one, [case])[0] == part_of(ground, [case])[0]
