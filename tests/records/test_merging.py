"""Two people on one week: nothing is lost, nothing is doubled, and what clashes is shown side by side."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine.changes import Add, Alter, Change, Remove, SetHold
from engine.figures import Depot, RateKey, RateRow
from engine.history import Entry, History
from engine.records import (
    Conflict,
    Made,
    Merged,
    Missing,
    Records,
    append,
    caught_up,
    changes_since,
    create_week,
    merge,
    open_week,
    save,
    version_of,
)
from engine.touch import touch_each_other
from tests.records.making import TEAL, D, a_change, in_any_order, read, small_week

ASTER_40 = Alter("customer", "Aster", "ordered", D(40))
ASTER_50 = Alter("customer", "Aster", "ordered", D(50))
HOLD = SetHold(RateKey("Quarry", "Birch"), D(3), "rang")
PIT = Alter("depot", "Quarry", "name", "Pit")
CHEAPER = Alter("rate", TEAL, "rate", D(2))


def made(history: History, saved: int = 0) -> tuple[Made, ...]:
    return tuple(Made(e.change, e.who, e.when, e.why, e.undoes) for e in history.entries[saved:])  # type: ignore[arg-type]


def listed(*changes: Change, who: str = "Ann") -> History:
    history = History.of(small_week())
    for change in changes:
        history = history.after(change, who)
    return history


def merged(mine: list[Change], theirs: list[Change]) -> Merged:
    return merge(listed(*mine), 0, made(listed(*theirs, who="Ben")))


def test_changes_that_do_not_touch_merge() -> None:
    both = merged([ASTER_40, CHEAPER], [HOLD])
    assert not both.clashes
    assert [entry.change for entry in both.history.entries] == [HOLD, ASTER_40, CHEAPER]
    assert [entry.who for entry in both.history.entries] == ["Ben", "Ann", "Ann"]
    assert both.history.week == small_week().apply(HOLD).apply(ASTER_40).apply(CHEAPER)
    assert [entry.change for entry in both.theirs] == [HOLD]


def test_changes_that_touch_are_put_side_by_side() -> None:
    both = merged([ASTER_40, CHEAPER], [HOLD, ASTER_50])
    assert both.history.week.customers["Aster"].ordered == 50
    assert both.history.week.rates.row(1).rate == 2  # type: ignore[union-attr]
    (clash,) = both.clashes
    assert clash.mine.change == ASTER_40
    assert [entry.change for entry in clash.theirs] == [ASTER_50]
    assert "same figures" in clash.why


def test_a_change_that_rests_on_one_that_clashes_waits_too() -> None:
    both = merged([PIT, SetHold(RateKey("Pit", "Birch"), D(1)), ASTER_40], [Remove("depot", "Quarry")])
    assert both.clashes[0].mine.change == PIT
    assert len(both.clashes) == 2
    assert [entry.change for entry in both.history.entries] == [Remove("depot", "Quarry"), ASTER_40]


def test_the_same_change_made_by_both_is_made_once() -> None:
    both = merged([ASTER_40, HOLD], [HOLD])
    assert not both.clashes
    assert [entry.change for entry in both.agreed] == [HOLD]
    assert [entry.change for entry in both.history.entries] == [HOLD, ASTER_40]


def test_the_same_rate_row_added_by_both_is_asked() -> None:
    row = Add(RateRow("Quarry", "Birch", D(2), haulier="Vole"))
    both = merged([row], [row])
    assert len(both.clashes) == 1
    assert len(both.history.entries) == 1


def test_an_undoing_is_worked_out_anew_on_the_merged_week() -> None:
    first = Add(RateRow("Quarry", "Aster", D(2), haulier="Vole"))
    mine = listed(first, Remove("rate", RateKey("Quarry", "Aster", "Vole"))).undo()
    theirs = listed(Add(RateRow("Northgate", "Birch", D(9), haulier="Vole")), who="Ben")
    both = merge(mine, 0, made(theirs))
    assert not both.clashes
    rows = [(row.depot, row.customer, row.rate) for row in both.history.week.rates][-2:]
    assert rows == [("Quarry", "Aster", 2), ("Northgate", "Birch", 9)] or rows == [
        ("Northgate", "Birch", 9),
        ("Quarry", "Aster", 2),
    ]
    assert both.history.can_undo is not None
    assert both.history.undo().week.rates.find(RateKey("Quarry", "Aster", "Vole")) is None


def test_undoing_what_both_have_and_they_changed_since_clashes() -> None:
    common = listed(ASTER_40)
    theirs = common.after(ASTER_50, "Ben")
    both = merge(common.undo("Ann"), 1, made(theirs, 1))
    assert len(both.clashes) == 1
    assert both.history.week.customers["Aster"].ordered == 50


def test_both_undo_the_same_change() -> None:
    common = listed(ASTER_40)
    both = merge(common.undo("Ann"), 1, made(common.undo("Ben"), 1))
    assert not both.clashes
    assert both.history.week == small_week()
    assert len(both.history.entries) == 2


def test_what_they_made_and_took_back_is_in_nobodys_way() -> None:
    theirs = listed(ASTER_50, who="Ben").undo("Ben")
    both = merge(listed(ASTER_40), 0, made(theirs))
    assert not both.clashes
    assert both.history.week.customers["Aster"].ordered == 40


@settings(max_examples=250, deadline=None)
@given(st.data())
def test_merging_loses_nothing_and_doubles_nothing(data: st.DataObject) -> None:
    def pick(options: object) -> object:
        return data.draw(st.sampled_from(options))  # type: ignore[type-var]

    def walk(history: History, who: str, first: int) -> History:
        for step in range(first, first + data.draw(st.integers(0, 4))):
            act = pick(["change", "change", "change", "undo", "redo"])
            if act == "undo" and history.undoable() is not None:
                history = history.undo(who)
            elif act == "redo" and history.redoable() is not None:
                history = history.redo(who)
            else:
                history = history.after(a_change(history.week, pick, step), who)
        return history

    common = walk(History.of(small_week()), "Ann", 0)
    saved = len(common.entries)
    mine, theirs = walk(common, "Ann", 10), walk(common, "Ben", 20)
    both = merge(mine, saved, made(theirs, saved))
    assert both.history.entries[: len(theirs.entries)] == theirs.entries
    fresh = both.history.entries[len(theirs.entries) :]
    ours = mine.entries[saved:]
    assert len(fresh) + len(both.clashes) + len(both.agreed) == len(ours)
    kept: list[Entry] = [
        e for e in ours if e not in both.agreed and all(e is not c.mine for c in both.clashes)
    ]
    assert [(e.who, e.why, e.undoes is None) for e in fresh] == [
        (e.who, e.why, e.undoes is None) for e in kept
    ]
    for entry in fresh:
        for other in both.theirs:
            if entry.undoes is None and other.undoes is None and not _taken_back(both, other):
                assert not touch_each_other(entry.change, other.change)
    replayed = small_week()
    for entry in both.history.entries:
        replayed = replayed.apply(entry.change)
    assert replayed == both.history.week
    if not both.clashes and not both.agreed and all(e.undoes is None for e in (*ours, *both.theirs)):
        other_way = merge(theirs, saved, made(mine, saved))
        assert in_any_order(other_way.history.week) == in_any_order(both.history.week)


def _taken_back(both: Merged, entry: Entry) -> bool:
    return not both.history.in_force(both.history.entries.index(entry))


def test_appending_to_another_version_is_a_conflict_and_saves_nothing(records: Records) -> None:
    opened = create_week(records, read(small_week()))
    week_id = opened.listed.id
    append(records, week_id, opened.history.after(HOLD, "Ben", "rang"), 0)
    with pytest.raises(Conflict, match=r"1 change since version 0\. Nothing was saved") as conflict:
        append(records, week_id, opened.history.after(ASTER_40, "Ann").after(CHEAPER, "Ann"), 0)
    assert [(one.change, one.who, one.why) for one in conflict.value.theirs] == [(HOLD, "Ben", "rang")]
    assert version_of(records, week_id) == 1
    assert [one.change for one in changes_since(records, week_id, 0)] == [HOLD]


def test_saving_merges_what_others_saved_and_returns_what_clashes(records: Records) -> None:
    opened = create_week(records, read(small_week()))
    week_id = opened.listed.id
    save(records, week_id, opened.history.after(HOLD, "Ben").after(ASTER_50, "Ben"), 0)
    mine = opened.history.after(CHEAPER, "Ann").after(ASTER_40, "Ann")
    outcome = save(records, week_id, mine, 0)
    assert [entry.change for entry in outcome.theirs] == [HOLD, ASTER_50]
    assert [clash.mine.change for clash in outcome.clashes] == [ASTER_40]
    stored = open_week(records, week_id)
    assert stored.history.week == outcome.history.week
    assert [entry.change for entry in stored.history.entries] == [HOLD, ASTER_50, CHEAPER]
    assert version_of(records, week_id) == 3
    again = save(records, week_id, outcome.history.after(ASTER_40, "Ann"), 3)
    assert not again.clashes
    assert open_week(records, week_id).history.week.customers["Aster"].ordered == 40


def test_the_other_session_catches_up(records: Records) -> None:
    opened = create_week(records, read(small_week()))
    other = open_week(records, opened.listed.id).history
    save(records, opened.listed.id, opened.history.after(HOLD, "Ben").undo("Ben"), 0)
    seen = caught_up(other, changes_since(records, opened.listed.id, 0))
    assert seen.week == small_week()
    assert len(seen.entries) == 2
    assert seen.can_redo == 1


def test_a_week_that_is_not_there(records: Records) -> None:
    with pytest.raises(Missing, match="no such week"):
        append(records, "nonsense", listed(HOLD), 0)
    with pytest.raises(Missing, match="no such week"):
        version_of(records, "nonsense")


def test_adding_the_same_depot_clashes_by_name() -> None:
    both = merged([Add(Depot("Mill", D(1)))], [Add(Depot("Mill", D(2)))])
    assert len(both.clashes) == 1
    assert both.history.week.depots["Mill"].available == 2
