"""Compare in the real browser: a run with Stop and a refresh, the trade-off, a variant from start to finish,
and what a manager sees who opens the link for reading only.
"""

import re
from collections.abc import Callable, Iterator
from decimal import Decimal
from io import BytesIO
from urllib.parse import urlparse

import openpyxl
import pytest
from playwright.sync_api import Browser, Locator, Page, expect
from playwright.sync_api import TimeoutError as PlaywrightTimeout

import engine
import sample_data
from engine.changes import Alter
from engine.compare.bridge import Side, bridge
from engine.compare.frontier import Emissions, frontier
from engine.compare.service import saving
from engine.compare.stress import stressed
from engine.compare.stress_cases import depots_lost
from engine.compare.usual import Rule, usual_plan
from engine.records import Opened, create_week, open_records
from tests.browser.grids import cell, column_of, text_of, type_into
from tests.browser.test_reasons import pick_row
from tests.browser.test_whole_road import go_to, visible_grid

D = Decimal
LATEST = 60_000


Visit = Callable[[str], Page]


@pytest.fixture
def visit(chromium: Browser, desk: str, requests: list[str]) -> Iterator[Visit]:
    """Opens a view of Compare on a sample week that was just put into the records; a traceback fails."""
    context = chromium.new_context(viewport={"width": 1280, "height": 900})
    page = context.new_page()
    page.on("request", lambda request: requests.append(request.url))

    def opened(view: str) -> Page:
        page.goto(f"{desk}/compare?week={new_weeks(sample_data.SMALL_WEEK)[0].listed.id}&view={view}")
        return page

    yield opened
    assert page.locator('[data-testid="stException"]').count() == 0
    context.close()


def new_weeks(*names: str) -> list[Opened]:
    """Weeks of these files, put into the records that the desk works on."""
    records = open_records()
    found = [create_week(records, engine.read_week(sample_data.path(name))) for name in names]
    records.close()
    return found


def figure(grid: Locator, heading: str, row: int) -> Decimal:
    text = text_of(grid, column_of(grid, heading), row)
    return D(text.replace(",", "").replace("\u2212", "-"))


def drawn_with(page: Page, heading: str, row: int, text: str) -> Locator:
    """The first table, once this cell of it is drawn."""
    grid = visible_grid(page)
    head = grid.locator("thead th", has_text=heading).first
    head.wait_for(state="attached", timeout=LATEST)
    expect(cell(grid, column_of(grid, heading), row)).to_have_text(text, timeout=LATEST)
    return grid


def picked(page: Page, row: int, shown: Locator) -> None:
    """Ticks a row of the first table until what that shows is there: one that redraws may miss a click."""
    for _ in range(4):
        page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for(timeout=LATEST)
        pick_row(page, row)
        try:
            shown.first.wait_for(timeout=LATEST / 4)
            return
        except PlaywrightTimeout:
            continue
    raise AssertionError(f"Row {row} could not be picked.")


def sample_plan() -> engine.Plan:
    return engine.plan_week(engine.read_week(sample_data.path(sample_data.SMALL_WEEK)).week)


def test_a_run_is_stopped_ranked_drawn_on_the_map_and_outlives_a_refresh(
    visit: Visit, requests: list[str]
) -> None:
    page, plan = visit("stress"), sample_plan()
    page.get_by_label("Drawn weeks").fill("5000")
    page.get_by_label("Drawn weeks").press("Enter")
    page.get_by_role("button", name="Try 5,").click()
    expect(page.get_by_role("progressbar")).to_be_visible(timeout=LATEST)
    expect(page.get_by_text(re.compile(r"\d+ of 5,\d\d\d cases"))).to_be_visible()
    page.get_by_role("button", name="Stop", exact=True).click()
    stopped = page.get_by_text(re.compile(r"Stopped: [\d,]+ of 5,\d\d\d cases are done"))
    stopped.wait_for(timeout=LATEST)
    said = stopped.inner_text()
    page.reload()  # the same run, found again

    expected = stressed(plan, depots_lost(plan))
    worst = expected.ranked()[0]
    expect(stopped).to_have_text(said, timeout=LATEST)
    grid = drawn_with(page, "Case", 0, f"{worst.case.depot} lost")
    assert figure(grid, "More short", 0) == expected.more_short(worst)
    assert figure(grid, "Dearer by", 0) == expected.dearer(worst)
    picked(page, 0, page.get_by_role("heading", name=f"{worst.case.depot} lost"))
    page.locator('[data-testid="stDeckGlJsonChart"] canvas').first.wait_for(timeout=LATEST)
    assert {urlparse(url).hostname for url in requests if url.startswith("http")} == {"127.0.0.1"}


def test_the_trade_off_asks_for_the_factor_and_its_source(visit: Visit) -> None:
    page, plan = visit("frontier"), sample_plan()
    page.get_by_text("there is no default").wait_for(timeout=LATEST)
    page.get_by_label("Emission factor, kg CO2e per tonne-km").fill("0.06")
    page.get_by_label("Where the factor is from").fill("our own report of 2025")
    page.get_by_label("Where the factor is from").press("Enter")
    page.get_by_text("(our own report of 2025)").wait_for(timeout=LATEST)
    points = frontier(plan, Emissions(D("0.06"), "us")).points
    grid = drawn_with(page, "Breakpoint", 2, "3")
    for row, point in enumerate(points[:3]):
        assert figure(grid, "Freight, EUR", row) == point.freight
        assert figure(grid, "Emissions", row) == point.emissions
    expect(page.locator('[data-testid="stVegaLiteChart"]')).to_have_count(1)
    picked(page, 1, page.get_by_text(re.compile(r"Breakpoint 2: \d+ lanes? would change")))


def test_a_variant_is_made_compared_and_promoted(visit: Visit) -> None:
    page, plan = visit("variants"), sample_plan()
    page.get_by_text("No variant yet").wait_for(timeout=LATEST)
    first = next(iter(plan.week.depots.values()))
    other = engine.plan_week(plan.week.apply(Alter("depot", first.name, "available", D(500))))
    go_to(page, "Figures")
    grid = visible_grid(page)
    type_into(page, grid, column_of(grid, "Available"), 0, "500")
    page.get_by_role("button", name="Keep as a variant").click(timeout=LATEST)
    page.get_by_label("Name of the variant").fill("half of it")
    page.get_by_label("Name of the variant").press("Enter")
    page.get_by_role("button", name="Keep it").click()
    page.get_by_text("is kept as a variant").wait_for(timeout=LATEST)

    go_to(page, "Compare")  # where the view seen last is found again
    grid = drawn_with(page, "Variant", 1, "half of it")
    assert text_of(grid, column_of(grid, "Variant"), 0) == "The week as it stands"
    assert figure(grid, "Freight", 0) == plan.freight_payable
    assert figure(grid, "Freight", 1) == other.freight_payable
    with page.expect_download() as download:
        page.get_by_role("button", name="Workbook with sheet Variants").click()
    book = openpyxl.load_workbook(BytesIO(download.value.path().read_bytes()), read_only=True)
    assert "Variants" in book.sheetnames
    promote = page.get_by_role("button", name="Put it up as a change")
    picked(page, 1, promote)
    promote.click(timeout=LATEST)
    page.get_by_text("Not made yet.").wait_for(timeout=LATEST)
    page.get_by_role("button", name=re.compile("Make the change|Make it all the same")).click()
    page.get_by_text("1 change since it was opened").wait_for(timeout=LATEST)
    metric = page.locator('[data-testid="stMetric"]', has_text="Freight payable")
    expect(metric).to_contain_text(f"{other.freight_payable:,}")


@pytest.fixture(params=["light", "dark"])
def reader(chromium: Browser, desk: str, request: pytest.FixtureRequest) -> Iterator[Page]:
    """The screen of a manager who opens the link for reading of a week that had one before it."""
    _, now = new_weeks("week_before.xlsx", sample_data.SMALL_WEEK)
    context = chromium.new_context(viewport={"width": 1280, "height": 800}, color_scheme=request.param)
    page = context.new_page()
    page.goto(f"{desk}/?read={now.listed.read_id}")
    yield page
    assert page.locator('[data-testid="stException"]').count() == 0
    context.close()


def test_a_manager_sees_cost_saving_change_and_reasons_without_a_click(reader: Page) -> None:
    """Without a click and without scrolling, at 1280 by 800."""
    week = engine.read_week(sample_data.path("week_before.xlsx")).week
    plan, before = sample_plan(), engine.plan_week(week)
    saved = saving(plan, usual_plan(plan.week, Rule.NEAREST).costs).freight
    found = bridge(Side(week.rules.week, week, before), Side(plan.week.rules.week, plan.week, plan))
    change = f"{found.freight:,} EUR".replace("-", "\u2212")
    for label, value in (
        ("Week 6: freight payable", f"{plan.freight_payable:,} EUR"),
        ("Saving against nearest depot first", f"{saved:,} EUR"),
        ("Change from Week 5", change),
    ):
        metric = reader.locator('[data-testid="stMetric"]', has_text=label)
        expect(metric).to_contain_text(value, timeout=LATEST)
        expect(metric).to_be_in_viewport()
    largest = sorted(found.steps, key=lambda step: -abs(step.freight))[:2]
    for step in largest:
        word = "more" if step.freight > 0 else "less"
        reason = reader.get_by_text(f"{abs(step.freight):,} EUR {word} by {step.name.lower()}")
        expect(reason).to_be_in_viewport(timeout=LATEST)
    expect(reader.locator('[data-testid="stVegaLiteChart"]').first).to_be_in_viewport(timeout=LATEST)
    expect(reader.get_by_text("for reading only")).to_be_visible()
    assert reader.evaluate("document.documentElement.scrollWidth") <= 1280
