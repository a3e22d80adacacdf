"""The log: kinds and places of faults, no figure and no name."""

import logging
import warnings

import pytest

from app.plain_log import PlainFormatter, _shown


@pytest.fixture
def lines(caplog: pytest.LogCaptureFixture) -> logging.Logger:
    found = logging.getLogger("test of the log")
    caplog.handler.setFormatter(PlainFormatter())
    return found


def test_a_fault_is_told_without_what_it_quotes(
    lines: logging.Logger, caplog: pytest.LogCaptureFixture
) -> None:
    try:
        try:
            raise KeyError("Quarry North sends 812.5 t")
        except KeyError as inner:
            raise ValueError("rate 17.25 of Aster") from inner
    except ValueError as fault:
        lines.error("it failed: %s", fault, exc_info=True)
        lines.error(f"it failed: {fault}", exc_info=fault)
        lines.error("it failed: %s", fault)
    for secret in ("Quarry", "812.5", "17.25", "Aster"):
        assert secret not in caplog.text
    assert "ValueError" in caplog.text
    assert "test_plain_log.py" in caplog.text


def test_a_warning_is_told_by_its_kind(caplog: pytest.LogCaptureFixture) -> None:
    _shown(UserWarning("Aster ordered 99"), UserWarning, "grid.py", 7)
    assert "Aster" not in caplog.text
    assert "UserWarning at grid.py:7" in caplog.text
    assert issubclass(UserWarning, Warning)
    assert warnings.showwarning is not _shown
