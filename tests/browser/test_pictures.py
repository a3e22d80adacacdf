"""Makes the pictures of the README: `HITHE_PICTURES=app python -m pytest tests/browser/test_pictures.py`.

Without that variable they are made in a folder of the test's own, so that a page that no longer can be
pictured fails.
"""

import os
from pathlib import Path

import pytest
from PIL import Image
from playwright.sync_api import Browser

WIDTH, HEIGHT = 1280, 900
PICTURES = {"Plan": "plan_page.png", "Reasons": "reasons_page.png", "Compare": "compare_page.png"}
README = Path(__file__).parents[2] / "README.md"


@pytest.mark.parametrize("name", list(PICTURES))
def test_a_page_is_pictured(chromium: Browser, desk: str, tmp_path: Path, name: str) -> None:
    page = chromium.new_page(viewport={"width": WIDTH, "height": HEIGHT}, color_scheme="light")
    page.goto(desk)
    page.get_by_role("button", name="See the plan of the sample week").click()
    page.get_by_role("heading", name="Plan", exact=True).wait_for(timeout=90_000)
    page.get_by_role("link", name=name, exact=True).first.click()
    page.get_by_role("heading", name=name, exact=True, level=1).wait_for(timeout=60_000)
    page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for(timeout=60_000)
    if name == "Plan":
        page.locator('[data-testid="stDeckGlJsonChart"] canvas').first.wait_for(timeout=60_000)
    page.wait_for_timeout(6_000)  # the map and the charts paint after the script has run
    target = Path(os.environ.get("HITHE_PICTURES", tmp_path)) / PICTURES[name]
    page.screenshot(path=target)
    page.close()
    picture = Image.open(target).convert("RGB")
    assert picture.size == (WIDTH, HEIGHT)
    assert len(picture.resize((64, 45)).getcolors(64 * 45) or ()) > 50  # not one colour, not an empty page


def test_the_readme_shows_them() -> None:
    text = README.read_text(encoding="utf-8")
    for file in PICTURES.values():
        assert f"](app/{file})" in text
        assert Image.open(README.parent / "app" / file).size == (WIDTH, HEIGHT)
