"""The Reasons page: every view with every week, its answers beside those of the engine, no field's terms."""

from dataclasses import replace
from decimal import Decimal
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.session import KEY, Desk
from engine.changes import Alter
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.history import History
from engine.reasons import chain, nearest_to_paying, sentences, values
from engine.week import Week

APP = Path(__file__).parents[2] / "app"
VIEWS = ["rates", "why", "values", "curve", "swaps"]
FIELD_TERMS = ("dual", "basis", "degenerate", "reduced cost", "shadow")
D = Decimal

SCRIPT = """
import runpy
runpy.run_path({path!r}, run_name="__main__")
"""


def page(state: Desk, view: str = "rates", **widgets: object) -> AppTest:
    """The page alone, as its navigation would run it."""
    test = AppTest.from_string(SCRIPT.format(path=str(APP / "pages" / "reasons.py")), default_timeout=60)
    test.session_state[KEY] = state
    test.session_state["reasons-view"] = view
    for key, value in widgets.items():
        test.session_state[key] = value
    test.run()
    assert not test.exception
    return test


def with_sample(name: str = sample_data.SMALL_WEEK) -> Desk:
    state = Desk()
    state.open(engine.read_week(sample_data.path(name)))
    return state


def of(week: Week) -> Desk:
    state = Desk()
    state.history = History.of(week)
    return state


def said(test: AppTest) -> str:
    parts = [*test.markdown, *test.caption, *test.info, *test.error, *test.subheader, *test.title]
    return "\n".join(str(part.value) for part in parts)


@pytest.mark.parametrize("view", VIEWS)
@pytest.mark.parametrize("sample", [sample_data.SMALL_WEEK, sample_data.LARGE_WEEK])
def test_every_view_stands_and_uses_no_term_of_the_field(view: str, sample: str) -> None:
    text = said(page(with_sample(sample), view)).lower()
    assert not [term for term in FIELD_TERMS if term in text]


@pytest.mark.parametrize("kind", ["used", "unquoted"])
def test_the_other_lists_of_rates_stand(kind: str) -> None:
    page(with_sample(), "rates", **{"rates-kind": kind})


def test_the_list_to_negotiate_from_is_the_engine_s() -> None:
    state = with_sample()
    test = page(state)
    plan = state.planned()
    assert plan is not None
    near = nearest_to_paying(plan, 100)
    frame = test.dataframe[0].value
    assert list(frame["Depot"]) == [lane.interval.key.depot for lane in near]
    assert list(frame["Pays below, EUR"]) == [float(lane.interval.pays_below or 0) for lane in near]
    assert list(frame["Would carry, t"]) == [float(lane.carries) for lane in near]


def test_values_of_a_unit_are_the_engine_s() -> None:
    state = with_sample()
    test = page(state, "values")
    plan = state.planned()
    assert plan is not None
    found = values(plan, holds=True).depots
    frame = test.dataframe[0].value
    assert list(frame["One more costs, EUR"]) == [float(one.one_more or 0) for one in found]
    assert list(frame["holds for, t"]) == [float(one.one_more_holds_for or 0) for one in found]


def test_no_week_and_a_week_that_cannot_be_planned() -> None:
    state = with_sample(sample_data.MESSY_WEEK)
    assert state.planned() is None
    assert "cannot be planned" in said(page(state))
    test = AppTest.from_file(str(APP / "main.py"), default_timeout=60)
    empty = Desk()
    empty.started = True
    test.session_state[KEY] = empty
    test.run()
    assert not test.exception


def test_names_are_never_markdown() -> None:
    bad = "![i](http://x.example/y) *Elm* $z$"
    week = Week.of(
        (Depot("Quarry", D(20)), Depot(bad, D(20))),
        (Customer(bad + "!", (Order(D(10)),)),),
        (RateRow("Quarry", bad + "!", D(4)), RateRow(bad, bad + "!", D(5))),
        Rules(unit="t"),
    )
    for view in VIEWS:
        text = said(page(of(week), view))
        assert "![" not in text
        assert "*Elm*" not in text


def test_even_shares_say_why_there_are_no_values() -> None:
    week = Week.of(
        (Depot("Quarry", D(5)),),
        (Customer("Elm", (Order(D(10)),)), Customer("Ash", (Order(D(10)),))),
        (RateRow("Quarry", "Elm", D(3)), RateRow("Quarry", "Ash", D(3))),
    )
    shared = replace(week, rules=replace(week.rules, when_short="even share"))
    assert "shared evenly" in said(page(of(shared), "values"))
    assert "shared evenly" in said(page(of(shared), "curve"))


def test_a_chain_is_told_in_the_desk_s_own_numbers() -> None:
    """The sentence's numbers follow the decimal mark that the desk reads with."""
    state = with_sample()
    plan = state.planned()
    assert plan is not None
    name = plan.model.customers[0]
    told = chain(plan, Alter("customer", name, "ordered", plan.week.customers[name].ordered + D("1.5")))
    from app.parts.words import number

    (first, *_) = sentences(told, "t", "EUR", lambda value: number(value, ","))
    assert "1,5 t" in first
