"""One desk's state in one browser session: the list of changes, the plan it leads to, what was said."""

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

import streamlit as st

import engine
from app.drafts import Draft, opened, unread_in
from engine.changes import Change, SetHold, Together
from engine.findings import Finding, Severity, by_gravity
from engine.history import History
from engine.intake.frames import TABLES
from engine.intake.numbers import NumberStyle
from engine.planning.differences import Outcome, outcome
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
    proposal: Change | None = None
    proposed: Outcome | None = None

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
        self.read = reading.lasting
        self.uploads += 1
        self.generation += 1
        self.plan, self.planned_for, self.message = None, None, None
        self.proposal = self.proposed = None

    @property
    def working(self) -> Week:
        """The week with what is proposed: what the grids of figures show."""
        return self.proposed.week if self.proposed is not None else self.week

    def propose(self, change: Change) -> None:
        """Put a change up for acceptance, its price beside it; without a plan it is made at once.

        The plan of the outcome is kept, so that accepting plans nothing twice.
        """
        plan = self.planned()
        if plan is None:
            self.commit(change)
            return
        self.proposal = change
        self.proposed = outcome(plan, change)

    def propose_more(self, change: Change) -> None:
        """Put up a change on top of what is already proposed."""
        first = () if self.proposal is None else (self.proposal,)
        self.propose(change if not first else Together((*first, change)))

    def accept(self, why: str = "") -> None:
        """Make the proposed change."""
        if self.proposal is None or self.proposed is None:
            return
        change, proposed = self.proposal, self.proposed
        self.proposal = self.proposed = None
        if self.commit(reasoned(change, why), why):
            if proposed.plan is not None and not why:
                self.planned_for, self.plan, self.stopped = self.week, proposed.plan, ()
            self.start_afresh()

    def take_back(self) -> None:
        """Drop what is proposed; the grids show the week as it stands."""
        self.proposal = self.proposed = None
        self.start_afresh()

    def commit(self, change: Change, why: str = "") -> bool:
        """Make a change; False with a message where it does not fit the week."""
        try:
            self.history = self.history.after(change, why=why)
        except Refused as refused:
            self.start_afresh()
            self.message = ("error", str(refused))
            return False
        return True

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
        return by_gravity([*cells, *engine.check_week(self.working), *self.read])

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


def reasoned(change: Change, why: str) -> Change:
    """The change with a reason on its holds that have none."""
    if isinstance(change, SetHold) and not change.reason:
        return SetHold(change.key, change.quantity, why)
    if isinstance(change, Together):
        return Together(tuple(reasoned(one, why) for one in change.changes), change.note)
    return change


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
