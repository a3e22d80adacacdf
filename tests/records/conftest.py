"""Records for tests: always in a folder of the test or in a private PostgreSQL, never the user's own."""

import os
import shutil
import subprocess
import tempfile
import uuid
from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import create_engine, make_url, text

from engine.records import Records, open_records

SCRIPT = Path(__file__).parents[2] / ".ci" / "postgres"
VARIABLE = "HITHE_TEST_POSTGRES"
BOTH = ("sqlite", "postgresql")


@pytest.fixture(autouse=True)
def nobodys_records(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setenv("HITHE_RECORDS", str(tmp_path / "default.sqlite"))


@pytest.fixture(scope="session")
def postgres_server() -> Iterator[str]:
    """The URL of a PostgreSQL server: the one that the environment names, or one started for these tests."""
    given = os.environ.get(VARIABLE)
    if given:
        yield given
        return
    above = tempfile.mkdtemp(prefix="hithe-postgres-")
    Path(above).chmod(0o755)
    folder = f"{above}/cluster"
    started = subprocess.run([str(SCRIPT), folder], capture_output=True, text=True, check=False)
    try:
        assert started.returncode == 0, started.stderr.strip()
        yield started.stdout.strip().partition("=")[2]
    finally:
        subprocess.run([str(SCRIPT), "--stop", folder], capture_output=True, check=False)
        shutil.rmtree(above, ignore_errors=True)


@pytest.fixture
def postgres_place(postgres_server: str) -> Iterator[str]:
    """The URL of an empty database."""
    name = f"t{uuid.uuid4().hex}"
    server = create_engine(
        make_url(postgres_server).set(drivername="postgresql+psycopg"), isolation_level="AUTOCOMMIT"
    )
    with server.connect() as connection:
        connection.execute(text(f"CREATE DATABASE {name}"))
    yield str(make_url(postgres_server).set(database=name))
    with server.connect() as connection:
        connection.execute(text(f"DROP DATABASE {name} WITH (FORCE)"))
    server.dispose()


@pytest.fixture(params=BOTH)
def place(request: pytest.FixtureRequest, tmp_path: Path) -> str:
    """Where records may be made: once a file, once a database."""
    if request.param == "sqlite":
        return str(tmp_path / "records.sqlite")
    found: str = request.getfixturevalue("postgres_place")
    return found


@pytest.fixture
def records(place: str) -> Iterator[Records]:
    opened = open_records(place)
    yield opened
    opened.close()
