"""What differs from the figures as uploaded: every change shows, and what was taken back does not."""

from decimal import Decimal

from hypothesis import given, settings
from hypothesis import strategies as st

from engine.altered import Altered, altered
from engine.changes import Add, Alter, Remove, SetHold
from engine.figures import Depot, Hold, RateKey, RateRow
from engine.history import History
from tests.records.making import TEAL, a_change, small_week

D = Decimal


def test_every_figure_that_was_changed_is_named() -> None:
    week = small_week()
    after = week
    added = RateRow("Quarry", "Aster", D(2), haulier="Vole")
    for change in (
        Alter("depot", "Quarry", "available", D(40)),
        Alter("customer", "Aster", "priority", "B"),
        Add(Depot("Mill", D(1))),
        Remove("customer", "Birch"),
        Alter("rate", TEAL, "rate", D(4)),
        Add(added),
        Alter("rule", "", "step", D(1)),
        SetHold(TEAL, D(6), "rang"),
        Remove("gone", "L1"),
    ):
        after = after.apply(change)
    assert set(altered(week, after)) == {
        Altered("depot", "Quarry", "available", D(30), D(40)),
        Altered("customer", "Aster", "priority", "A", "B"),
        Altered("depot", "Mill", "", None, Depot("Mill", D(1))),
        Altered("customer", "Birch", "", week.customers["Birch"], None),
        Altered("rate", TEAL, "rate", D("4.4001"), D(4)),
        Altered("rate", RateKey("Quarry", "Aster", "Vole"), "", None, added),
        Altered("rule", "", "step", D("0.01"), D(1)),
        Altered("hold", TEAL, "", Hold(D("5.5"), "promised"), Hold(D(6), "rang")),
        Altered("gone", "L1", "", week.gone["L1"], None),
    }


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_nothing_differs_exactly_where_the_weeks_are_the_same(data: st.DataObject) -> None:
    def pick(options: object) -> object:
        return data.draw(st.sampled_from(options))  # type: ignore[type-var]

    history = History.of(small_week())
    for step in range(data.draw(st.integers(1, 4))):
        history = history.after(a_change(history.week, pick, step))
        differs = bool(altered(history.uploaded, history.week))
        same_order = list(history.week.depots) == list(history.uploaded.depots)
        assert differs == (history.week != history.uploaded) or not same_order
    while history.can_undo is not None:
        history = history.undo()
    assert altered(history.uploaded, history.week) == ()
