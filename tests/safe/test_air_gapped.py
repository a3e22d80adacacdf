"""Nothing leaves the machine: not from any page in the browser, and not from the desk behind it.

The views of each page are gone through, and their requests recorded, in `test_attack_browser.py`.
"""

import os
from pathlib import Path
from urllib.parse import urlparse

import pytest
from playwright.sync_api import Browser
from streamlit import net_util
from websockets.exceptions import InvalidStatus
from websockets.sync.client import connect

from app import serve
from tests.browser.conftest import environment
from tests.browser.test_two_sessions import opened_sample
from tests.safe.conftest import Start
from tests.safe.test_attack_browser import settled

HERE = {"127.0.0.1", "localhost", "::1", "0.0.0.0", ""}
PAGES = ("Plan", "Reasons", "Compare", "Hand over", "Weeks", "Figures")


def test_no_page_and_no_process_asks_anybody_outside(
    start: Start, chromium: Browser, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    heard = tmp_path / "heard.txt"
    heard.touch()
    monkeypatch.setenv("OVERHEARD", str(heard))
    first = str(Path(__file__).parent / "overheard")
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join([first, environment()["PYTHONPATH"]]))
    desk = start()
    context = chromium.new_context(viewport={"width": 1280, "height": 900})
    asked: list[str] = []
    context.on("request", lambda request: asked.append(request.url))
    context.set_default_timeout(90_000)
    page = context.new_page()
    page.on("websocket", lambda socket: asked.append(socket.url))
    page.goto(desk)
    page.locator("h1").first.wait_for(timeout=60_000)
    opened_sample(page)
    for name in PAGES:
        page.get_by_role("link", name=name, exact=True).click()
        page.get_by_role("heading", name=name, exact=True).wait_for(timeout=60_000)
        settled(page)
    fonts = page.evaluate("() => [...document.fonts].filter(f => f.status === 'loaded').map(f => f.family)")
    context.close()
    assert fonts
    hosts = {urlparse(url).hostname for url in asked if not url.startswith(("data:", "blob:"))}
    assert len(asked) > 40
    assert hosts <= HERE, hosts
    with pytest.raises(InvalidStatus):  # a page from elsewhere: Streamlit would ask outside who we are
        connect(desk.replace("http", "ws") + "/_stcore/stream", origin="http://elsewhere.test").close()  # type: ignore[arg-type]
    told = [line for line in heard.read_text().splitlines() if line]
    outside = [line for line in told if line.split(" ", 1)[1].strip("'\"") not in HERE and "/" not in line]
    assert outside == []


def test_what_would_tell_or_ask_is_off(monkeypatch: pytest.MonkeyPatch) -> None:
    flags = serve.flags(1)
    assert flags["browser_gatherUsageStats"] is False
    assert flags["server_enableAgentApi"] is False
    assert flags["client_showErrorLinks"] == "false"
    assert flags["secrets_files"] == []
    for name in ("get_external_ip", "get_internal_ip"):
        monkeypatch.setattr(net_util, name, getattr(net_util, name))
    monkeypatch.setattr(serve, "keep_log_plain", lambda: None)
    serve.keep_inside()
    assert net_util.get_external_ip() is None
    assert net_util.get_internal_ip() is None


def test_the_package_names_no_host_outside() -> None:
    """Styles, settings and pages load nothing by address; XML names and the words of links aside."""
    folder = Path(serve.__file__).parent
    for file in folder.rglob("*"):
        if file.suffix in (".css", ".toml", ".html", ".js"):
            assert "://" not in file.read_text(encoding="utf-8"), file
