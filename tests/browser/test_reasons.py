"""Reasons in the real browser: a lane is picked, whom it would move is told and drawn; views and curve."""

from urllib.parse import urlparse

from playwright.sync_api import Page, expect

import engine
import sample_data
from engine.changes import SetHold
from engine.reasons import chain, nearest_to_paying, sentences
from tests.browser.test_whole_road import go_to, upload, visible_grid

HEADER, ROW = 35, 35
"""Pixels of a table's heading and of a row."""


def pick_row(page: Page, row: int) -> None:
    """Tick a row of the first table that is seen."""
    box = visible_grid(page).bounding_box()
    assert box is not None
    page.mouse.click(box["x"] + 14, box["y"] + HEADER + ROW * row + ROW / 2)


def test_a_lane_near_to_paying_is_picked_and_told(page: Page, requests: list[str]) -> None:
    week = sample_data.path(sample_data.SMALL_WEEK)
    upload(page, week)
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)
    go_to(page, "Reasons")
    page.get_by_text("The nearest of them; pick another on the left").wait_for(timeout=60_000)

    plan = engine.plan_week(engine.read_week(week).week)
    near = nearest_to_paying(plan, 100)
    row, told = next(
        (n, made)
        for n, lane in enumerate(near[:10])
        if len((made := chain(plan, SetHold(lane.interval.key, lane.carries))).legs[0].moves) > 2
    )
    pick_row(page, row)
    (sentence, *_) = sentences(told, "t", "EUR")
    page.get_by_text(sentence.split(":")[0]).first.wait_for(timeout=30_000)
    canvas = page.locator('[data-testid="stDeckGlJsonChart"] canvas').first
    canvas.wait_for(timeout=60_000)

    page.get_by_text("Curve", exact=True).first.click()
    page.get_by_text("What the next unit costs").wait_for(timeout=30_000)
    expect(page.locator('[data-testid="stVegaLiteChart"]')).to_have_count(2, timeout=30_000)
    hosts = {urlparse(url).hostname for url in requests if url.startswith("http")}
    assert hosts == {"127.0.0.1"}
