"""No test ever touches the records of whoever runs it; all that need a browser share one."""

import os
import shutil
from collections.abc import Iterator

import pytest
from hypothesis import settings
from playwright.sync_api import Browser, sync_playwright

# no test depends on how busy the machine is
settings.register_profile("unhurried", settings(), deadline=None)
settings.load_profile("unhurried")

CHROMIUM = shutil.which("chromium") or "/usr/bin/chromium"
ARGUMENTS = [
    "--no-sandbox",
    "--use-gl=angle",
    "--use-angle=swiftshader",
    "--enable-unsafe-swiftshader",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]


@pytest.fixture(scope="session")
def chromium() -> Iterator[Browser]:
    """One for the whole run: Playwright allows no second while one is open."""
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=CHROMIUM, args=ARGUMENTS)
        yield browser
        browser.close()


@pytest.fixture(scope="session", autouse=True)
def records_of_the_tests(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    """Whatever opens records without saying where finds them in a folder of this run."""
    before = os.environ.get("HITHE_RECORDS")
    os.environ["HITHE_RECORDS"] = str(tmp_path_factory.mktemp("records") / "records.sqlite")
    yield
    if before is None:
        del os.environ["HITHE_RECORDS"]
    else:
        os.environ["HITHE_RECORDS"] = before
