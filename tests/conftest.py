"""No test ever touches the records of whoever runs it."""

import os
from collections.abc import Iterator

import pytest


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
