"""Changes to a week: what each does, what brings it back, and what is refused."""

from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter, Change, Lift, Remove, SetHold, Together
from engine.figures import Customer, Depot, Hold, Order, RateKey, RateRow
from engine.history import History
from engine.week import Refused, Week, reordered

D = Decimal


def small_week() -> Week:
    return Week.of(
        (Depot("Northgate", D(50)), Depot("Quarry", D(30), must_move=D(5))),
        (
            Customer("Aster", (Order(D(20), "A-1", "Mon"), Order(D(15), "A-2", "Wed"))),
            Customer("Birch", (Order(D(25)),), one_depot="Quarry"),
        ),
        (
            RateRow("Northgate", "Aster", D("4.10"), haulier="Vole"),
            RateRow("Northgate", "Aster", D("4.40"), haulier="Teal", at_most=D(10)),
            RateRow("Quarry", "Aster", D("5.00")),
            RateRow("Quarry", "Birch", D("3.25")),
            RateRow("Nowhere", "Birch", D("1.00")),
        ),
    )


KEY = RateKey("Northgate", "Aster", "Teal")


def test_an_altered_figure_shares_the_rest() -> None:
    week = small_week()
    after = week.apply(Alter("depot", "Quarry", "available", D(40)))
    assert after.depots["Quarry"].available == 40
    assert week.depots["Quarry"].available == 30
    assert after.rates is week.rates
    assert after.customers is week.customers


def test_an_altered_rate_copies_no_rate_table() -> None:
    week = small_week()
    after = week.apply(Alter("rate", KEY, "rate", D("4.20")))
    assert after.rates.table is week.rates.table
    assert [row.rate for row in after.rates] == [D("4.10"), D("4.20"), D("5.00"), D("3.25"), D("1.00")]
    assert [row.rate for row in week.rates][1] == D("4.40")


def test_a_removed_row_comes_back_at_its_place() -> None:
    week = small_week()
    removal = Remove("rate", KEY)
    without = week.apply(removal)
    assert len(without.rates) == 4
    assert without.rates.find(KEY) is None
    assert without.apply(week.inverse(removal)) == week


def test_flat_rates_are_the_rows_in_order() -> None:
    week = small_week().apply(Remove("rate", RateKey("Quarry", "Aster")))
    week = week.apply(Add(RateRow("Quarry", "Cole", D(7), haulier="Teal", km=D("12.5"))))
    week = week.apply(Alter("rate", KEY, "closed", True))
    flat = week.rates.flat
    assert [flat.row(position) for position in range(len(flat))] == list(week.rates)
    assert [week.rates.row(int(n)) for n in week.rates.ids_in_order] == list(week.rates)


def test_renaming_reaches_rates_holds_and_single_depots() -> None:
    week = small_week().apply(SetHold(RateKey("Quarry", "Birch"), D(5), "promised"))
    renamed = week.apply(Alter("depot", "Quarry", "name", "Pit"))
    assert [row.depot for row in renamed.rates] == ["Northgate", "Northgate", "Pit", "Pit", "Nowhere"]
    assert renamed.holds == {RateKey("Pit", "Birch"): Hold(D(5), "promised")}
    assert renamed.customers["Birch"].one_depot == "Pit"
    assert renamed.apply(week.inverse(Alter("depot", "Quarry", "name", "Pit"))) == week


def test_a_name_that_waits_in_the_rates_is_not_taken_by_renaming() -> None:
    with pytest.raises(Refused, match="Rate rows name a depot 'Nowhere' already"):
        small_week().apply(Alter("depot", "Quarry", "name", "Nowhere"))


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (Remove("depot", "Elm"), "There is no depot 'Elm'"),
        (Add(Depot("Quarry", D(1))), "There is a depot 'Quarry' already"),
        (Alter("depot", "Quarry", "colour", "red"), "no figure called 'colour'"),
        (Alter("rate", RateKey("Quarry", "Cole"), "rate", D(1)), "no rate row for Quarry to Cole"),
        (Lift(KEY), "nothing to lift"),
        (Add(RateRow("Quarry", "Aster", D(1)), place=1), "nothing to put back"),
    ],
)
def test_what_does_not_fit_is_refused_in_words(change: Change, words: str) -> None:
    with pytest.raises(Refused, match=words):
        small_week().apply(change)


def test_a_held_row_is_not_taken_out() -> None:
    week = small_week().apply(SetHold(KEY, D(5)))
    with pytest.raises(Refused, match="lift the hold"):
        week.apply(Remove("rate", KEY))


def test_a_rise_goes_to_the_last_order_row_and_a_fall_is_taken_from_the_last() -> None:
    aster = small_week().customers["Aster"]
    assert [o.quantity for o in reordered(aster, D(40)).orders] == [20, 20]
    assert [o.quantity for o in reordered(aster, D(12)).orders] == [12, 0]
    assert [o.number for o in reordered(aster, D(12)).orders] == ["A-1", "A-2"]


def changes_of(week: Week, draw: st.DrawFn, step: int) -> Change:
    """One change that fits the week."""
    depots, customers = list(week.depots), list(week.customers)
    keys = [week.rates.key_of(int(n)) for n in week.rates.ids_in_order]
    amount = D(draw(st.integers(0, 99)))
    options: list[Change] = [
        Add(Depot(f"Depot {step}", amount), draw(st.sampled_from([None, 0]))),
        Add(RateRow("Quarry", draw(st.sampled_from(["Aster", "Elm"])), amount, haulier="Vole")),
        Alter("rule", "", "fuel_surcharge", amount),
    ]
    for name in depots:
        options += [Remove("depot", name), Alter("depot", name, "available", amount)]
        options.append(Alter("depot", name, "name", f"{name} {step}"))
    for name in customers:
        options += [Remove("customer", name), Alter("customer", name, "ordered", amount)]
    for key in keys:
        options += [Alter("rate", key, "rate", amount), SetHold(key, amount, "why")]
        options.append(Lift(key) if key in week.holds else Remove("rate", key))
    pick = draw(st.sampled_from(options))
    return Together((pick, Alter("rule", "", "step", amount))) if draw(st.booleans()) else pick


@st.composite
def walks(draw: st.DrawFn) -> list[Week]:
    """Weeks that follow from each other by a change, with undo and redo in between."""
    history = History.of(small_week())
    seen = [history.week]
    for step in range(draw(st.integers(1, 8))):
        history = history.after(changes_of(history.week, draw, step))
        seen.append(history.week)
    back = draw(st.integers(0, len(seen) - 1))
    for step in range(back):
        history = history.undo()
        assert history.week == seen[-2 - step]
    for step in range(back):
        history = history.redo()
        assert history.week == seen[len(seen) - back + step]
    replayed = history.uploaded
    for entry in history.entries:
        replayed = replayed.apply(entry.change)
    assert replayed == history.week
    return seen


@settings(max_examples=200, deadline=None)
@given(walks())
def test_undo_and_redo_walk_the_same_weeks_and_replaying_gives_the_last(seen: list[Week]) -> None:
    assert len(seen) > 1


def test_a_new_change_ends_redo() -> None:
    history = History.of(small_week())
    history = history.after(Alter("rule", "", "unit", "kg")).undo()
    assert history.can_redo is not None
    history = history.after(Alter("rule", "", "unit", "pallets"))
    assert history.can_redo is None
    assert len(history.entries) == 3
    with pytest.raises(Refused, match="nothing to redo"):
        history.redo()


def test_a_renaming_is_undone_after_a_row_of_the_old_name_was_added_and_undone() -> None:
    history = History.of(small_week())
    history = history.after(Alter("depot", "Quarry", "name", "Pit"))
    history = history.after(Add(RateRow("Quarry", "Birch", D(2))))
    history = history.undo().undo()
    assert history.week == small_week()
    assert [row.depot for row in history.redo().redo().week.rates][-1] == "Quarry"
