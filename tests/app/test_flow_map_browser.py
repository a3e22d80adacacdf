"""The map in a real browser: it is painted, follows light and dark, can be picked, and fetches nothing."""

import os
import re
import socket
import subprocess
import sys
import time
from io import BytesIO
from pathlib import Path
from urllib.parse import urlsplit
from urllib.request import urlopen

import pytest
from PIL import Image

from app.parts.map_colours import DARK, LIGHT, rgba
from app.parts.map_drawing import drawing
from tests.app.flow_map_page import figures

ROOT = Path(__file__).resolve().parents[2]
PAGE = Path(__file__).with_name("flow_map_page.py")
CANVAS = "[data-testid=stDeckGlJsonChart] canvas"
PATIENCE = 90


@pytest.fixture(scope="module")
def address():
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    options = {
        "server.port": port,
        "server.address": "127.0.0.1",
        "server.headless": "true",
        "server.fileWatcherType": "none",
        "browser.gatherUsageStats": "false",
    }
    words = [word for name, value in options.items() for word in (f"--{name}", str(value))]
    launch = [sys.executable, "-m", "streamlit", "run", str(PAGE), *words]
    with subprocess.Popen(
        launch, cwd=ROOT, env={**os.environ, "PYTHONPATH": str(ROOT)}, stdout=subprocess.DEVNULL
    ) as server:
        try:
            _until(lambda: urlopen(f"http://127.0.0.1:{port}/_stcore/health").read() == b"ok")
            yield f"http://127.0.0.1:{port}"
        finally:
            server.terminate()


def _until(holds):
    """Asks again until it holds; raises what last went wrong when patience ends."""
    end = time.monotonic() + PATIENCE
    while True:
        try:
            if holds():
                return
            problem = TimeoutError(f"still not so after {PATIENCE} s")
        except OSError as error:
            problem = error
        if time.monotonic() > end:
            raise problem
        time.sleep(0.3)


@pytest.fixture
def opened(chromium, address):
    """Opens a page with a case on it; answers it and the hosts that were asked for anything."""
    contexts = []

    def open_page(case="", scheme="light"):
        context = chromium.new_context(viewport={"width": 1280, "height": 1100}, color_scheme=scheme)
        contexts.append(context)
        page = context.new_page()
        page.set_default_timeout(PATIENCE * 1000)
        hosts = set()
        page.on("request", lambda request: hosts.add(urlsplit(request.url).netloc))
        page.goto(f"{address}/?case={case}")
        page.wait_for_selector(CANVAS)
        return page, hosts

    yield open_page
    for context in contexts:
        context.close()


def painted(page):
    """The colours on the map, with how many pixels have each."""
    picture = Image.open(BytesIO(page.locator(CANVAS).first.screenshot())).convert("RGB")
    return {colour: count for count, colour in picture.getcolors(picture.width * picture.height)}


def there(page, colour, pixels):
    return painted(page).get(tuple(rgba(colour)[:3]), 0) >= pixels


def on_map(page, case, depot):
    """Where a depot is on the page."""
    made = drawing(*figures(case))
    mark = next(mark for mark in made.depots if depot in mark.names)
    canvas = page.locator(CANVAS).first.bounding_box()
    return canvas["x"] + canvas["width"] / 2 + mark.spot[0], canvas["y"] + canvas["height"] / 2 + mark.spot[1]


def pick(page, case, depot):
    """Clicks on a depot until the page says that it is picked: the first click may come too early."""

    def is_picked():
        if page.get_by_text(f"picked: {depot}, ()", exact=True).count():
            return True
        page.mouse.click(*on_map(page, case, depot))
        page.wait_for_timeout(1500)
        return bool(page.get_by_text(f"picked: {depot}, ()", exact=True).count())

    _until(is_picked)


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_map_is_painted_in_the_colours_of_the_theme(opened, address, scheme):
    expected = DARK if scheme == "dark" else LIGHT
    page, hosts = opened(scheme=scheme)
    _until(lambda: there(page, expected.tones[0], 100))
    colours = painted(page)
    for colour, pixels in ((expected.sea, 20_000), (expected.land, 20_000), (expected.short, 20)):
        assert colours.get(tuple(rgba(colour)[:3]), 0) >= pixels
    assert page.get_by_role("figure", name=re.compile("^Map of 3 depots")).count() == 1
    assert page.get_by_role("img", name=re.compile("^Legend")).count() == 1
    assert hosts == {urlsplit(address).netloc}


def test_a_depot_is_picked_with_a_click_and_the_rest_steps_back(opened, address):
    page, hosts = opened()
    _until(lambda: there(page, LIGHT.tones[0], 100))
    assert there(page, LIGHT.land, 20_000)
    pick(page, "", "Northgate")
    _until(lambda: not there(page, LIGHT.land, 20_000))
    assert there(page, LIGHT.tones[0], 100)
    assert hosts == {urlsplit(address).netloc}


def test_names_from_a_sheet_do_nothing(opened, address):
    page, hosts = opened("hostile")
    asked = []
    page.on("dialog", lambda dialog: (asked.append(dialog.message), dialog.dismiss()))
    _until(lambda: there(page, LIGHT.tones[0], 100))
    page.mouse.move(*on_map(page, "hostile", "{tip} <img src=http://127.0.0.1:9/a>"))
    page.get_by_text("❴tip❵ <img src=http://127.0.0.1:9/a>").wait_for()
    pick(page, "hostile", "@@=alert(1)")
    assert asked == []
    assert hosts == {urlsplit(address).netloc}
