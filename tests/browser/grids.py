"""Typing into a grid as a person does: pick the cell, type, confirm; and be sure that it was that cell."""

import time

from playwright.sync_api import Locator, Page


def cell(grid: Locator, column: int, row: int) -> Locator:
    return grid.locator(f'[data-testid="glide-cell-{column}-{row}"]')


def column_of(grid: Locator, heading: str) -> int:
    """Where the column stands whose heading begins with these words."""
    head = grid.locator("thead th", has_text=heading).first
    head.wait_for(state="attached", timeout=30_000)
    first = grid.locator(f'tbody td[aria-colindex="{head.get_attribute("aria-colindex")}"]').first
    return int((first.get_attribute("data-testid") or "").split("-")[2])


def text_of(grid: Locator, column: int, row: int) -> str:
    return (cell(grid, column, row).text_content() or "").strip()


def pick(page: Page, grid: Locator, column: int, row: int, seconds: float = 30) -> None:
    """Select one cell; the grid may redraw under our hands, so ask twice whether it is still selected."""
    end = time.monotonic() + seconds
    target = cell(grid, column, row)
    target.wait_for(state="attached", timeout=seconds * 1000)
    while time.monotonic() < end:
        target.focus()
        page.wait_for_timeout(120)
        if target.get_attribute("aria-selected") == "true":
            page.wait_for_timeout(60)
            if target.get_attribute("aria-selected") == "true":
                return
    raise AssertionError(f"The cell in column {column}, row {row} could not be selected.")


def type_into(page: Page, grid: Locator, column: int, row: int, text: str) -> None:
    """Replace a cell's text."""
    pick(page, grid, column, row)
    page.keyboard.press("Enter")
    box = page.locator("#portal textarea, #portal input").first
    box.wait_for()
    box.fill(text)
    page.keyboard.press("Enter")
