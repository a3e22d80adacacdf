"""Every page, with no week, the sample week, a faulty one and a large one: no exception, and its words."""

from decimal import Decimal
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.parts.map_drawing import drawing
from app.parts.map_layers import layer_ids
from app.parts.plan_map import lines_of, points_of
from app.session import KEY, Desk
from engine.changes import Alter

MAIN = Path(__file__).parents[2] / "app" / "main.py"
PAGES = ["pages/figures.py", "pages/plan.py", "pages/handover.py"]


def page(name: str, state: Desk | None = None) -> AppTest:
    test = AppTest.from_file(str(MAIN), default_timeout=60)
    if state is not None:
        state.started = True
        test.session_state[KEY] = state
    test.run()
    test.switch_page(name).run()
    assert not test.exception
    return test


def with_sample(name: str = sample_data.SMALL_WEEK) -> Desk:
    state = Desk()
    state.open(engine.read_week(sample_data.path(name)))
    return state


@pytest.mark.parametrize("name", PAGES)
@pytest.mark.parametrize(
    "sample", [None, sample_data.SMALL_WEEK, sample_data.MESSY_WEEK, sample_data.LARGE_WEEK]
)
def test_every_page_stands_with_every_week(name: str, sample: str | None) -> None:
    page(name, with_sample(sample) if sample else Desk())


def test_a_first_visitor_reaches_a_plan_of_the_sample_in_one_click() -> None:
    test = page("pages/figures.py", Desk())
    next(one for one in test.button if one.label == "See the plan of the sample week").click().run()
    assert not test.exception
    assert [one.value for one in test.title] == ["Plan"]
    assert test.metric[0].value == "59,566.18"


@pytest.mark.parametrize("name", [one for one in PAGES if "figures" not in one])
def test_a_page_without_a_week_opens_the_sample_itself(name: str) -> None:
    test = page(name, Desk())
    next(one for one in test.button if one.label == "Open the sample week").click().run()
    assert not test.exception
    assert not [one for one in test.button if one.label == "Open the sample week"]


def test_a_typed_quantity_is_held_and_undone() -> None:
    state = with_sample()
    test = page("pages/plan.py", state)
    before = state.planned()
    assert before is not None
    grid = f"shipments-{state.generation}-depot-None-False-False"
    edited = {"edited_rows": {0: {"Send": "12.5"}}, "added_rows": [], "deleted_rows": []}
    test.session_state[grid] = edited
    test.run()
    assert not test.exception
    assert not state.week.holds
    assert any("Not made yet" in text.value for text in test.markdown)
    state.accept("promised")
    test.run()
    assert not test.exception
    assert [(h.quantity, h.reason) for h in state.week.holds.values()] == [(Decimal("12.5"), "promised")]
    state.undo()
    test.run()
    assert not test.exception
    assert not state.week.holds
    assert state.planned().total_cost == before.total_cost  # type: ignore[union-attr]


def test_a_quantity_that_cannot_be_is_refused_in_words_and_the_week_stays() -> None:
    state = with_sample()
    test = page("pages/plan.py", state)
    grid = f"shipments-{state.generation}-depot-None-False-False"
    edited = {"edited_rows": {0: {"Send": "999999"}}, "added_rows": [], "deleted_rows": []}
    test.session_state[grid] = edited
    test.run()
    assert not test.exception
    assert any("This change cannot be planned" in text.value for text in test.markdown)
    assert not state.week.holds
    state.take_back()
    test.run()
    assert state.proposal is None


def test_a_cell_that_cannot_be_read_stops_the_plan_and_stays_on_screen() -> None:
    state = with_sample()
    test = page("pages/figures.py", state)
    key = f"depots-{state.generation}-{state.grid('depots').again}"
    test.session_state[key] = {
        "edited_rows": {0: {"Available": "a lot"}},
        "added_rows": [],
        "deleted_rows": [],
    }
    test.run()
    assert not test.exception
    assert state.grid("depots").draft.iloc[0]["Available"] == "a lot"
    assert state.planned() is None
    state.start_afresh()
    test.run()
    assert state.grid("depots").base.iloc[0]["Available"] == "a lot"


def test_the_list_and_the_map_follow_each_other() -> None:
    state = with_sample()
    test = page("pages/plan.py", state)
    plan = state.planned()
    assert plan is not None
    drawn = drawing(points_of(plan), lines_of(plan))
    assert drawn is not None
    quarry = [mark.title for mark in drawn.depots].index("Quarry")
    test.session_state["plan-map"] = {"selection": {"indices": {layer_ids(drawn)["depots"]: [quarry]}}}
    test.run()
    assert not test.exception
    assert test.session_state["shown-depot"] == "Quarry"
    next(one for one in test.selectbox if one.label == "Show depot").select("Harbour").run()
    assert not test.exception
    assert test.session_state["shown-depot"] == "Harbour"


@pytest.mark.parametrize("lanes", ["dearest", "short", "all"])
def test_the_map_shows_chosen_lanes(lanes: str) -> None:
    test = page("pages/plan.py", with_sample())
    next(one for one in test.selectbox if one.label == "Lanes on the map").select(lanes).run()
    assert not test.exception


def test_a_haulier_raises_all_its_rates_and_the_change_says_why() -> None:
    state = with_sample()
    test = page("pages/figures.py", state)
    test.selectbox(key="raise-haulier").select("Oxcart")
    test.text_input(key="raise-percent").input("10 %")
    next(one for one in test.button if one.label == "Put it up").click().run()
    assert not test.exception
    assert any("rates of Oxcart up 10 %" in one.value.replace("\\", "") for one in test.caption)
    test.text_input(key="proposal-why").input("new list from Wednesday")
    test.button(key="accept").click().run()
    assert not test.exception
    old = engine.read_week(sample_data.path(sample_data.SMALL_WEEK)).week
    for before, after in zip(old.rates, state.week.rates, strict=True):
        assert after.rate == before.rate * (Decimal("1.1") if before.haulier == "Oxcart" else 1)
    assert state.history.entries[-1].why == "new list from Wednesday"


def test_what_left_as_planned_is_ticked_and_recorded() -> None:
    state = with_sample()
    test = page("pages/plan.py", state)
    plan = state.planned()
    assert plan is not None
    test.session_state["plan-view"] = "gone"
    test.session_state[f"gone-planned-{state.generation}-All"] = {
        "selection": {"rows": [0, 2], "columns": [], "cells": []}
    }
    test.run()
    test.button(key="gone-planned-add").click().run()
    test.button(key="accept").click().run()
    assert not test.exception
    assert [(g.name, g.customer, g.quantity) for g in state.week.gone.values()] == [
        ("Load 1", plan.shipments[0].customer, plan.shipments[0].quantity),
        ("Load 2", plan.shipments[2].customer, plan.shipments[2].quantity),
    ]
    now = state.planned()
    assert now is not None
    assert now.freight_payable == plan.freight_payable


def test_who_goes_short_is_named_beside_the_costs_and_before_a_change_is_made() -> None:
    state = with_sample()
    test = page("pages/plan.py", state)
    assert any(
        "**Short:** Mistletoe (190.5), Cole (9.5), Sorrel (8.5)." in one.value for one in test.markdown
    )
    state.propose(Alter("depot", "Railhead", "available", Decimal(400)))
    test.run()
    (put_up,) = [one.value for one in test.markdown if "Not made yet" in one.value]
    assert "**270 t more short:** " in put_up
    assert put_up.index("more short") < put_up.index("Freight")


def test_a_faulty_week_leads_back_to_the_figures() -> None:
    test = page("pages/plan.py", with_sample(sample_data.MESSY_WEEK))
    assert test.error[0].value == "This week cannot be planned as it stands. Mend what is listed here."
    assert test.get("page_link")[0].proto.label == "Mend it on Figures"
