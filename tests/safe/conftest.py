"""Desks of these tests, each with a sign-in service or without, in a folder of its own."""

import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from tests.browser.conftest import environment, free_port, wait_until_open
from tests.browser.test_two_sessions import visit
from tests.safe.provider import CLIENT, SECRET, Provider

__all__ = ["visit"]

Start = Callable[..., str]


@pytest.fixture(scope="session")
def provider() -> Iterator[Provider]:
    found = Provider()
    found.people = {
        "ann@hithe.test": {"name": "Ann Reed"},
        "ben@hithe.test": {"name": "Ben <b>Moss</b>", "groups": ["readers"]},
        "cleo@hithe.test": {"name": "Cleo"},
        "dora@hithe.test": {"name": "Dora"},
        "eve@hithe.test": {"name": "Eve"},
        "old@hithe.test": {"name": "Old", "iat": 1_500_000_000},
        "ann@hithe.test ": {"name": "Nearly Ann", "email": "ann@hithe.test", "email_verified": False},
    }
    yield found
    found.close()


def sign_in_file(folder: Path, provider: Provider, port: int, more: str = "") -> Path:
    """The file that the README shows, for the test's service: two desks, an administrator and a reader."""
    file = folder / "sign_in.toml"
    file.write_text(
        f'''
[provider]
server_metadata_url = "{provider.metadata_url}"
client_id = "{CLIENT}"
client_secret = "{SECRET}"
redirect_uri = "http://localhost:{port}/oauth2callback"
{more}
[roles]
administrator = ["cleo@hithe.test"]
dispatcher = ["Ann@hithe.test", "dora@hithe.test", "old@hithe.test"]
manager = ["group:readers"]

[desks]
North = ["ann@hithe.test", "group:readers", "old@hithe.test"]
South = ["dora@hithe.test"]
''',
        encoding="utf-8",
    )
    file.chmod(0o600)
    return file


@pytest.fixture
def start(tmp_path: Path) -> Iterator[Start]:
    """Starts a desk with these options; its address, under the name that the sign-in service knows."""
    begun = []

    def started(*options: str, port: int | None = None) -> str:
        port = port or free_port()
        command = [sys.executable, "-m", "app.command", "desk", "--no-browser", "--port", str(port), *options]
        log = (tmp_path / "desk.log").open("ab")
        place = {"HITHE_RECORDS": str(tmp_path / "records.sqlite")}
        desk = subprocess.Popen(command, cwd=tmp_path, stdout=log, stderr=log, env={**environment(), **place})
        begun.append((desk, log))
        wait_until_open(f"http://127.0.0.1:{port}", desk)
        return f"http://localhost:{port}"

    yield started
    for desk, log in begun:
        desk.terminate()
        desk.wait(20)
        log.close()
