"""Fewer changes for some money, from the page: priced before it is made, one change, undone as one."""

from decimal import Decimal

from streamlit.testing.v1 import AppTest

from app.keeping import issue, keep_up
from app.session import KEY, Desk
from engine.changes import Alter
from engine.planning.differences import difference
from tests.app.test_pages import page, with_sample


def asked(test: AppTest, key: str):  # type: ignore[no-untyped-def]
    return next(one for one in (*test.button, *test.text_input, *test.selectbox) if one.key == key)


def test_a_plan_with_fewer_changes_is_picked_made_and_undone() -> None:
    test = page("pages/plan.py", with_sample())
    state: Desk = test.session_state[KEY]
    plan = state.planned()
    assert plan is not None
    keep_up(state)
    assert issue(state, plan) is not None
    depot = next(iter(state.week.depots))
    state.commit(Alter("depot", depot, "available", state.week.depots[depot].available - Decimal(60)))
    test.session_state["plan-view"] = "steady"
    test.run(timeout=60)
    assert not test.exception
    least = state.planned()
    assert least is not None
    changes = len(difference(state.issued, least).rows)  # type: ignore[arg-type]
    assert any(f"changes **{changes} lanes**" in one.value for one in test.markdown)

    asked(test, "steady-asked").select("spend")
    asked(test, "steady-much").input("100000").run(timeout=60)
    assert not test.exception
    asked(test, "steady-take").click().run(timeout=60)
    assert not test.exception
    assert state.proposed is not None
    assert state.proposed.plan is not None
    assert state.proposed.plan.total_cost > least.total_cost
    assert len(difference(state.issued, state.proposed.plan).rows) < changes  # type: ignore[arg-type]
    asked(test, "accept").click().run(timeout=60)
    assert not test.exception
    assert len(state.history.entries) == 2
    assert state.week.holds
    state.undo()
    assert not state.week.holds
