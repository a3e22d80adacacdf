"""The desk and its records: what is made is on disk, the address brings it back, others are heard."""

from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.keeping import issue, keep_rest, records
from app.parts.change_words import words_of
from app.session import KEY, Desk
from engine.changes import Alter
from engine.history import Entry
from engine.records import (
    NotSaved,
    create_week,
    latest_number,
    list_weeks,
    open_week,
    save,
    totals_by_week,
    version_of,
)
from tests.records.making import D

MAIN = Path(__file__).parents[2] / "app" / "main.py"
COLE = Alter("customer", "Cole", "priority", "B")


@pytest.fixture
def week_id() -> str:
    """The sample week in the records."""
    reading = engine.read_week(sample_data.path(sample_data.SMALL_WEEK))
    return create_week(records(), reading).listed.id


@pytest.fixture(autouse=True)
def no_files_named_at_the_start(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sys.argv", ["main.py"])


def visit(page: str = "", **address: str) -> AppTest:
    """The desk as it opens, then perhaps one page."""
    test = AppTest.from_file(str(MAIN), default_timeout=60)
    for name, value in address.items():
        test.query_params[name] = value
    test.run()
    if page:
        test.switch_page(page).run()
    assert not test.exception
    return test


def whole(test: AppTest) -> AppTest:
    """Let the next run be one of the whole desk; by itself the driver repeats only the page."""
    test._page_hash = test._finished_page_script_hash = ""
    return test


def state_of(test: AppTest) -> Desk:
    found: Desk = test.session_state[KEY]
    return found


def click(test: AppTest, label: str) -> AppTest:
    button = next(button for button in test.button if button.label == label)
    if not test.segmented_control:  # the page of weeks stands by itself
        whole(test)
    button.click().run()
    assert not test.exception
    return test


def look_at(test: AppTest, view: str) -> AppTest:
    test.segmented_control(key="weeks-view").set_value(view).run()
    assert not test.exception
    return test


def said(test: AppTest) -> str:
    kinds = (test.error, test.info, test.markdown, test.caption, test.code)
    shown = "\n".join(str(element.value) for kind in kinds for element in kind)
    return shown.replace("\\", "").replace("\u2060", "")


def test_an_opened_week_is_on_disk_and_its_id_in_the_address() -> None:
    test = click(visit(), "Open the sample week")
    assert open_week(records(), test.query_params["week"]).history.week == state_of(test).week
    assert "· kept" in said(test)


def test_every_change_is_on_disk_when_the_screen_says_so_and_comes_back(week_id: str) -> None:
    test = visit(week=week_id, who="Ann")
    state = state_of(test)
    assert state.commit(COLE, "rang")
    assert open_week(records(), week_id).history.entries == state.history.entries
    again = visit(week=week_id, who="Ann")
    assert state_of(again).week == state.week
    assert state_of(again).history.entries[0].who == "Ann"
    click(again, "↶ Undo")
    assert version_of(records(), week_id) == 2
    assert state_of(again).week == state.history.uploaded


def test_a_week_that_is_not_there_is_said(week_id: str) -> None:
    test = visit(week=week_id[:-1] + "?")
    assert "There is no such week" in said(test)
    assert "week" not in test.query_params


def test_changes_of_others_are_heard_and_worked_in(week_id: str) -> None:
    ann, ben = visit(week=week_id, who="Ann"), visit(week=week_id, who="Ben")
    state_of(ben).commit(COLE)
    whole(ann).run()
    assert "Ben: Cole: Priority set to B" in said(ann)
    assert state_of(ann).week == state_of(ben).week
    assert state_of(ann).history.undoable("Ann") is None
    whole(ann).run()
    assert "1 change by others" not in said(ann)


def test_changes_that_do_not_touch_merge_and_those_that_do_are_asked(week_id: str) -> None:
    ann, ben = visit(week=week_id, who="Ann"), visit(week=week_id, who="Ben")
    assert state_of(ben).commit(COLE)
    assert state_of(ann).commit(Alter("rule", "", "step", D(1)))
    assert state_of(ann).week.customers["Cole"].priority == "B"
    assert state_of(ben).commit(Alter("customer", "Cole", "ordered", D(50)))
    assert not state_of(ann).commit(Alter("customer", "Cole", "ordered", D(60)))
    whole(ann).run()
    shown = said(ann)
    assert "Yours: Cole: Ordered set to 60" in shown
    assert "Theirs: Ben: Cole: Ordered set to 50" in shown
    assert version_of(records(), week_id) == 3
    click(ann, "Make mine")
    assert state_of(ann).week.customers["Cole"].ordered == 60
    assert open_week(records(), week_id).history.week.customers["Cole"].ordered == 60
    assert "Yours: Cole" not in said(ann)


def test_what_is_proposed_is_asked_about_when_others_changed_the_same(week_id: str) -> None:
    ann, ben = visit(week=week_id, who="Ann"), visit(week=week_id, who="Ben")
    state_of(ann).propose(Alter("customer", "Cole", "ordered", D(30)))
    assert state_of(ben).commit(Alter("depot", "Northgate", "loads_a_day", D(9)))
    whole(ann).run()
    assert state_of(ann).proposed is not None
    assert state_of(ann).proposed.week.depots["Northgate"].loads_a_day == 9
    assert state_of(ben).commit(Alter("customer", "Cole", "ordered", D(20)))
    whole(ann).run()
    assert state_of(ann).proposal is None
    assert "Yours: Cole: Ordered set to 30" in said(ann)
    assert "Theirs: Ben: Cole: Ordered set to 20" in said(ann)
    click(ann, "Make mine")
    assert open_week(records(), week_id).history.week.customers["Cole"].ordered == 30


def test_a_plan_that_another_issued_is_noticed_and_a_reader_issues_none(week_id: str) -> None:
    ann, ben = visit(week=week_id, who="Ann"), visit(week=week_id, who="Ben")
    plan = state_of(ben).planned()
    assert plan is not None
    made = issue(state_of(ben), plan, "Monday")
    assert made is not None
    assert state_of(ann).issued is None
    whole(ann).run()
    assert state_of(ann).issued == made
    reader = state_of(visit(read=open_week(records(), week_id).listed.read_id))
    assert reader.issued == made
    assert issue(reader, plan) is None
    assert latest_number(records(), week_id) == 1


def test_leaving_theirs_changes_nothing(week_id: str) -> None:
    ann, ben = visit(week=week_id, who="Ann"), visit(week=week_id, who="Ben")
    state_of(ben).commit(Alter("customer", "Cole", "ordered", D(50)))
    state_of(ann).commit(Alter("customer", "Cole", "ordered", D(60)))
    whole(ann).run()
    click(ann, "Leave theirs")
    assert state_of(ann).week.customers["Cole"].ordered == 50
    assert not state_of(ann).clashes
    assert version_of(records(), week_id) == 1


def test_a_reader_sees_the_plan_and_changes_nothing(week_id: str) -> None:
    read_id = open_week(records(), week_id).listed.read_id
    test = visit("pages/plan.py", read=read_id)
    assert test.metric[0].value == "59,566.18"
    assert week_id not in str(test.query_params)
    assert not any(button.label in ("↶ Undo", "↷ Redo") for button in test.button)
    assert not state_of(test).commit(COLE)
    assert "reading only" in (state_of(test).message or ("", ""))[1]
    assert version_of(records(), week_id) == 0
    assert not totals_by_week(records()) or all(one.week.id != week_id for one in totals_by_week(records()))


def test_a_reader_finds_out_how_it_works(week_id: str) -> None:
    test = visit("pages/how_it_works.py", read=open_week(records(), week_id).listed.read_id)
    assert not test.exception
    assert [one.value for one in test.title] == ["How it works"]


def test_a_failed_save_says_so_and_the_screen_keeps_what_is_on_disk(
    week_id: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    test = visit("pages/weeks.py", week=week_id)

    def full(*_: object) -> None:
        raise NotSaved("Not saved: 1 change to the week. The disk is full: free some space and try again.")

    monkeypatch.setattr("app.kept.save", full)
    state = state_of(test)
    assert not state.commit(COLE)
    test.run()
    assert "Not saved: 1 change" in said(test)
    assert state.week.customers["Cole"].priority != "B"
    assert state.history.entries == open_week(records(), week_id).history.entries


def test_weeks_are_copied_archived_and_opened(week_id: str) -> None:
    test = visit("pages/weeks.py", week=week_id, who="Ann")
    state_of(test).commit(COLE)
    test.run()
    test.button(key=f"copy-{week_id}").click().run()
    test.text_input(key=f"name-{week_id}").set_value("Week 7 (copied)")
    click(test, "Copy and open")
    copied = state_of(test).kept
    assert copied is not None
    assert copied.week_id != week_id
    assert test.query_params["week"] == copied.week_id
    assert state_of(test).week.rules.week == "Week 7 (copied)"
    assert state_of(test).week.customers["Cole"].priority == "B"
    test.button(key=f"archive-{week_id}").click().run()
    assert week_id not in [week.id for week in list_weeks(records())]
    test.toggle(key="archived").set_value(True).run()
    test.button(key=f"open-{week_id}").click().run()
    assert not test.exception
    assert state_of(test).history.entries[0].change == COLE


def test_the_list_of_changes_takes_one_back_and_goes_back(week_id: str) -> None:
    test = look_at(visit("pages/weeks.py", week=week_id, who="Ann"), "changes")
    for change in (COLE, Alter("rule", "", "step", D(1)), Alter("rule", "", "fuel_surcharge", D(9))):
        state_of(test).commit(change, "so")
    test.run()
    frame = test.dataframe[0].value
    assert list(frame["Change"]) == [
        "Fuel surcharge % set to 9",
        "Step set to 1",
        "Cole: Priority set to B",
    ]
    assert list(test.dataframe[1].value["Now"]) == ["B", "9", "1"]
    test.number_input(key="change-number").set_value(2).run()
    click(test, "Take back only this change")
    assert state_of(test).week.rules.step != 1
    assert state_of(test).week.rules.fuel_surcharge == 9
    test.number_input(key="change-number").set_value(1).run()
    click(test, "Go back to before it")
    assert state_of(test).week == state_of(test).history.uploaded
    assert version_of(records(), week_id) == 5
    test.number_input(key="change-number").set_value(3).run()
    click(test, "Open as it was before it, as a new week")
    assert state_of(test).week.rules.step == 1
    assert state_of(test).week.rules.fuel_surcharge != 9


def test_totals_and_addresses_are_shown(week_id: str) -> None:
    state = state_of(visit(week=week_id))
    plan = state.planned()
    assert plan is not None
    keep_rest(state)
    test = look_at(visit("pages/weeks.py", week=week_id), "totals")
    assert "59,566.18 EUR" in list(test.dataframe[0].value["Freight payable"])
    look_at(test, "together")
    read_id = open_week(records(), week_id).listed.read_id
    assert f"?week={week_id}" in said(test)
    assert f"?read={read_id}" in said(test)


def test_cells_that_nobody_could_read_come_back_after_a_refresh() -> None:
    reading = engine.read_week(sample_data.path(sample_data.MESSY_WEEK))
    assert reading.unused
    stored = create_week(records(), reading).listed.id
    test = visit(week=stored)
    fresh = Desk()
    fresh.open(reading)
    assert state_of(test).read == fresh.read
    drafts, before = state_of(test).drafts, fresh.drafts
    assert {table: draft.unread for table, draft in before.items()} == {
        table: tuple(one for one in reading.unused if one.table == table) for table in before
    }
    assert drafts.keys() == before.keys()
    kept = open_week(records(), stored)
    assert [one.table for one in kept.unused] == [one.table for one in reading.unused]
    again = {finding.message for finding in state_of(test).all_findings()}
    assert again == {finding.message for finding in state_of(visit(week=stored)).all_findings()}
    assert {f.message for f in state_of(test).all_findings()} >= {f.message for f in fresh.read}


def test_words_of_every_change_are_whole(week_id: str) -> None:
    state = state_of(visit(week=week_id))
    entry = Entry(COLE, COLE)
    assert words_of(entry.change) == "Cole: Priority set to B"
    assert save(records(), week_id, state.history, 0).history.entries == ()
