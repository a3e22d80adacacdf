"""Every way to a week asks for the right first; a link for reading, and a depot's link, lead no further."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

import engine
import sample_data
from app.access import records
from app.rights import House, start_as
from engine.records import Opened, archive_week, create_week, issue_plan, list_weeks
from engine.records.depot_links import depot_link

ROOT = Path(__file__).parents[2]
MAIN = str(ROOT / "app" / "main.py")
BY_RIGHT = {
    "open_week", "copy_week", "restore_as_new", "archive_week", "list_weeks", "totals_by_week",
    "load_answers", "save_answers", "find_named",
}  # fmt: skip


@pytest.fixture(autouse=True)
def started_without_files(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sys.argv", ["main.py"])


@pytest.fixture
def kept() -> Opened:
    return create_week(records(), engine.read_week(sample_data.path(sample_data.SMALL_WEEK)))


@pytest.fixture
def on_network() -> Iterator[None]:
    start_as(House(on_network=True))
    yield
    start_as(House())


def opened(**query: str) -> AppTest:
    app = AppTest.from_file(MAIN, default_timeout=60)
    for name, value in query.items():
        app.query_params[name] = value
    return app.run()


def texts(app: AppTest) -> str:
    every = [*app.markdown, *app.caption, *app.title, *app.warning, *app.info, *app.error]
    return "\n".join(str(one.value) for one in every)


def test_pages_reach_weeks_by_one_door_only() -> None:
    allowed = {
        ROOT / "app" / "access.py": BY_RIGHT,
        ROOT / "app" / "parts" / "depot_page.py": {"open_week"},
        ROOT / "app" / "compare_sides.py": {"find_named"},  # a command: whoever can open the records' file
    }
    for file in (ROOT / "app").rglob("*.py"):
        tree = ast.parse(file.read_text(encoding="utf-8"))
        named = {
            alias.name for node in ast.walk(tree) if isinstance(node, ast.ImportFrom) for alias in node.names
        }
        assert not (named & BY_RIGHT) - allowed.get(file, set()), file
        if file not in allowed:
            used = {node.attr for node in ast.walk(tree) if isinstance(node, ast.Attribute)}
            assert not used & BY_RIGHT, file


def test_ids_cannot_be_guessed(kept: Opened) -> None:
    other = create_week(records(), engine.read_week(sample_data.path(sample_data.SMALL_WEEK)))
    ids = [kept.listed.id, kept.listed.read_id, other.listed.id, other.listed.read_id]
    assert len(set(ids)) == 4
    assert all(len(one) * 6 >= 128 for one in ids)  # token_urlsafe: six random bits a letter
    assert all(len(depot_link(one, "Quarry")) * 6 >= 256 for one in ids)


def test_on_a_network_without_sign_in_nothing_is_listed(kept: Opened, on_network: None) -> None:
    for view in ("weeks", "totals"):
        app = opened()
        app.switch_page("pages/weeks.py").run()
        app.segmented_control(key="weeks-view").set_value(view).run()
        assert not app.exception
        assert kept.listed.name not in texts(app)
        assert not [button for button in app.button if str(button.key).startswith("open-")]
    assert kept.listed.name in texts(opened(week=kept.listed.id))
    assert "There is no such week" in texts(opened(week=kept.listed.id[:-1]))


def test_a_link_for_reading_does_not_become_one_for_changing(kept: Opened, on_network: None) -> None:
    for query in (
        {"read": kept.listed.read_id},
        {"week": kept.listed.read_id},  # the id for reading under the name for changing
        {"week": kept.listed.read_id, "who": "Ann"},
        {"read": kept.listed.read_id, "week": ""},
    ):
        app = opened(**query)
        assert "for reading only" in texts(app), query
        assert kept.listed.id not in texts(app) + str(dict(app.query_params))
        assert not [button for button in app.button if button.key in ("undo", "redo")]
    first = depot_link(kept.listed.id, next(iter(kept.history.week.depots)))
    for half in (first[:22], first[22:], first):
        assert "There is no such week" in texts(opened(week=half))


def test_a_depot_sees_its_loading_list_alone(kept: Opened) -> None:
    week = kept.history.week
    depot, other = list(week.depots)[:2]
    address = depot_link(kept.listed.id, depot)
    assert "No plan of this week has been issued yet" in texts(opened(depot=address))
    plan = engine.plan_week(week)
    issue_plan(records(), kept.listed.id, plan, 0, "Ann")
    app = opened(depot=address)
    assert not app.exception
    (table,) = app.dataframe
    mine = [shipment for shipment in plan.shipments if shipment.depot == depot]
    assert sorted(table.value["Customer"]) == sorted(shipment.customer for shipment in mine)
    assert list(table.value.columns) == [
        "Customer", "Haulier", "Send", "Days", "Order numbers", "Part of order",
    ]  # fmt: skip
    shown = texts(app) + table.value.to_string()
    assert other not in shown
    assert kept.listed.id not in shown
    assert not app.button
    assert not list(app.get("page_link"))
    wrong = address[:22] + depot_link(kept.listed.id, other)[22:]
    assert wrong != address
    assert opened(depot=wrong).title[0].value.endswith(other)
    assert "leads to no loading list" in texts(
        opened(depot=address[:-1] + ("A" if address[-1] != "A" else "B"))
    )
    archive_week(records(), kept.listed.id)
    assert "leads to no loading list" in texts(opened(depot=address))
    assert all(one.id != kept.listed.id for one in list_weeks(records()))
