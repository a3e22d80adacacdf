"""Two people, a refresh, and a server that is killed, in a real browser: nothing that was made is lost."""

import os
import re
import signal
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page, expect

import sample_data
from engine.records import list_weeks, open_records, open_week
from tests.browser.conftest import environment, free_port, wait_until_open
from tests.browser.grids import column_of, text_of, type_into

CHARGE = "Charge if unsent"
Visit = Callable[[str], Page]


class Server:
    """A desk that can be killed and started again on the same records and the same port."""

    def __init__(self, folder: Path) -> None:
        self.place = folder / "records.sqlite"
        self.folder = folder
        self.port = free_port()
        self.address = f"http://127.0.0.1:{self.port}"
        self.start()

    def start(self) -> None:
        command = [sys.executable, "-m", "app.command", "desk", "--no-browser", "--port", str(self.port)]
        with (self.folder / "desk.log").open("ab") as log:
            self.process = subprocess.Popen(
                command,
                cwd=self.folder,
                stdout=log,
                stderr=log,
                env={**environment(), "HITHE_RECORDS": str(self.place)},
            )
        wait_until_open(self.address, self.process)

    def kill(self) -> None:
        os.kill(self.process.pid, signal.SIGKILL)
        self.process.wait(20)


@pytest.fixture
def server(tmp_path: Path) -> Iterator[Server]:
    found = Server(tmp_path)
    yield found
    found.kill()


@pytest.fixture
def visit(chromium: Browser) -> Iterator[Visit]:
    """Opens an address as a visitor of their own; a traceback on any page fails the test."""
    contexts = []

    def opened(address: str) -> Page:
        context = chromium.new_context(viewport={"width": 1280, "height": 900})
        contexts.append((context, page := context.new_page()))
        page.goto(address)
        page.locator("h1").first.wait_for(timeout=60_000)
        return page

    yield opened
    for context, page in contexts:
        assert page.locator('[data-testid="stException"]').count() == 0
        context.close()


def opened_sample(page: Page) -> str:
    """Opens the sample week; its id, from the address."""
    page.locator('input[type="file"]').first.set_input_files(str(sample_data.path(sample_data.SMALL_WEEK)))
    page.get_by_text("6 depots, 48 customers, 352 rates").wait_for(timeout=30_000)
    page.wait_for_url(re.compile(r"week=[\w-]{20,}"), timeout=30_000)
    found = re.search(r"week=([\w-]{20,})", page.url)
    assert found is not None
    return found.group(1)


def type_depot(page: Page, row: int, heading: str, text: str) -> None:
    """Types into the grid of depots."""
    grid = page.locator('[data-testid="stDataFrame"]:visible').first
    grid.wait_for(timeout=30_000)
    type_into(page, grid, column_of(grid, heading), row, text)


def edit_depot(page: Page, row: int, heading: str, text: str) -> None:
    """Types into the grid of depots and makes the change that is put up."""
    type_depot(page, row, heading, text)
    accept = page.get_by_role("button", name=re.compile("Make the change|Make it all the same"))
    expect(accept).to_have_count(1, timeout=30_000)
    accept.click(timeout=30_000)
    expect(accept).to_have_count(0, timeout=30_000)


def charge(page: Page, row: int) -> str:
    grid = page.locator('[data-testid="stDataFrame"]:visible').first
    grid.wait_for(timeout=30_000)
    return text_of(grid, column_of(grid, CHARGE), row)


def test_a_refresh_a_second_tab_and_a_killed_server_lose_nothing(server: Server, visit: Visit) -> None:
    page = visit(server.address)
    week = opened_sample(page)
    edit_depot(page, 0, CHARGE, "3")
    page.get_by_text("1 change since it was opened").wait_for(timeout=30_000)
    records = open_records(server.place)
    (entry,) = open_week(records, week).history.entries
    assert entry.change.value == 3  # type: ignore[union-attr]

    page.reload()
    page.get_by_text("1 change since it was opened").wait_for(timeout=60_000)
    assert charge(page, 0) == "3"
    second = visit(page.url)
    second.get_by_text("1 change since it was opened").wait_for(timeout=60_000)

    server.kill()
    server.start()
    page.goto(page.url)
    page.get_by_text("1 change since it was opened").wait_for(timeout=60_000)
    assert charge(page, 0) == "3"
    page.get_by_role("button", name="Undo").click()
    page.get_by_text("2 changes since it was opened").wait_for(timeout=30_000)
    assert len(open_week(records, week).history.entries) == 2
    assert [listed.id for listed in list_weeks(records)] == [week]
    records.close()


def test_two_people_see_merge_and_are_asked(server: Server, visit: Visit) -> None:
    ann = visit(server.address)
    week = opened_sample(ann)
    ben = visit(f"{server.address}/?week={week}")
    ben.get_by_text("as it was opened").wait_for(timeout=60_000)

    edit_depot(ann, 0, CHARGE, "3")
    ben.get_by_text("Somebody else has changed this week").wait_for(timeout=30_000)
    edit_depot(ben, 1, CHARGE, "4")  # touches nothing of hers: both stand
    ben.get_by_text("2 changes since it was opened").wait_for(timeout=30_000)
    ann.get_by_role("button", name="Show it").click(timeout=30_000)
    ann.get_by_text("2 changes since it was opened").wait_for(timeout=30_000)
    expect(ann.get_by_text("Charge if unsent set to 4")).to_be_visible(timeout=30_000)
    assert (charge(ann, 0), charge(ann, 1)) == ("3", "4")

    edit_depot(ben, 2, CHARGE, "5")
    type_depot(ann, 2, CHARGE, "6")  # the same figure: hers is not made, and she is asked
    expect(ann.get_by_text("Yours: ")).to_be_visible(timeout=30_000)
    records = open_records(server.place)
    assert [e.change.value for e in open_week(records, week).history.entries] == [3, 4, 5]  # type: ignore[union-attr]
    ann.get_by_role("button", name="Make mine").click()
    ann.get_by_text("4 changes since it was opened").wait_for(timeout=30_000)
    assert open_week(records, week).history.entries[-1].change.value == 6  # type: ignore[union-attr]

    reader = visit(f"{server.address}/?read={open_week(records, week).listed.read_id}")
    reader.get_by_text("for reading only").wait_for(timeout=60_000)
    assert reader.get_by_role("link", name="Figures").count() == 0
    edit_depot(ben, 3, CHARGE, "7")
    reader.get_by_text("5 changes since it was opened").wait_for(timeout=30_000)
    records.close()
