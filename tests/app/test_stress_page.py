"""Stress and the trade-off on Compare: what the page says is what the engine says."""

import itertools
import threading
import time
from dataclasses import replace
from decimal import Decimal
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app import stress_job
from app.parts.stress_view import OWN, run_key
from app.session import KEY, Desk
from engine.changes import Alter
from engine.compare.frontier import Emissions, frontier
from engine.compare.stress import stressed, usual_cases
from engine.compare.stress_cases import depots_lost, drawn
from engine.compare.stress_draws import Draws, Spread
from engine.history import History
from tests.app.test_compare_page import at, kept_in, whole
from tests.compare.test_whole_loads import week as small_loads

SCRIPT = """
import runpy
runpy.run_path({path!r}, run_name="__main__")
"""
PAGE = Path(__file__).parents[2] / "app" / "pages" / "compare.py"
D = Decimal


def with_sample() -> Desk:
    state = Desk()
    state.open(engine.read_week(sample_data.path(sample_data.SMALL_WEEK)))
    return state


def page(state: Desk, view: str, **typed: object) -> AppTest:
    test = AppTest.from_string(SCRIPT.format(path=str(PAGE)), default_timeout=60)
    test.session_state[KEY] = state
    test.session_state["compare-view"] = view
    for key, value in typed.items():
        test.session_state[key] = value
    test.run()
    assert not test.exception
    return test


def said(test: AppTest) -> str:
    parts = [*test.markdown, *test.caption, *test.info, *test.error]
    return "\n".join(str(part.value) for part in parts).replace("\\", "")


def run_of(test: AppTest) -> stress_job.Job:
    state: Desk = test.session_state[KEY]
    _, key = test.session_state[OWN]
    job = stress_job.job_of(key, len(state.history.entries))
    assert job is not None
    return job


def finished(test: AppTest) -> AppTest:
    job = run_of(test)
    assert job.done.wait(60)
    test.run()
    assert not test.exception
    return test


def test_a_run_from_the_button_to_the_ranking() -> None:
    state = with_sample()
    test = page(state, "stress", **{"stress-lose": ["depots"], "stress-draw": "30", "stress-seed": "5"})
    assert not test.dataframe
    test.button(key="stress-run").click().run()
    finished(test)
    plan = state.planned()
    assert plan is not None
    draws = Draws(
        5, Spread("triangular", D(-20), D(20)), Spread("even", D(-10), D(0)),
        Spread("triangular", D(0), D(8), D(2)),
    )  # fmt: skip
    expected = stressed(plan, [*depots_lost(plan), *drawn(draws, 30)])
    frame = test.dataframe[0].value
    ranked = expected.ranked()
    assert [name for name in frame["Case"] if name.endswith("lost")] == [
        f"{one.case.depot} lost" for one in ranked
    ]
    worst = frame[frame["Case"] == f"{ranked[0].case.depot} lost"].iloc[0]
    assert float(worst["More short, t"]) == float(expected.more_short(ranked[0]))
    assert float(worst["Dearer by, EUR"]) == float(expected.dearer(ranked[0]))
    text = said(test)
    assert f"Worst of all: **{ranked[0].case.depot} lost**" in text
    short = sum(bool(one.short) for one in expected.drawn)
    assert f"Something goes short in {short} of 30, " in text
    test.run()
    assert test.dataframe, "the result is kept while the week is the same"
    depot = next(iter(state.week.depots.values()))
    assert state.commit(Alter("depot", depot.name, "available", depot.available + 1))
    test.run()
    assert not test.dataframe


def test_a_run_goes_by_the_week_and_its_version_and_not_by_the_session() -> None:
    plan = with_sample().planned()
    assert plan is not None
    job = stress_job.begin("a week", 3, plan, depots_lost(plan))
    assert job.done.wait(60)
    assert stress_job.job_of("a week", 3) is job
    assert stress_job.job_of("another", 3) is None
    again = stress_job.begin("a week", 3, plan, depots_lost(plan)[:1])
    assert stress_job.job_of("a week", 3) is again
    assert job.stop.is_set()
    assert stress_job.job_of("a week", 4) is None
    assert again.stop.is_set(), "what was changed since needs no answer any more"


def test_stop_keeps_what_is_done(monkeypatch: pytest.MonkeyPatch) -> None:
    from engine.compare import stress_run

    solve = stress_run.outcome_of

    def slowly(*args: object) -> object:
        time.sleep(0.02)
        return solve(*args)  # type: ignore[arg-type]

    monkeypatch.setattr(stress_run, "outcome_of", slowly)
    test = page(with_sample(), "stress", **{"stress-lose": ["depots"], "stress-draw": "2000"})
    test.button(key="stress-run").click().run()
    job = run_of(test)
    while job.finished < 5:
        time.sleep(0.01)
    test.run()
    test.button(key="stress-stop").click().run()
    finished(test)
    assert job.found is not None
    assert 5 <= len(job.found.outcomes) < 2000
    assert "Stopped: " in said(test)


def test_a_refreshed_browser_finds_its_run_stops_it_and_keeps_what_was_found(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from engine.compare import stress_run

    solve, may_go_on = stress_run.outcome_of, threading.Event()
    done = itertools.count(1)

    def waiting(*args: object) -> object:
        if next(done) > 5:
            assert may_go_on.wait(60)
        return solve(*args)  # type: ignore[arg-type]

    monkeypatch.setattr(stress_run, "outcome_of", waiting)
    (now,) = kept_in(tmp_path, monkeypatch, sample_data.SMALL_WEEK)
    first = at(whole({"week": now.listed.id}), "stress")
    first.text_input(key="stress-draw").set_value("300")
    first.pills(key="stress-lose").set_value(["depots"]).run()
    first.button(key="stress-run").click().run()
    again = at(whole({"week": now.listed.id}), "stress")  # what a refresh is: a session that knows nothing
    reader = at(whole({"read": now.listed.read_id}), "stress")
    assert not [button for button in reader.button if button.key == "stress-stop"]
    again.button(key="stress-stop").click().run()
    may_go_on.set()
    job = stress_job.job_of(run_key(again.session_state[KEY]), 0)
    assert job is not None
    assert job.done.wait(60)
    for test in (first.run(), again.run(), at(whole({"week": now.listed.id}), "stress")):
        assert job.found is not None
        assert f"Stopped: {len(job.found.outcomes)} of 309 cases" in said(test)
        assert len(test.dataframe[0].value) == len(job.found.ranked())


@pytest.mark.parametrize(
    ("key", "text", "answer"),
    [
        ("stress-stray-orders", "odd 1 2", "does not say how a figure strays"),
        ("stress-draw", "many", "is no whole number"),
        ("stress-draw", "90000", "at most 5,000"),
        ("stress-orders", "ten", "ten"),
        ("stress-rates", "900", "between 0 and 100"),
    ],
)
def test_what_cannot_be_read_is_said_and_nothing_runs(key: str, text: str, answer: str) -> None:
    test = page(with_sample(), "stress", **{key: text})
    assert answer in said(test)
    assert not [button for button in test.button if button.key == "stress-run"]


def test_emissions_ask_for_the_factor_and_its_source() -> None:
    state = with_sample()
    assert "there is no default" in said(page(state, "frontier"))
    assert "there is no default" in said(page(state, "frontier", **{"frontier-factor": "0.06"}))
    bad = page(state, "frontier", **{"frontier-factor": "-1", "frontier-source": "us"})
    assert bad.error
    test = page(state, "frontier", **{"frontier-factor": "0.06", "frontier-source": "our 2025 *report*"})
    plan = state.planned()
    assert plan is not None
    points = frontier(plan, Emissions(D("0.06"), "x")).points
    frame = test.dataframe[0].value
    assert list(frame["Emissions, kg CO2e"]) == [float(point.emissions) for point in points]
    assert list(frame["Freight and charges, EUR"]) == [float(point.cost) for point in points]
    assert "(our 2025 *report*)" in said(test)


def test_lanes_without_km_are_named() -> None:
    state = with_sample()
    week = state.week
    rows = tuple(replace(row, km=None) for row in week.rates)
    state.history = History.of(
        type(week).of(tuple(week.depots.values()), tuple(week.customers.values()), rows, week.rules)
    )
    test = page(state, "frontier", **{"frontier-factor": "0.06", "frontier-source": "us"})
    assert "column Km" in said(test)
    assert not test.dataframe


def test_with_whole_loads_cases_are_searched_for_and_what_is_proved_stands_beside() -> None:
    engine.plan_week(small_loads())  # compiles, where that is still to do, before the page's time runs
    state = Desk()
    state.history = History.of(small_loads())
    plan = state.planned()
    search = state.searching.job
    assert search is None or search.done.wait(60), "a run begins from the plan that the search ends with"
    test = page(state, "stress")
    assert "no weeks are drawn" in said(test)
    assert not [box for box in test.text_input if box.key == "stress-draw"]
    test.text_input(key="stress-seconds").set_value("2.5").run()
    assert "'2.5' is no whole number" in said(test)
    test.text_input(key="stress-seconds").set_value("3").run()
    test.button(key="stress-run").click().run()
    finished(test)
    plan = plan if search is None else search.so_far()
    assert plan is not None
    expected = stressed(plan, usual_cases(plan), seconds=3)
    frame = test.dataframe[0].value
    ranked = expected.ranked()
    assert list(frame["Case"]) == [one.case.words[:1].upper() + one.case.words[1:] for one in ranked]
    assert list(frame["At least, EUR"]) == [float(expected.surely_dearer(one)) for one in ranked]
    assert "searched for 3 s" in said(test)
    refused = page(state, "frontier")
    assert "copy of the week" in said(refused)
    assert not refused.text_input
