"""How long an edit takes to the screen, beside a page that does nothing: a real desk and a real browser.

python -m tests.speed_screen [--edits 15] [--large]

Nothing here is asserted. An edit is a quantity typed into a grid of the 20 x 500 week and put up with its
price, or the acceptance of it, which is on disk when the page says so; a plain rerun redraws the same page
after a switch that changes nothing on disk or in the plan. Both are timed in the browser from the key or
click to the end of the desk's run and the drawn page. `--large` opens a 100 x 10,000 week and counts what
the desk sends.
"""

# ruff: noqa: T201
import argparse
import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from playwright.sync_api import Browser, Page, sync_playwright

import engine
import sample_data
from engine.records import create_week, open_records
from tests.browser.conftest import environment, free_port, wait_until_open
from tests.browser.grids import column_of, pick, text_of
from tests.conftest import ARGUMENTS, CHROMIUM
from tests.records.making import read, wide_week

NO_GL = ["--disable-gpu", "--disable-3d-apis"]
"""The map is drawn by a graphics card; without one its software twin would be all that is measured."""

BARE = 'import streamlit as st\nst.write("Nothing")\n'


def desk(folder: Path, place: Path) -> tuple[subprocess.Popen[bytes], str]:
    """A desk on these records."""
    port = free_port()
    command = [sys.executable, "-m", "app.command", "desk", "--no-browser", "--port", str(port)]
    return _started(command, folder, port, {"HITHE_RECORDS": str(place)})


def bare(folder: Path) -> tuple[subprocess.Popen[bytes], str]:
    """A page of one line, served by the same Streamlit."""
    (folder / "bare.py").write_text(BARE)
    port = free_port()
    command = [sys.executable, "-m", "streamlit", "run", "bare.py", "--server.headless", "true"]
    command += ["--server.port", str(port), "--browser.gatherUsageStats", "false"]
    return _started(command, folder, port, {})


def _started(
    command: list[str], folder: Path, port: int, more: dict[str, str]
) -> tuple[subprocess.Popen[bytes], str]:
    with (folder / f"{port}.log").open("wb") as log:
        process = subprocess.Popen(command, cwd=folder, stdout=log, stderr=log, env={**environment(), **more})
    address = f"http://127.0.0.1:{port}"
    wait_until_open(address, process)
    return process, address


def settled(page: Page) -> None:
    """Until the run is over and the page has drawn: no status widget, and two frames."""
    page.wait_for_function(
        "() => document.querySelector('[data-testid=stApp]')?.dataset.testScriptState === 'notRunning'",
        timeout=120_000,
    )
    page.evaluate("() => new Promise(done => requestAnimationFrame(() => requestAnimationFrame(done)))")


def timed(act: Callable[[], object], page: Page, seen: Callable[[], object]) -> float:
    """Milliseconds from an act until what it leads to is seen and the page is settled."""
    begun = time.perf_counter()
    act()
    seen()
    settled(page)
    return (time.perf_counter() - begun) * 1000


def edits(page: Page, count: int) -> dict[str, float]:
    """Medians of plain reruns, of edits put up, and of edits accepted, on the same page."""
    page.get_by_role("link", name="Plan", exact=True).click()
    page.get_by_role("heading", name="Plan", exact=True).wait_for(timeout=120_000)
    grid = page.locator('[data-testid="stDataFrame"]:visible').first
    grid.wait_for(timeout=120_000)
    settled(page)
    plain, put_up, accepted = [], [], []
    limits = page.locator("label", has_text="Limits").first
    for number in range(count):
        before = page.evaluate(RUNS)
        plain.append(timed(limits.click, page, lambda n=before: page.wait_for_function(MORE_RUNS, arg=n)))
        send = column_of(grid, "Send")
        was = text_of(grid, send, number % 8).replace(",", "")
        wanted = str(int(float(was)) - 1)
        shown = page.get_by_text("Not made yet.")
        pick(page, grid, send, number % 8)
        page.keyboard.press("Enter")
        box = page.locator("#portal textarea, #portal input").first
        box.wait_for()
        box.fill(wanted)
        put_up.append(
            timed(
                lambda: page.keyboard.press("Enter"),
                page, lambda shown=shown: shown.wait_for(timeout=60_000),
            )
        )  # fmt: skip
        accept = page.get_by_role("button", name="Make the change")
        accepted.append(
            timed(accept.click, page, lambda shown=shown: shown.wait_for(state="detached", timeout=60_000))
        )
    return {
        "plain rerun of Plan": statistics.median(plain),
        "edit typed, planned and put up": statistics.median(put_up),
        "edit accepted, on disk, on screen": statistics.median(accepted),
    }


RUNS = "() => window.hitheRuns || 0"
MORE_RUNS = "before => (window.hitheRuns || 0) > before"
COUNT_RUNS = """
new MutationObserver(() => {
  const app = document.querySelector('[data-testid=stApp]');
  const running = app && app.dataset.testScriptState === 'running';
  if (running && !window.hitheRunning) window.hitheRuns = (window.hitheRuns || 0) + 1;
  window.hitheRunning = running;
}).observe(document, {subtree: true, attributes: true, childList: true});
"""


def page_to_page(page: Page) -> dict[str, float]:
    """Medians of going from page to page."""
    found = {}
    for name in ("Reasons", "Hand over", "Weeks", "Figures", "Plan"):
        took = []
        for _ in range(3):
            page.get_by_role("link", name="Weeks" if name != "Weeks" else "Plan", exact=True).click()
            page.wait_for_timeout(200)
            settled(page)
            link = page.get_by_role("link", name=name, exact=True)
            heading = page.get_by_role("heading", name=name, exact=True).first
            took.append(timed(link.click, page, lambda heading=heading: heading.wait_for(timeout=60_000)))
        found[f"to {name}"] = statistics.median(took)
    return found


def first_paint(browser: Browser, address: str, text: str) -> float:
    """Milliseconds from an address typed to its first words, in a new visitor's browser."""
    page = browser.new_context(viewport={"width": 1280, "height": 900}).new_page()
    begun = time.perf_counter()
    page.goto(address)
    page.get_by_text(text).first.wait_for(timeout=120_000)
    took = (time.perf_counter() - begun) * 1000
    page.context.close()
    return took


def visitor(browser: Browser, address: str, sent: list[int] | None = None) -> Page:
    page = browser.new_context(viewport={"width": 1280, "height": 900}).new_page()
    page.add_init_script(COUNT_RUNS)
    if sent is not None:
        page.on(
            "websocket",
            lambda socket: socket.on("framereceived", lambda frame: sent.append(len(frame))),
        )
    page.goto(address)
    page.locator("h1").first.wait_for(timeout=300_000)
    return page


def told(figures: dict[str, float]) -> None:
    for what, took in figures.items():
        print(f"{what:>40} {took:8.0f} ms", flush=True)


def main() -> None:
    """Prints medians in milliseconds, ratios beside them."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--edits", type=int, default=15)
    parser.add_argument("--large", action="store_true", help="open 100 x 10,000 and count what is sent")
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as name, sync_playwright() as playwright:
        folder = Path(name)
        place = folder / "records.sqlite"
        records = open_records(str(place))
        if given.large:
            week_id = create_week(records, read(wide_week(100, 10_000))).listed.id
        else:
            large = engine.read_week(sample_data.path(sample_data.LARGE_WEEK))
            week_id = create_week(records, large).listed.id
        records.close()
        browser = playwright.chromium.launch(
            executable_path=CHROMIUM, args=[*ARGUMENTS[:1], *ARGUMENTS[4:], *NO_GL]
        )
        process, address = desk(folder, place)
        try:
            if given.large:
                large_week(browser, f"{address}/?week={week_id}")
                return
            plain_process, plain_address = bare(folder)
            cold = first_paint(browser, address, "Figures"), first_paint(browser, plain_address, "Nothing")
            warm = first_paint(browser, address, "Figures"), first_paint(browser, plain_address, "Nothing")
            plain_process.terminate()
            for kind, (ours, theirs) in (("cold", cold), ("warm", warm)):
                times = f"{ours:.0f} ms, bare app {theirs:.0f} ms; {ours / theirs:.2f} times"
                print(f"first paint, {kind}: {times}", flush=True)
            page = visitor(browser, f"{address}/?week={week_id}")
            figures = edits(page, given.edits)
            told(figures)
            one, put_up, accepted = figures.values()
            print(f"put up {put_up / one:.2f} times, accepted {accepted / one:.2f} times a plain rerun")
            told(page_to_page(page))
        finally:
            browser.close()
            process.terminate()
            process.wait(20)
            os.sync()


def large_week(browser: Browser, address: str) -> None:
    """What a week of a million lanes sends to the browser, by page."""
    sent: list[int] = []
    page = visitor(browser, address, sent)
    settled(page)
    print(f"100 x 10,000 opened: {sum(sent) / 1e6:.1f} MB in {len(sent)} messages", flush=True)
    for name in ("Plan", "Reasons", "Hand over", "Weeks"):
        before, begun = sum(sent), time.perf_counter()
        page.get_by_role("link", name=name, exact=True).click()
        page.get_by_role("heading", name=name, exact=True).first.wait_for(timeout=300_000)
        page.wait_for_timeout(500)
        settled(page)
        took = time.perf_counter() - begun
        print(f"{name:>12}: {(sum(sent) - before) / 1e6:.1f} MB, {took:.1f} s", flush=True)


if __name__ == "__main__":
    main()
