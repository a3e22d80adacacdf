"""Hostile names through every page of a real browser: nothing runs, nothing is fetched."""

import re
from collections.abc import Iterator
from pathlib import Path
from urllib.parse import urlparse

import pytest
from playwright.sync_api import Browser, Page

import engine
from engine.changes import SetHold
from engine.records import Opened, create_week, issue_plan, open_records, open_week, save
from engine.records.depot_links import depot_link
from tests.safe.attack import DEPOTS, attack_week
from tests.safe.conftest import Start

CHOICES = '[data-testid="stButtonGroup"] button, [role="tab"]'
WORD_JOINER = "\u2060"  # stands unseen behind a colon, so that it begins no code
PAGES = ("Figures", "Plan", "Reasons", "Compare", "Hand over", "Weeks")
INJECTED = """() => {
    const found = [];
    const outside = element => /elsewhere|javascript:/.test(element.href || element.src || '');
    for (const element of document.querySelectorAll('a, img, script, iframe, link, form, object, embed'))
        if (outside(element) || (element.src || '').endsWith('/x'))
            found.push(element.outerHTML.slice(0, 200));
    for (const element of document.querySelectorAll('script'))
        if (/attacked/.test(element.textContent)) found.push('script');
    for (const element of document.querySelectorAll('.katex, [data-testid=stMarkdownContainer] del'))
        found.push(element.outerHTML.slice(0, 200));
    for (const element of document.querySelectorAll('strong, em, h1, h2, h3, code, [style*="color"]'))
        if (/^(bold|slant|a heading|code|red)$/.test(element.textContent.trim()) )
            found.push(element.outerHTML.slice(0, 200));
    for (const element of document.querySelectorAll('[data-testid=stIconMaterial]'))
        if (element.textContent.trim() === 'home') found.push('icon');
    if (/🎉/.test(document.body.innerText)) found.push('emoji');
    if (/\\b49\\b/.test(document.title)) found.push('title');
    if (window.attacked) found.push('a script ran');
    return found;
}"""


@pytest.fixture
def watched(chromium: Browser) -> Iterator[tuple[Page, list[str]]]:
    """A page, and what should not have happened on it."""
    context = chromium.new_context(viewport={"width": 1280, "height": 900}, accept_downloads=True)
    context.set_default_timeout(90_000)
    page, wrong = context.new_page(), []
    page.on("dialog", lambda dialog: (wrong.append(f"dialog: {dialog.message}"), dialog.dismiss()))
    page.on("popup", lambda other: wrong.append(f"window: {other.url}"))
    page.on("request", lambda request: _note(request.url, wrong))
    yield page, wrong
    context.close()


def _note(url: str, wrong: list[str]) -> None:
    if url.startswith(("data:", "blob:")):
        return
    if urlparse(url).hostname not in ("127.0.0.1", "localhost"):
        wrong.append(f"request: {url}")


def settled(page: Page) -> None:
    """Until the page has nothing more to do."""
    page.wait_for_function(
        "() => !document.querySelector('[data-testid=stStatusWidget], [data-testid=stSpinner]')",
        timeout=90_000,
    )
    page.wait_for_timeout(400)


def looked_at(page: Page, wrong: list[str], where: str) -> None:
    settled(page)
    wrong += [f"{where}: {one}" for one in page.evaluate(INJECTED)]
    if page.locator('[data-testid="stException"]').count():
        wrong.append(
            f"{where}: a fault: {page.locator('[data-testid=stException]').first.inner_text()[:300]}"
        )


def every_view(page: Page, wrong: list[str], where: str) -> None:
    """Each choice of each row of buttons on the page."""
    looked_at(page, wrong, where)
    choices = page.locator(CHOICES)
    for name in dict.fromkeys(choices.all_inner_texts()):
        choice = page.locator(CHOICES, has_text=re.compile(f"^{re.escape(name)}$")).first
        if choice.count() and choice.is_visible():
            choice.click()
            looked_at(page, wrong, f"{where}, {name}")
    for opener in page.locator('[data-testid="stExpander"] summary').all():
        if opener.is_visible():
            opener.click()
    looked_at(page, wrong, where)


@pytest.fixture
def kept(tmp_path: Path) -> Opened:
    """The week in the records of the desk, with a hold whose reason is hostile too, and an issued plan."""
    records = open_records(tmp_path / "records.sqlite")
    opened = create_week(records, attack_week())
    plan = engine.plan_week(opened.history.week)
    first = plan.shipments[0]
    history = opened.history.after(SetHold(first.key, first.quantity, DEPOTS[1]), DEPOTS[0], DEPOTS[9])
    save(records, opened.listed.id, history, 0)
    issue_plan(records, opened.listed.id, engine.plan_week(history.week), 1, DEPOTS[0], DEPOTS[20])
    found = open_week(records, opened.listed.id)
    records.close()
    return found


def test_hostile_names_do_nothing_on_any_page(
    start: Start, watched: tuple[Page, list[str]], kept: Opened, tmp_path: Path
) -> None:
    desk, (page, wrong) = start(), watched
    page.goto(f"{desk}/?week={kept.listed.id}&who={DEPOTS[1]}")
    page.locator("h1").first.wait_for(timeout=60_000)
    for name in PAGES:
        page.get_by_role("link", name=name, exact=True).click()
        page.get_by_role("heading", name=name, exact=True).wait_for(timeout=60_000)
        every_view(page, wrong, name)
        if name == "Plan":
            hover_over_map(page)
            looked_at(page, wrong, "map")
            shown = page.locator('[data-testid="stMain"]').inner_text()
            assert "<script>window.attacked=1</script>" in page.locator("body").inner_text()
            assert shown
        if name == "Hand over":
            downloads(page, tmp_path)
    assert wrong == []
    for place in (0, 1, 20):
        page.goto(f"{desk}/?depot={depot_link(kept.listed.id, DEPOTS[place])}")
        page.get_by_text("Plan 1, issued").wait_for(timeout=60_000)
        looked_at(page, wrong, "a depot's page")
        title = page.locator("h1").inner_text().replace(WORD_JOINER, "")
        assert title == f"Loading list: {DEPOTS[place]}"
    assert wrong == []
    log = (tmp_path / "desk.log").read_text()
    for name in ("attacked", "elsewhere", "DROP", "bold"):
        assert name not in log
    records = open_records(tmp_path / "records.sqlite")
    assert open_week(records, kept.listed.id).listed.name == kept.listed.name  # the tables are still there
    records.close()


def hover_over_map(page: Page) -> None:
    """Over the middle of the map and around it, so that tooltips show."""
    canvas = page.locator('[data-testid="stDeckGlJsonChart"] canvas').first
    canvas.wait_for(timeout=60_000)
    box = canvas.bounding_box()
    assert box is not None
    for right in range(1, 9):
        for down in range(1, 9):
            page.mouse.move(box["x"] + box["width"] * right / 9, box["y"] + box["height"] * down / 9)
            page.wait_for_timeout(15)


def downloads(page: Page, folder: Path) -> None:
    """The files come under plain names, and lie where they are told to."""
    for button in page.locator('[data-testid="stDownloadButton"] button:visible').all():
        with page.expect_download(timeout=60_000) as download:
            button.click()
        settled(page)
        assert re.fullmatch(r"[A-Za-z0-9_-]{1,100}\.(xlsx|zip|csv|json)", download.value.suggested_filename)
        download.value.save_as(folder / download.value.suggested_filename)
