"""One desk's state in one browser session: the list of changes, the plan it leads to, what was said."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import streamlit as st

import engine
from app.drafts import Draft, opened, unread_in
from engine.changes import Change
from engine.findings import Finding, Severity, by_gravity
from engine.history import History
from engine.intake.frames import TABLES
from engine.intake.numbers import NumberStyle
from engine.week import Refused, Week

KEY = "desk"


@dataclass
class Desk:
    """What a session holds. `generation` counts what makes the grids start afresh from the week."""

    history: History = field(default_factory=lambda: History.of(Week()))
    read: tuple[Finding, ...] = ()
    decimal_mark: str = "."
    generation: int = 0
    uploads: int = 0
    message: tuple[str, str] | None = None
    drafts: dict[str, Draft] = field(default_factory=dict)
    planned_for: Week | None = None
    plan: engine.Plan | None = None
    stopped: tuple[Finding, ...] = ()
    started: bool = False

    @property
    def week(self) -> Week:
        return self.history.week

    @property
    def style(self) -> NumberStyle:
        """How this desk types numbers."""
        return NumberStyle(self.decimal_mark, self.week.rules.unit, self.week.rules.currency)

    def grid(self, table: str) -> Draft:
        return self.drafts.setdefault(table, Draft())

    def open(self, reading: engine.Reading) -> None:
        """Put the week that was read on the desk; the list of changes starts anew."""
        self.history = History.of(reading.week)
        self.decimal_mark = reading.style.decimal_mark
        self.drafts = {table: opened(self.week, table, reading.unused, self.style) for table in TABLES}
        again = {(f.rule, f.message) for f in engine.check_week(self.week)}
        in_grids = {f.read for draft in self.drafts.values() for f in draft.findings if f.read}
        self.read = tuple(
            f
            for f in reading.findings
            if (f.rule, f.message) not in again
            and not (f.severity is Severity.STOPS and f.read and f.read in in_grids)
        )
        self.uploads += 1
        self.generation += 1
        self.plan, self.planned_for, self.message = None, None, None

    def commit(self, change: Change, why: str = "") -> bool:
        """Make a change; False with a message where it does not fit the week."""
        try:
            self.history = self.history.after(change, why=why)
        except Refused as refused:
            self.start_afresh()
            self.message = ("error", str(refused))
            return False
        return True

    def settle(self, change: Change, why: str = "") -> tuple[Finding, ...]:
        """Make a change only if the week can still be planned; otherwise what stands in the way.

        The plan that was made to find out is kept, so it is not made twice.
        """
        try:
            history = self.history.after(change, why=why)
        except Refused as refused:
            return (Finding(Severity.STOPS, "refused", str(refused)),)
        plan, stopped = try_plan(history.week, near=self.plan)
        if plan is None:
            return stopped
        self.history, self.plan, self.planned_for, self.stopped = history, plan, history.week, ()
        self.start_afresh()
        return ()

    def undo(self) -> None:
        self.history = self.history.undo()
        self.start_afresh()

    def redo(self) -> None:
        self.history = self.history.redo()
        self.start_afresh()

    def start_afresh(self) -> None:
        """Let every grid show the week anew, with the texts that could not be read."""
        for table, draft in self.drafts.items():
            if draft.key:
                draft.unread = unread_in(draft, self.week, table)
        self.generation += 1

    def all_findings(self) -> list[Finding]:
        """What there is to say of the figures as they stand: cells of the grids, the week, the upload."""
        cells = [f for draft in self.drafts.values() for f in draft.findings]
        return by_gravity([*cells, *engine.check_week(self.week), *self.read])

    def planned(self) -> engine.Plan | None:
        """The plan of the week as it stands, made when first asked for; None where it cannot be planned."""
        cells = [finding for draft in self.drafts.values() for finding in draft.findings]
        stopping = [f for f in (*cells, *self.read) if f.severity is Severity.STOPS]
        if stopping:
            self.stopped, self.planned_for = tuple(stopping), None
            return None
        if self.planned_for is not self.week:
            plan, self.stopped = try_plan(self.week, near=self.plan)
            self.planned_for, self.plan = self.week, plan
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
