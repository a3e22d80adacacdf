"""A dispatcher's week in the real browser: open, mend, adjust, look, hand over."""

from decimal import Decimal
from pathlib import Path
from urllib.parse import urlparse

import openpyxl
from playwright.sync_api import Page, expect

import engine
import sample_data
from tests.browser.grids import column_of, text_of, type_into


def freight(page: Page) -> Decimal:
    metric = page.locator('[data-testid="stMetric"]', has_text="Freight payable")
    metric.wait_for(timeout=30_000)
    return Decimal(metric.locator('[data-testid="stMetricValue"]').inner_text().replace(",", "").strip())


def go_to(page: Page, name: str) -> None:
    page.get_by_role("link", name=name, exact=True).click()
    page.get_by_role("heading", name=name, exact=True).wait_for(timeout=30_000)


def upload(page: Page, *files: Path) -> None:
    page.locator('input[type="file"]').first.set_input_files([str(file) for file in files])


def visible_grid(page: Page):  # type: ignore[no-untyped-def]
    grid = page.locator('[data-testid="stDataFrame"]:visible').first
    grid.wait_for(timeout=30_000)
    return grid


def test_from_spreadsheet_to_workbook(page: Page, requests: list[str], tmp_path: Path) -> None:
    week = sample_data.path(sample_data.SMALL_WEEK)
    upload(page, week)
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)

    go_to(page, "Plan")
    expected = engine.plan_week(engine.read_week(week).week)
    assert freight(page) == expected.freight_payable
    canvas = page.locator('[data-testid="stDeckGlJsonChart"] canvas').first
    canvas.wait_for(timeout=60_000)
    page.wait_for_function(
        "() => { const box = document.querySelector('[data-testid=\"stDeckGlJsonChart\"] canvas')"
        ".getBoundingClientRect(); return box.width > 400 && box.height > 400; }",
        timeout=60_000,
    )  # a canvas is small until the map has drawn

    grid = visible_grid(page)
    send = column_of(grid, "Send")
    before = Decimal(text_of(grid, send, 0).replace(",", ""))
    type_into(page, grid, send, 0, str(before - 10))
    page.get_by_text("Not made yet.").wait_for(timeout=30_000)
    assert freight(page) == expected.freight_payable
    page.get_by_role("button", name="Make the change").click()
    page.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    held = freight(page)
    assert held != expected.freight_payable
    first = expected.shipments[0]
    again = engine.read_week(week).week
    by_hand = engine.plan_week(again.apply(_hold(first.key, before - 10)))
    assert held == by_hand.freight_payable

    page.get_by_role("button", name="Undo").click()
    expect(page.locator('[data-testid="stMetric"]').first).to_contain_text(f"{expected.freight_payable:,}")
    page.get_by_role("button", name="Redo").click()
    expect(page.locator('[data-testid="stMetric"]').first).to_contain_text(f"{held:,}")

    go_to(page, "Hand over")
    with page.expect_download() as download:
        page.get_by_role("button", name="Plan as a workbook").click()
    target = tmp_path / "plan.xlsx"
    download.value.save_as(target)
    book = openpyxl.load_workbook(target)
    assert {"Plan", "By depot", "By customer", "By haulier", "Costs", "Notes", "Rates"} <= set(
        book.sheetnames
    )
    read_back = engine.read_week(target).week
    assert len(read_back.holds) == 1
    assert engine.plan_week(read_back).freight_payable == held

    hosts = {urlparse(url).hostname for url in requests if not url.startswith(("data:", "blob:"))}
    assert hosts == {"127.0.0.1"}


def _hold(key, quantity):  # type: ignore[no-untyped-def]
    from engine.changes import SetHold

    return SetHold(key, quantity)


def test_a_figure_typed_in_a_grid_is_read_by_our_reader(page: Page) -> None:
    page.get_by_role("button", name="Open the sample week").click()
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)
    grid = visible_grid(page)
    available = column_of(grid, "Available")
    type_into(page, grid, available, 0, "1,240.5 t")
    page.get_by_role("button", name="Make the change").click()
    page.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    type_into(page, grid, available, 1, "plenty")
    remark = page.locator('[data-testid="stMarkdown"]', has_text="plenty")
    remark.wait_for(timeout=30_000)
    go_to(page, "Plan")
    page.get_by_text("This week cannot be planned as it stands").wait_for(timeout=30_000)
    go_to(page, "Figures")
    grid = visible_grid(page)
    assert text_of(grid, available, 1) == "plenty"
    type_into(page, grid, available, 1, "990")
    expect(remark).to_have_count(0, timeout=30_000)
    go_to(page, "Plan")
    sample = engine.read_week(sample_data.path(sample_data.SMALL_WEEK)).week
    from engine.changes import Alter

    changed = sample.apply(Alter("depot", next(iter(sample.depots)), "available", Decimal("1240.5")))
    assert freight(page) == engine.plan_week(changed).freight_payable


def test_the_table_that_is_edited_stays_open_and_the_price_in_sight(page: Page) -> None:
    page.get_by_role("button", name="Open the sample week").click()
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)
    page.get_by_role("tab", name="Customers").click()
    grid = visible_grid(page)
    type_into(page, grid, column_of(grid, "Ordered"), 1, "400")
    made = page.get_by_role("button", name="Make the change")
    made.wait_for(timeout=30_000)
    expect(page.get_by_role("tab", name="Customers")).to_have_attribute("aria-selected", "true")
    page.mouse.move(1262, 600)
    page.mouse.wheel(0, 600)
    expect(made).to_be_in_viewport()
    made.click()
    page.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    expect(page.get_by_role("tab", name="Customers")).to_have_attribute("aria-selected", "true")


def test_an_address_of_a_page_leads_to_that_page_with_the_menu(page: Page, desk: str) -> None:
    page.goto(f"{desk}/plan")
    page.get_by_role("heading", name="Plan", exact=True).wait_for(timeout=30_000)
    page.get_by_role("link", name="Hand over", exact=True).wait_for()


def test_what_is_no_spreadsheet_is_refused_and_the_week_stays(page: Page, tmp_path: Path) -> None:
    page.get_by_role("button", name="Open the sample week").click()
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)
    page.get_by_text("Open other figures").click()
    fake = tmp_path / "week.xlsx"
    fake.write_bytes(b"this is no workbook")
    upload(page, fake)
    page.locator('[data-testid="stAlert"]').first.wait_for(timeout=30_000)
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for()
