"""The Compare page: every view with every kind of week; what a manager sees without a click."""

from pathlib import Path

from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.session import KEY, Desk
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan

APP = Path(__file__).parents[2] / "app"
SCRIPT = """
import runpy
runpy.run_path({path!r}, run_name="__main__")
"""


def page(state: Desk, view: str, **widgets: object) -> AppTest:
    """The page alone, as its navigation would run it."""
    test = AppTest.from_string(SCRIPT.format(path=str(APP / "pages" / "compare.py")), default_timeout=60)
    test.session_state[KEY] = state
    test.session_state["compare-view"] = view
    for key, value in widgets.items():
        test.session_state[key] = value
    test.run()
    assert not test.exception
    return test


def with_sample(name: str = sample_data.SMALL_WEEK) -> Desk:
    state = Desk()
    state.open(engine.read_week(sample_data.path(name)))
    return state


def said(test: AppTest) -> str:
    parts = [*test.markdown, *test.caption, *test.info, *test.error, *test.subheader, *test.title]
    return "\n".join(str(part.value) for part in parts)


def test_the_usual_plan_is_the_engine_s() -> None:
    state = with_sample()
    test = page(state, "usual")
    plan = state.planned()
    assert plan is not None
    found = saving(plan, usual_plan(plan.week, Rule.CHEAPEST).costs)
    assert f"{found.freight:,}" in said(test)
    assert round(sum(test.dataframe[0].value["Saving, EUR"]), 2) == float(found.freight)


def test_no_week_and_a_week_that_cannot_be_planned() -> None:
    assert "cannot be planned" in said(page(with_sample(sample_data.MESSY_WEEK), "usual"))
    test = AppTest.from_file(str(APP / "main.py"), default_timeout=60)
    empty = Desk()
    empty.started = True
    test.session_state[KEY] = empty
    test.run()
    test.switch_page("pages/compare.py").run()
    assert not test.exception
    assert "no week to compare" in said(test)
