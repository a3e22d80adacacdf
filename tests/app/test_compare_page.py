"""The Compare page: every view with every kind of week; what a manager sees without a click."""

import os
from decimal import Decimal
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.parts.compare_asked import variants_of
from app.session import KEY, Desk
from engine.changes import Alter
from engine.compare.service import saving
from engine.compare.usual import Rule, usual_plan
from engine.figures import Customer, Depot, Order, RateRow, Rules
from engine.intake.reading import Reading
from engine.intake.remarks import Counts
from engine.planning.near import sent_by
from engine.records import Opened, create_week, open_records, save, save_variant
from engine.week import Week

D = Decimal

APP = Path(__file__).parents[2] / "app"
SCRIPT = """
import runpy
runpy.run_path({path!r}, run_name="__main__")
"""


def page(state: Desk, view: str, **widgets: object) -> AppTest:
    """The page alone, as its navigation would run it."""
    test = AppTest.from_string(SCRIPT.format(path=str(APP / "pages" / "compare.py")), default_timeout=60)
    test.session_state[KEY] = state
    test.session_state["compare-view"] = view
    for key, value in widgets.items():
        test.session_state[key] = value
    test.run()
    assert not test.exception
    return test


def with_sample(name: str = sample_data.SMALL_WEEK) -> Desk:
    state = Desk()
    state.open(engine.read_week(sample_data.path(name)))
    return state


def said(test: AppTest) -> str:
    parts = [*test.markdown, *test.caption, *test.info, *test.error, *test.subheader, *test.title]
    return "\n".join(str(part.value) for part in parts)


def test_the_usual_plan_is_the_engine_s() -> None:
    state = with_sample()
    test = page(state, "usual")
    plan = state.planned()
    assert plan is not None
    found = saving(plan, usual_plan(plan.week, Rule.NEAREST).costs)
    assert f"{found.freight:,}" in said(test)
    assert round(sum(test.dataframe[0].value["Saving, EUR"]), 2) == float(found.freight)


def whole(query: dict[str, str]) -> AppTest:
    """The desk as an address opens it."""
    test = AppTest.from_file(str(APP / "main.py"), default_timeout=60)
    for name, value in query.items():
        test.query_params[name] = value
    test.run()
    assert not test.exception
    return test


def test_a_manager_sees_cost_saving_change_and_reasons_without_a_click(tmp_path: Path) -> None:
    """Two weeks in the records; the address for reading only lands on the answer."""
    records = open_records(str(tmp_path / "two.sqlite"))
    before, now = (
        create_week(records, engine.read_week(sample_data.path(name)))
        for name in ("week_before.xlsx", sample_data.SMALL_WEEK)
    )
    plans = [engine.plan_week(one.history.week) for one in (before, now)]
    os.environ["HITHE_RECORDS"], held = str(tmp_path / "two.sqlite"), os.environ["HITHE_RECORDS"]
    try:
        test = whole({"read": now.listed.read_id})
    finally:
        os.environ["HITHE_RECORDS"] = held
    shown = {metric.label.replace("\\", ""): metric.value for metric in test.metric}
    usual = usual_plan(plans[1].week, Rule.NEAREST)
    change = plans[1].freight_payable - plans[0].freight_payable
    assert shown == {
        "Week 6: freight payable": f"{plans[1].freight_payable:,} EUR",
        "Saving against nearest depot first": f"{saving(plans[1], usual.costs).freight:,} EUR",
        "Change from Week 5": f"{change:,} EUR".replace("-", "\u2212"),
    }
    text = said(test).replace("\\", "")
    assert "Week 6 costs 3,318.73 EUR less freight than Week 5" in text
    assert "EUR less by stock" in text
    table = test.dataframe[0].value
    assert list(table["Step"]) == ["Volume", "Mix", "Stock", "Rates", "Surcharge", "Rounding", "Together"]
    freight = table["Freight, EUR"]
    assert round(sum(freight[:-1]), 2) == freight.iloc[-1] == float(change)
    assert not [button for button in test.button if button.key == "undo"]


def test_no_week_and_a_week_that_cannot_be_planned() -> None:
    assert "cannot be planned" in said(page(with_sample(sample_data.MESSY_WEEK), "usual"))
    test = AppTest.from_file(str(APP / "main.py"), default_timeout=60)
    empty = Desk()
    empty.started = True
    test.session_state[KEY] = empty
    test.run()
    test.switch_page("pages/compare.py").run()
    assert not test.exception
    assert "no week to compare" in said(test)


def kept_in(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, *names: str) -> list[Opened]:
    """Weeks in records of their own, which the desk then uses."""
    place = str(tmp_path / "own.sqlite")
    monkeypatch.setenv("HITHE_RECORDS", place)
    records = open_records(place)
    return [create_week(records, engine.read_week(sample_data.path(name))) for name in names]


def at(test: AppTest, view: str) -> AppTest:
    test.session_state["compare-view"] = view
    test.switch_page("pages/compare.py").run()
    assert not test.exception
    return test


@pytest.mark.parametrize("names", [["small_week.xlsx"], ["week_before.xlsx", "small_week.xlsx"]])
def test_every_view_stands_with_one_week_and_with_two(
    names: list[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    *_, now = kept_in(tmp_path, monkeypatch, *names)
    test = whole({"week": now.listed.id})
    for view in ("summary", "usual", "variants", "bridge", "weeks"):
        at(test, view)


def test_a_variant_is_kept_compared_and_put_up(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (now,) = kept_in(tmp_path, monkeypatch, sample_data.SMALL_WEEK)
    test = whole({"week": now.listed.id})
    state: Desk = test.session_state[KEY]
    state.propose(Alter("depot", "Northgate", "available", D(500)))
    test.switch_page("pages/plan.py").run()
    test.button(key="variant-open").click().run()
    test.text_input(key="variant-name").input("Northgate half").run()
    test.button(key="variant-keep").click().run()
    assert not test.exception
    assert state.proposal is None
    assert not state.history.entries
    at(test, "variants")
    table = test.dataframe[0].value
    assert list(table["Variant"]) == ["The week as it stands", "Northgate half"]
    plan = engine.plan_week(state.week.apply(Alter("depot", "Northgate", "available", D(500))))
    assert table["Freight, EUR"][1] == float(plan.freight_payable)
    (variant,) = variants_of(state)
    state.propose(variant.as_one)
    state.accept()
    assert state.week.depots["Northgate"].available == 500
    assert len(state.history.entries) == 1


def test_a_reader_sees_variants_and_cannot_touch_them(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (now,) = kept_in(tmp_path, monkeypatch, sample_data.SMALL_WEEK)
    change = Alter("depot", "Northgate", "available", D(500))
    save_variant(open_records(str(tmp_path / "own.sqlite")), now.listed.id, "Northgate half", (change,))
    test = at(whole({"read": now.listed.read_id}), "variants")
    assert list(test.dataframe[0].value["Variant"])[1:] == ["Northgate half"]
    assert not [b for b in test.button if b.key in ("variant-promote", "variant-remove")]


def test_names_are_never_markdown(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    bad = "![i](http://x.example/y) *Elm* $z$"
    week = Week.of(
        (Depot("Quarry", D(5)), Depot(bad, D(20))),
        (Customer(bad + "!", (Order(D(10)),)),),
        (RateRow("Quarry", bad + "!", D(4)), RateRow(bad, bad + "!", D(5))),
        Rules(unit="t", week=bad),
    )
    place = str(tmp_path / "own.sqlite")
    monkeypatch.setenv("HITHE_RECORDS", place)
    records = open_records(place)
    create_week(records, Reading(week, (), Counts(0, 0, 0), ""))
    now = create_week(records, Reading(week, (), Counts(0, 0, 0), ""))
    save_variant(records, now.listed.id, bad, (Alter("depot", bad, "available", D(9)),))
    change = Alter("depot", bad, "available", D(7))
    save(records, now.listed.id, now.history.after(change, why=bad), 0)
    test = whole({"week": now.listed.id})
    for view in ("summary", "usual", "variants", "bridge", "weeks"):
        at(test, view)
        text = said(test) + "".join(metric.label for metric in test.metric)
        assert "![" not in text
        assert "*Elm*" not in text


def test_a_plan_of_the_records_is_taken_as_the_one_that_was_sent(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before, now = kept_in(tmp_path, monkeypatch, "week_before.xlsx", sample_data.SMALL_WEEK)
    test = whole({"week": now.listed.id})
    test.session_state["usual-chosen"] = Rule.ACTUAL
    at(test, "usual")
    test.selectbox(key="sent-point").select(before.listed.name).run()
    test.button(key="sent-take").click().run()
    assert not test.exception
    sent = sent_by(engine.plan_week(before.history.week))
    week = now.history.week
    found = saving(engine.plan_week(week), usual_plan(week, Rule.ACTUAL, sent).costs)
    assert f"{found.freight:,} EUR" in said(test)
    reader = whole({"read": now.listed.read_id})  # the desk goes by it from now on, for the manager too
    shown = {metric.label.replace("\\", ""): metric.value for metric in reader.metric}
    assert shown["Saving against the plan as it was sent"] == f"{found.freight:,} EUR"
