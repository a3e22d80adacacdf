"""Issuing a plan from the page: numbered and kept; later plans say what changed and stay nearest to it."""

from decimal import Decimal

from app.session import KEY, Desk
from engine.changes import Alter
from tests.app.test_pages import page, with_sample


def test_an_issued_plan_is_numbered_and_later_changes_are_listed() -> None:
    test = page("pages/handover.py", with_sample())
    state: Desk = test.session_state[KEY]
    next(button for button in test.button if button.key == "issue").click().run()
    assert not test.exception
    assert state.issued is not None
    assert state.issued.number == 1
    plan = state.planned()
    assert plan is not None
    assert state.issued.freight_payable == plan.freight_payable

    name = next(iter(state.week.customers))
    state.commit(Alter("customer", name, "ordered", state.week.customers[name].ordered - Decimal(5)))
    test.run()
    assert not test.exception
    assert any("To ring" in text.value and name in text.value for text in test.markdown)
    next(button for button in test.button if button.key == "issue").click().run()
    assert state.issued.number == 2
