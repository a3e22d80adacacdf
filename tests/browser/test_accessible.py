"""Pages as a screen reader and a keyboard find them: rules of WCAG 2.1 by axe-core, no scrolling sideways.

axe-core (Deque Systems, MPL 2.0) checks what the Web Content Accessibility Guidelines ask of a page.
"""

import pytest
from axe_core_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page

PAGES = ("Figures", "Plan", "Reasons", "Compare", "Hand over", "Weeks", "How it works")
GRAVE = ("serious", "critical")


def opened(chromium: Browser, desk: str, scheme: str, width: int, height: int) -> Page:
    page = chromium.new_page(viewport={"width": width, "height": height}, color_scheme=scheme)  # type: ignore[arg-type]
    page.goto(desk)
    page.get_by_role("button", name="See the plan of the sample week").click()
    page.get_by_role("heading", name="Plan", exact=True).wait_for(timeout=90_000)
    return page


def go_to(page: Page, name: str) -> None:
    page.get_by_role("link", name=name, exact=True).first.click()
    page.get_by_role("heading", name=name, exact=True, level=1).wait_for(timeout=60_000)
    page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for(timeout=60_000)


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_no_page_breaks_a_grave_rule(chromium: Browser, desk: str, scheme: str) -> None:
    page = opened(chromium, desk, scheme, 1280, 900)
    broken = []
    for name in PAGES:
        go_to(page, name)
        found = Axe().run(page)
        broken += [
            f"{name}: {one['id']}, {one['help']}: {one['nodes'][0]['html'][:200]}"
            for one in found["violations"]
            if one["impact"] in GRAVE or one["id"] == "heading-order"
        ]
        assert page.evaluate("document.documentElement.scrollWidth") <= 1280, name
    page.close()
    assert not broken, "\n".join(broken)


def test_at_twice_the_size_the_plan_needs_no_scrolling_sideways(chromium: Browser, desk: str) -> None:
    """A browser zoomed to 200 % gives a page half the width: 640 pixels of 1280."""
    page = opened(chromium, desk, "light", 640, 450)
    assert page.evaluate("document.documentElement.scrollWidth") <= 640
    page.get_by_text("Freight payable, EUR").wait_for(timeout=60_000)
    assert page.evaluate("document.documentElement.scrollWidth") <= 640
    page.close()


def test_the_plan_is_reached_and_read_by_keyboard(chromium: Browser, desk: str) -> None:
    page = opened(chromium, desk, "light", 1280, 900)
    page.get_by_text("Matrix", exact=True).wait_for(timeout=60_000)
    page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for(timeout=60_000)
    seen: list[str] = []
    for _ in range(60):
        page.keyboard.press("Tab")
        seen.append(
            page.evaluate(
                "(document.activeElement.innerText || document.activeElement.ariaLabel || '').trim()"
            )
        )
    for name in ("Figures", "Reasons", "By customer", "Matrix"):
        assert any(name in text for text in seen), (name, seen)
    page.close()
