"""What changes touch: those that do not touch each other may be made in either order."""

from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.figures import Customer, Depot, Gone, RateKey, RateRow
from engine.history import History
from engine.touch import touch_each_other
from engine.week import Refused
from tests.records.making import TEAL, a_change, in_any_order, small_week

D = Decimal
BIRCH = RateKey("Quarry", "Birch")
PIT = Alter("depot", "Quarry", "name", "Pit")


@pytest.mark.parametrize(
    ("first", "second", "touch"),
    [
        (Alter("customer", "Aster", "ordered", D(1)), Alter("customer", "Aster", "ordered", D(2)), True),
        (Alter("customer", "Aster", "ordered", D(1)), Alter("customer", "Aster", "orders", ()), True),
        (Alter("customer", "Aster", "ordered", D(1)), Alter("customer", "Aster", "priority", "A"), False),
        (Alter("customer", "Aster", "ordered", D(1)), Alter("customer", "Birch", "ordered", D(1)), False),
        (Alter("customer", "Aster", "ordered", D(1)), Remove("customer", "Aster"), True),
        (Alter("rate", TEAL, "rate", D(1)), Alter("rate", TEAL, "at_most", D(1)), False),
        (Alter("rate", TEAL, "rate", D(1)), Alter("rate", TEAL, "rate", D(1)), True),
        (Alter("rate", TEAL, "rate", D(1)), Alter("rate", TEAL._replace(number=2), "rate", D(1)), False),
        (SetHold(TEAL, D(1)), Lift(TEAL), True),
        (SetHold(TEAL, D(1)), Alter("rate", TEAL, "rate", D(1)), False),
        (SetHold(TEAL, D(1)), Remove("rate", TEAL), True),
        (SetHold(BIRCH, D(1)), Remove("depot", "Quarry"), True),
        (SetHold(BIRCH, D(1)), Remove("customer", "Aster"), False),
        (SetHold(BIRCH, D(1)), PIT, True),
        (SetHold(TEAL, D(1)), PIT, False),
        (Add(RateRow("Pit", "Aster", D(1))), PIT, True),
        (Alter("customer", "Aster", "one_depot", "Quarry"), PIT, True),
        (Alter("customer", "Aster", "one_depot", "yes"), PIT, False),
        (Add(Customer("Elm", (), one_depot="Quarry")), PIT, True),
        (Add(RateRow("Quarry", "Birch", D(1))), Add(RateRow("Quarry", "Birch", D(2))), True),
        (Add(RateRow("Quarry", "Birch", D(1))), Alter("rate", BIRCH, "rate", D(2)), False),
        (Add(RateRow("Quarry", "Birch", D(1)), place=3), Alter("rate", BIRCH, "rate", D(2)), True),
        (Add(Depot("Mill", D(1))), Add(Depot("Mill", D(2))), True),
        (Add(Depot("Mill", D(1))), Add(Customer("Mill", ())), False),
        (Add(Gone("L2", "Quarry", "Birch", D(1), D(1))), Remove("gone", "L2"), True),
        (Add(Gone("L2", "Quarry", "Birch", D(1), D(1))), Remove("gone", "L1"), False),
        (Add(Gone("L2", "Quarry", "Birch", D(1), D(1))), Remove("depot", "Quarry"), True),
        (Alter("rule", "", "step", D(1)), Alter("rule", "", "fuel_surcharge", D(1)), False),
        (Alter("rule", "", "unit", "kg"), Alter("customer", "Aster", "ordered", D(1)), True),
        (Together((Lift(TEAL), PIT)), Alter("depot", "Quarry", "available", D(1)), True),
        (Together((Lift(TEAL), SetHold(BIRCH, D(2)))), Alter("rate", BIRCH, "rate", D(2)), False),
    ],
)
def test_what_touches_what(first: Change, second: Change, touch: bool) -> None:
    assert touch_each_other(first, second) is touch
    assert touch_each_other(second, first) is touch


@settings(max_examples=400, deadline=None)
@given(st.data())
def test_changes_that_do_not_touch_give_the_same_week_in_either_order(data: st.DataObject) -> None:
    def pick(options: object) -> object:
        return data.draw(st.sampled_from(options))  # type: ignore[type-var]

    week = small_week()
    for step in range(data.draw(st.integers(0, 2))):
        week = week.apply(a_change(week, pick, step))
    first, second = a_change(week, pick, 8), a_change(week, pick, 9)
    one, two = (Together((change, week.inverse(change))) for change in (first, second))
    if not touch_each_other(one, two):
        assert in_any_order(week.apply(first).apply(second)) == in_any_order(week.apply(second).apply(first))


def test_a_change_in_the_middle_is_reverted_when_nothing_rests_on_it() -> None:
    history = History.of(small_week())
    history = history.after(Alter("customer", "Aster", "ordered", D(40)), "Ann")
    history = history.after(SetHold(BIRCH, D(3)), "Ben")
    history = history.after(Alter("customer", "Birch", "ordered", D(30)), "Ann")
    reverted = history.reverted(0, "Ann", "a mistake")
    assert reverted.week.customers["Aster"] == small_week().customers["Aster"]
    assert reverted.week.customers["Birch"].ordered == 30
    assert [reverted.in_force(position) for position in range(4)] == [False, True, True, True]
    assert reverted.reverted(3).week == history.week
    with pytest.raises(Refused, match="Change 1 is undone already"):
        reverted.reverted(0)
    with pytest.raises(Refused, match="no change number 9"):
        reverted.reverted(8)


def test_a_change_that_others_rest_on_is_not_reverted_alone() -> None:
    history = History.of(small_week()).after(Alter("depot", "Quarry", "name", "Pit"))
    history = history.after(SetHold(RateKey("Pit", "Birch"), D(3)))
    history = history.after(Alter("depot", "Northgate", "available", D(3)))
    with pytest.raises(Refused, match="change 2 was made after it"):
        history.reverted(0)
    assert history.reverted(1).reverted(0).week.depots["Quarry"].available == 30


def test_everybody_undoes_their_own() -> None:
    history = History.of(small_week())
    history = history.after(Alter("customer", "Aster", "ordered", D(40)), "Ann")
    history = history.after(SetHold(BIRCH, D(3)), "Ben")
    assert history.undoable() == 1
    assert history.undoable("Ann") == 0
    history = history.undo("Ann", by="Ann")
    assert history.undoable("Ann") is None
    assert history.week.holds[BIRCH].quantity == 3
    assert history.redoable("Ben") is None
    history = history.after(Alter("rule", "", "step", D(1)), "Ben")
    assert history.redoable("Ann") == 2
    assert history.redo("Ann", by="Ann").week.customers["Aster"].ordered == 40
    with pytest.raises(Refused, match="nothing to undo"):
        history.undo("Ann", by="Ann")


def test_nobody_undoes_what_another_changed_since() -> None:
    history = History.of(small_week())
    history = history.after(Alter("customer", "Aster", "ordered", D(40)), "Ann")
    history = history.after(Alter("customer", "Aster", "ordered", D(50)), "Ben")
    with pytest.raises(Refused, match="to the same figures"):
        history.undo("Ann", by="Ann")
