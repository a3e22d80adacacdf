"""The Compare page: every view with every kind of week; what a manager sees without a click."""

import os
from pathlib import Path

from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.session import KEY, Desk
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.records import create_week, open_records

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
    found = saving(plan, usual_plan(plan.week, Rule.NEAREST).costs)
    assert f"{found.freight:,}" in said(test)
    assert round(sum(test.dataframe[0].value["Saving, EUR"]), 2) == float(found.freight)


def whole(query: dict[str, str]) -> AppTest:
    """The desk as an address opens it."""
    test = AppTest.from_file(str(APP / "main.py"), default_timeout=60)
    for name, value in query.items():
        test.query_params[name] = value
    test.run()
    assert not test.exception
    return test


def test_a_manager_sees_cost_saving_change_and_reasons_without_a_click(tmp_path: Path) -> None:
    """Two weeks in the records; the address for reading only lands on the answer."""
    records = open_records(str(tmp_path / "two.sqlite"))
    before, now = (
        create_week(records, engine.read_week(sample_data.path(name)))
        for name in ("week_before.xlsx", sample_data.SMALL_WEEK)
    )
    plans = [engine.plan_week(one.history.week) for one in (before, now)]
    os.environ["HITHE_RECORDS"], held = str(tmp_path / "two.sqlite"), os.environ["HITHE_RECORDS"]
    try:
        test = whole({"read": now.listed.read_id})
    finally:
        os.environ["HITHE_RECORDS"] = held
    shown = {metric.label.replace("\\", ""): metric.value for metric in test.metric}
    usual = usual_plan(plans[1].week, Rule.NEAREST)
    change = plans[1].freight_payable - plans[0].freight_payable
    assert shown == {
        "Week 6: freight payable": f"{plans[1].freight_payable:,} EUR",
        "Saving against nearest depot first": f"{saving(plans[1], usual.costs).freight:,} EUR",
        "Change from Week 5": f"{change:,} EUR".replace("-", "\u2212"),
    }
    text = said(test).replace("\\", "")
    assert "Week 6 costs 3,318.73 EUR less freight than Week 5" in text
    assert "EUR less by stock" in text
    table = test.dataframe[0].value
    assert list(table["Step"]) == ["Volume", "Mix", "Stock", "Rates", "Surcharge", "Rounding", "Together"]
    freight = table["Freight, EUR"]
    assert round(sum(freight[:-1]), 2) == freight.iloc[-1] == float(change)
    assert not [button for button in test.button if button.key == "undo"]


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
