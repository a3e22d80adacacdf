"""Pages with a week of whole loads: a plan at once, a search behind it, and what its vehicles look like."""

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app import jobs
from app.session import KEY, Desk
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.history import History
from engine.intake.remarks import Counts
from engine.week import Week
from tests.app.test_pages import MAIN, with_sample
from tests.records.making import D

PAGES = [f"pages/{name}.py" for name in ("figures", "plan", "reasons", "compare", "handover", "weeks")]
PATIENCE = 60


def small() -> Desk:
    """Two stores, whole loads of 25 t, one of them badly filled: its best plan is proved at once or soon."""
    week = Week.of(
        (Depot("Quarry", D(500), loads_a_day=D(2)), Depot("Harbour", D(60), opening_charge=D(900))),
        (Customer("Elm", (Order(D(62)),)), Customer("Ash", (Order(D(75)),), one_depot="yes")),
        (
            RateRow("Quarry", "Elm", D(240), per="load"),
            RateRow("Quarry", "Ash", D(260), per="load"),
            RateRow("Harbour", "Elm", D(3)),
        ),
        Rules("Week 7", load_size=D(25), charge_if_short=D(50)),
    )
    state = Desk()
    state.open(engine.Reading(week, (), Counts(0, 0, 0), ""))
    return state


def page(name: str, state: Desk, seconds: float = 2.0) -> AppTest:
    test = AppTest.from_file(str(MAIN), default_timeout=120)
    state.started, state.searching.seconds = True, seconds
    test.session_state[KEY] = state
    test.run()
    test.switch_page(name).run()
    assert not test.exception
    return test


def settled(test: AppTest) -> Desk:
    """The desk once its search has ended and its plan is shown."""
    state: Desk = test.session_state[KEY]
    job = state.searching.job
    if job is not None:
        assert job.done.wait(PATIENCE)
        assert not job.fault
    test.run()
    assert not test.exception
    return state


def said(test: AppTest) -> str:
    return " ".join(str(one.value) for kind in (test.markdown, test.caption, test.info) for one in kind)


@pytest.mark.parametrize("name", PAGES)
def test_every_page_stands_with_a_week_of_whole_loads(name: str) -> None:
    test = page(name, with_sample(sample_data.LOADS_WEEK), seconds=1.0)
    settled(test)


def test_the_plan_says_its_bound_its_gap_and_what_whole_vehicles_cost() -> None:
    """Three loads at 240 and three at 260 are 1,500. In parts: 60 x 3 + 2 x 9.60 + 75 x 10.40 = 979.20."""
    test = page("pages/plan.py", small())
    state = settled(test)
    assert state.plan is not None
    assert (state.plan.total_cost, state.plan.proof.exact) == (D(1500), True)
    assert "Proved: no plan with whole loads that serves these aims costs less" in said(test)
    assert "cost 520.80 EUR beside a plan that could send parts of vehicles" in said(test)
    assert "6 loads" in said(test)


def test_badly_filled_loads_are_listed_with_what_would_fill_them() -> None:
    test = page("pages/plan.py", small())
    settled(test)
    test.session_state["plan-view"] = "loads"
    test.run()
    assert not test.exception
    vehicles, badly = (table.value for table in test.dataframe[:2])
    assert vehicles.loc[0, ["Loads", "Full", "May leave", "Free"]].tolist() == ["6", "5", "10", "4"]
    assert badly.loc[0, "Loads"] == "2 full + 1 at 48 %"
    assert badly.iloc[0, -1] == "13 t more would fill it. An order 12 t smaller would save 240.00 EUR."


def test_reasons_are_withheld_in_words() -> None:
    test = page("pages/reasons.py", small())
    assert "This plan has whole loads" in said(test)


def test_a_second_tab_and_a_refresh_find_the_search_again() -> None:
    first = with_sample(sample_data.LOADS_WEEK)
    test = page("pages/plan.py", first, seconds=30.0)
    job = test.session_state[KEY].searching.job
    assert job is not None
    key, version = test.session_state[KEY].search_key, len(first.history.entries)
    other = Desk()
    other.show(History.of(first.week), ".", (), ())
    other.kept, other.searching.seconds = first.kept, 30.0
    assert other.search_key == key
    assert other.planned() is not None
    assert other.searching.job is job
    button = next(one for one in test.button if one.label == "Stop and keep the best")
    button.click().run()
    assert job.done.wait(PATIENCE)
    assert jobs.found(key, version) is job
    state = settled(test)
    assert state.plan is not None
    assert state.plan.proof.lower_bound <= state.plan.total_cost


def test_a_proposed_change_is_priced_with_whole_loads() -> None:
    """13 t more to Elm fill its third load: nothing is dearer. 14 t more need a fourth: 240 EUR."""
    from engine.changes import Alter

    test = page("pages/plan.py", small())
    state = settled(test)
    state.propose(Alter("customer", "Elm", "ordered", D(76)))
    test.run()
    assert not test.exception
    assert "240.00 EUR dearer" in said(test)
    state.take_back()
    state.propose(Alter("customer", "Elm", "ordered", D(75)))
    test.run()
    assert "stays the same" in said(test)
