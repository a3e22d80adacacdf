"""A real desk on a free port, and a real browser that records every request."""

import os
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page, Request


def free_port() -> int:
    with socket.socket() as found:
        found.bind(("127.0.0.1", 0))
        return int(found.getsockname()[1])


def wait_until_open(address: str, desk: subprocess.Popen[bytes], seconds: float = 60) -> None:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if desk.poll() is not None:
            raise RuntimeError(f"The desk ended with status {desk.returncode} before it opened.")
        try:
            with urllib.request.urlopen(f"{address}/_stcore/health", timeout=2):
                return
        except (urllib.error.URLError, OSError):
            time.sleep(0.1)
    raise RuntimeError("The desk did not open in time.")


@pytest.fixture(scope="session")
def desk(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The address of a desk that was started from another folder."""
    port = free_port()
    folder = tmp_path_factory.mktemp("elsewhere")
    with (folder / "desk.log").open("wb") as log:
        command = [sys.executable, "-m", "app.command", "desk", "--no-browser", "--port", str(port)]
        desk = subprocess.Popen(command, cwd=folder, stdout=log, stderr=log, env=environment())
        address = f"http://127.0.0.1:{port}"
        try:
            wait_until_open(address, desk)
            yield address
        finally:
            desk.terminate()
            desk.wait(20)


def environment() -> dict[str, str]:
    """The environment, with this checkout importable from anywhere."""
    root = str(Path(__file__).parents[2])
    return {**os.environ, "PYTHONPATH": os.pathsep.join([root, os.environ.get("PYTHONPATH", "")])}


@pytest.fixture
def requests() -> list[str]:
    return []


@pytest.fixture
def page(chromium: Browser, desk: str, requests: list[str]) -> Iterator[Page]:
    """A new visitor's page on the desk; a traceback on it fails the test."""
    context = chromium.new_context(viewport={"width": 1280, "height": 900}, accept_downloads=True)
    page = context.new_page()

    def note(request: Request) -> None:
        requests.append(request.url)

    page.on("request", note)
    page.goto(desk)
    page.get_by_role("heading", name="Figures", exact=True).wait_for(timeout=60_000)
    yield page
    assert page.locator('[data-testid="stException"]').count() == 0
    context.close()
