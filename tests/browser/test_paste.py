"""Blocks copied from a spreadsheet and pasted into the grids, in the real browser."""

import os
import re
import time
from decimal import Decimal
from pathlib import Path

import pytest
from playwright.sync_api import Page, expect

from engine.intake.frames import GRID_COLUMNS
from engine.records import open_records, open_week
from engine.week import Week
from tests.browser.grids import column_of, pick, text_of
from tests.browser.test_whole_road import go_to, upload, visible_grid

FILES = {
    "depots.csv": "Depot;Available;Must move\nNorthgate;120,5;\nQuarry;80;\n",
    "orders.csv": "Customer;Ordered\nAster;60\nBirch;40,5\n",
    "rates.csv": (
        "Depot;Customer;Rate\nNorthgate;Aster;12,5\nNorthgate;Birch;13\nQuarry;Aster;9,75\nQuarry;Birch;11\n"
    ),
}


@pytest.fixture
def week(page: Page, tmp_path: Path) -> str:
    """The id of a small week that was typed with decimal commas, open on the page."""
    page.context.grant_permissions(["clipboard-read", "clipboard-write"])
    for name, text in FILES.items():
        (tmp_path / name).write_text(text, encoding="utf-8")
    upload(page, *(tmp_path / name for name in FILES))
    page.get_by_text("2 depots, 2 customers, 4 rates").wait_for(timeout=60_000)
    page.wait_for_url(re.compile(r"week=[\w-]{20,}"), timeout=30_000)
    found = re.search(r"week=([\w-]{20,})", page.url)
    assert found is not None
    return found.group(1)


def paste(page: Page, heading: str, row: int, block: str) -> None:
    """Select a cell and paste a block as a spreadsheet copies it: tabs between cells, a line a row."""
    grid = visible_grid(page)
    pick(page, grid, column_of(grid, heading), row)
    page.evaluate("text => navigator.clipboard.writeText(text)", block)
    page.keyboard.press("Control+V")


def saved(week: str, wanted: int) -> Week:
    """The week in the records, once that many changes are made."""
    records = open_records(os.environ["HITHE_RECORDS"])
    try:
        for _ in range(300):
            history = open_week(records, week).history
            if len(history.entries) >= wanted:
                return history.week
            time.sleep(0.1)
    finally:
        records.close()
    raise AssertionError(f"No {wanted} changes are in the records.")


def make(page: Page) -> None:
    button = page.get_by_role("button", name=re.compile("Make the change|Make it all the same"))
    button.click(timeout=30_000)
    expect(button).to_have_count(0, timeout=30_000)


def shown(page: Page, heading: str, row: int) -> str:
    grid = visible_grid(page)
    return text_of(grid, column_of(grid, heading), row)


def test_a_block_with_decimal_commas_marks_and_units(page: Page, week: str) -> None:
    paste(page, "Available", 0, "1.240,5\t5,5\n120 t\t1'000\n")
    page.get_by_text("Not made yet.").wait_for(timeout=30_000)
    make(page)
    depots = saved(week, 1).depots
    assert (depots["Northgate"].available, depots["Northgate"].must_move) == (
        Decimal("1240.5"),
        Decimal("5.5"),
    )
    assert (depots["Quarry"].available, depots["Quarry"].must_move) == (120, 1000)


def test_unreadable_text_stays_and_the_rest_of_the_block_counts(page: Page, week: str) -> None:
    paste(page, "Available", 0, "90,5\tas agreed\nask Tom\t7,5\n")
    page.locator('[data-testid="stMarkdown"]', has_text="as agreed").first.wait_for(timeout=30_000)
    depots = saved(week, 1).depots
    assert (depots["Northgate"].available, depots["Northgate"].must_move) == (Decimal("90.5"), None)
    assert (depots["Quarry"].available, depots["Quarry"].must_move) == (80, Decimal("7.5"))
    go_to(page, "Plan")
    page.get_by_text("cannot be planned").first.wait_for(timeout=30_000)
    go_to(page, "Figures")
    assert (shown(page, "Must move", 0), shown(page, "Available", 1)) == ("as agreed", "ask Tom")
    page.get_by_role("button", name="Undo").click()
    page.get_by_text("2 changes since it was opened").wait_for(timeout=30_000)
    assert (shown(page, "Available", 0), shown(page, "Must move", 0)) == ("120,5", "as agreed")
    assert shown(page, "Available", 1) == "ask Tom"


def test_new_rows_and_more_columns_than_the_grid_has(page: Page, week: str) -> None:
    page.get_by_role("tab", name="Rates").click()
    page.locator('[data-testid="stDataFrame"]:visible thead th', has_text="Haulier").wait_for(
        state="attached", timeout=30_000
    )
    row = {"Depot": "Quarry", "Customer": "Birch", "Rate": "8,25", "Haulier": "Pike", "At most": "40,5"}
    wide = "\t".join([*(row.get(column.heading, "") for column in GRID_COLUMNS["rates"]), "99", "99", "99"])
    paste(page, "Depot", 3, f"Quarry\tBirch\t11\n{wide}\nNorthgate\tBirch\t€ 12,75\t\tPike\n")
    page.get_by_text("Not made yet.").wait_for(timeout=30_000)
    make(page)
    rates = list(saved(week, 1).rates)
    assert [(r.depot, r.customer, r.rate, r.haulier, r.at_most) for r in rates[4:]] == [
        ("Quarry", "Birch", Decimal("8.25"), "Pike", Decimal("40.5")),
        ("Northgate", "Birch", Decimal("12.75"), "Pike", None),
    ]
    assert [row.rate for row in rates[:4]] == [Decimal("12.5"), 13, Decimal("9.75"), 11]
