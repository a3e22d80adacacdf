"""One desk's state in one browser session: the list of changes, the plan it leads to, what was said."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import streamlit as st

import engine
from engine.changes import Change
from engine.findings import Finding, Severity, by_gravity
from engine.history import History
from engine.intake.numbers import NumberStyle
from engine.week import Refused, Week

KEY = "desk"


@dataclass
class Desk:
    """What a session holds. `generation` counts what makes the grids start afresh from the week."""

    history: History = field(default_factory=lambda: History.of(Week()))
    findings: tuple[Finding, ...] = ()
    decimal_mark: str = "."
    generation: int = 0
    message: tuple[str, str] | None = None
    planned_for: Week | None = None
    plan: engine.Plan | None = None
    stopped: tuple[Finding, ...] = ()
    kept: dict[str, Any] = field(default_factory=dict)
    started: bool = False

    @property
    def week(self) -> Week:
        return self.history.week

    @property
    def style(self) -> NumberStyle:
        """How this desk types numbers."""
        return NumberStyle(self.decimal_mark, self.week.rules.unit, self.week.rules.currency)

    def open(self, reading: engine.Reading) -> None:
        """Put the week that was read on the desk; the list of changes starts anew."""
        self.history = History.of(reading.week)
        self.findings = tuple(f for f in reading.findings if f.severity is not Severity.STOPS)
        self.decimal_mark = reading.style.decimal_mark
        self.kept.clear()
        self._start_afresh()

    def commit(self, change: Change, why: str = "") -> bool:
        """Make a change; False with a message where it does not fit the week."""
        try:
            self.history = self.history.after(change, why=why)
        except Refused as refused:
            self.message = ("error", str(refused))
            return False
        return True

    def undo(self) -> None:
        self.history = self.history.undo()
        self._start_afresh()

    def redo(self) -> None:
        self.history = self.history.redo()
        self._start_afresh()

    def settle(self, change: Change, why: str = "") -> tuple[Finding, ...]:
        """Make a change only if the week can still be planned; otherwise what stands in the way.

        The plan that was made to find out is kept, so it is not made twice.
        """
        try:
            week = self.week.apply(change)
        except Refused as refused:
            return (Finding(Severity.STOPS, "refused", str(refused)),)
        plan, stopped = try_plan(week, near=self.plan)
        if plan is None:
            return stopped
        self.history = self.history.after(change, why=why)
        self.planned_for, self.plan, self.stopped = self.week, plan, ()
        self._start_afresh()
        return ()

    def _start_afresh(self) -> None:
        self.generation += 1
        self.message = None

    def planned(self) -> engine.Plan | None:
        """The plan of the week as it stands, made when first asked for; None where it cannot be planned."""
        if self.planned_for is not self.week:
            self.planned_for = self.week
            self.plan, self.stopped = try_plan(self.week, near=self.plan)
        return self.plan


def desk() -> Desk:
    """This session's desk."""
    if KEY not in st.session_state:
        st.session_state[KEY] = Desk()
    found: Desk = st.session_state[KEY]
    return found


def try_plan(week: Week, near: engine.Plan | None) -> tuple[engine.Plan | None, tuple[Finding, ...]]:
    """The week's plan, or the findings that stop it."""
    try:
        return engine.plan_week(week, near=near), ()
    except engine.NotPlannable as stopped:
        return None, stopped.findings
    except engine.TooLarge as too_large:
        return None, (Finding(Severity.STOPS, "too large", str(too_large)),)


def read_files(files: Sequence[Any]) -> tuple[engine.Reading | None, tuple[Finding, ...]]:
    """What the uploaded files say, or the one finding that says why they cannot be read."""
    try:
        reading = engine.read_week(files)
    except engine.Unreadable as refused:
        return None, (refused.finding,)
    return reading, tuple(by_gravity(reading.findings))
