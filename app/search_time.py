"""How long a search by whole loads may take on this desk: chosen once, kept like its answers."""

from contextlib import suppress

from app.access import answers, learn
from app.search import Searching
from engine.findings import Finding, Severity
from engine.planning.planner import USUAL_SECONDS
from engine.records import NotSaved
from engine.week import Refused

TIMES = (10.0, 30.0, 60.0, 120.0, 300.0, 900.0, 3600.0)
"""What a desk can choose from."""


def longer_times(seconds: float) -> list[float]:
    """The times to choose from, with the one that the desk has."""
    return sorted({*TIMES, seconds})


def said_seconds(seconds: float) -> str:
    """A time in words: 30 s, 2 min, 1 h."""
    if seconds >= 3600 and seconds % 3600 == 0:
        return f"{seconds / 3600:.0f} h"
    return f"{seconds / 60:.0f} min" if seconds >= 60 and seconds % 60 == 0 else f"{seconds:.0f} s"


_SETTING = Finding(Severity.NOTE, "setting", "", subject="seconds for a search")


def seconds_of_desk() -> float:
    """How long a search may take on this desk; the usual time where nobody chose another."""
    said = answers().to(_SETTING.rule, _SETTING.subject)
    try:
        return USUAL_SECONDS if said is None else float(said)
    except ValueError:
        return USUAL_SECONDS


def remember_seconds(searching: Searching, seconds: float) -> None:
    """Let searches of this desk take so long, from now on."""
    searching.seconds = seconds
    with suppress(NotSaved, Refused):  # the time holds for this session all the same
        before = answers()
        learn(before.with_answer(_SETTING, f"{seconds:g}"), before)
