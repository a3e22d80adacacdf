"""A full disk: the page says what is and what is not saved, the change is not made, and later ones are."""

from pathlib import Path

import pytest

from app.keeping import keep_up, records
from app.session import KEY, Desk
from engine.changes import Add
from engine.figures import Customer, Order
from engine.records import open_week
from tests.app.test_pages import page, with_sample


def test_the_page_says_what_is_not_saved(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HITHE_RECORDS", str(tmp_path / "records.sqlite"))
    test = page("pages/plan.py", with_sample())
    state: Desk = test.session_state[KEY]
    keep_up(state)
    assert state.kept is not None
    with records().read() as connection:
        pages = connection.exec_driver_sql("PRAGMA page_count").scalar_one()
        connection.exec_driver_sql(f"PRAGMA max_page_count = {pages}")
    large = Add(Customer("Elm" * 40_000, (Order(None),)))
    assert not state.commit(large)
    test.run(timeout=60)
    assert not test.exception
    (said,) = [one.value for one in test.error if "Not saved" in one.value]
    assert "disk is full" in said
    assert "still there" in said
    assert state.history.entries == ()
    with records().read() as connection:
        connection.exec_driver_sql("PRAGMA max_page_count = 1000000")
    assert state.commit(large)
    assert len(open_week(records(), state.kept.week_id).history.entries) == 1
