"""One desk's state in one browser session: the list of changes, the plan it leads to, what was said."""

from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import streamlit as st

import engine
from app.drafts import Draft, opened, renamed, unread_in
from app.kept import Kept
from app.search import Searching, longer, needs_search, search
from engine.changes import Change, SetHold, Together
from engine.findings import Finding, Severity, by_gravity
from engine.history import Entry, History
from engine.intake.answers import Answers
from engine.intake.build_lists import Unused
from engine.intake.earlier import Quantities
from engine.intake.frames import TABLES
from engine.intake.numbers import NumberStyle
from engine.planning.differences import Outcome, outcome
from engine.records import Clash, Issued, Missing, NotSaved
from engine.touch import touch_each_other
from engine.week import Refused, Week

KEY = "desk"


@dataclass
class Desk:
    """What a session holds. `generation` counts what makes the grids start afresh from the week.

    `kept` is where the week is in the records; `fresh` a week that was read and is not there yet, `unsaved`
    why not. `news` are changes of others that were not shown yet, `clashes` ours that touch theirs.
    `itself` stands for a desk whose week is not in the records, and for no other while anything names it.
    """

    history: History = field(default_factory=lambda: History.of(Week()))
    read: tuple[Finding, ...] = ()
    decimal_mark: str = "."
    pallet: Fraction | None = None
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
    who: str = ""
    kept: Kept | None = None
    fresh: engine.Reading | None = None
    unsaved: str = ""
    news: tuple[Entry, ...] = ()
    clashes: tuple[Clash, ...] = ()
    issued: Issued | None = None
    searching: Searching = field(default_factory=Searching)
    itself: object = field(default_factory=object)

    @property
    def week(self) -> Week:
        return self.history.week

    @property
    def style(self) -> NumberStyle:
        """How this desk types numbers."""
        return NumberStyle(self.decimal_mark, self.week.rules.unit, self.week.rules.currency, self.pallet)

    def grid(self, table: str) -> Draft:
        return self.drafts.setdefault(table, Draft())

    def open(self, reading: engine.Reading) -> None:
        """Put the week that was read on the desk; the list of changes starts anew."""
        self.pallet = reading.style.pallet
        self.show(History.of(reading.week), reading.style.decimal_mark, reading.lasting, reading.unused)
        self.fresh, self.kept = reading, None

    def show(
        self, history: History, mark: str, said: tuple[Finding, ...], unused: tuple[Unused, ...]
    ) -> None:
        """Put a week with its list of changes on the desk, in place of the one that was there."""
        self.history, self.decimal_mark, self.read = history, mark, said
        self.drafts = {table: opened(self.week, table, unused, self.style) for table in TABLES}
        self.uploads += 1
        self.generation += 1
        self.plan, self.planned_for, self.message = None, None, None
        self.proposal = self.proposed = None
        self.fresh, self.kept, self.unsaved, self.news, self.clashes = None, None, "", (), ()
        self.issued = None

    @property
    def only_reads(self) -> bool:
        """Whether the week was opened by its link for reading only."""
        return self.kept is not None and not self.kept.may_change

    @property
    def near(self) -> Quantities | None:
        """What later plans stay nearest to: the plan issued last, None before the first."""
        return None if self.issued is None else self.issued.quantities

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
        self.proposed = outcome(plan, change, self.near)

    def propose_more(self, change: Change) -> None:
        """Put up a change on top of what is already proposed."""
        first = () if self.proposal is None else (self.proposal,)
        self.propose(change if not first else Together((*first, change)))

    def accept(self, why: str = "") -> None:
        """Make the proposed change."""
        if self.proposal is None or self.proposed is None:
            return
        change, proposed, made = self.proposal, self.proposed, len(self.history.entries)
        self.proposal = self.proposed = None
        if self.commit(reasoned(change, why), why):
            alone = len(self.history.entries) == made + 1
            if proposed.plan is not None and alone and reasoned(change, why) == change:
                self.planned_for, self.plan, self.stopped = self.week, proposed.plan, ()
                if proposed.plan.whole is not None and not proposed.plan.proof.exact:
                    self.search_on()
            self.start_afresh()

    def take_back(self) -> None:
        """Drop what is proposed; the grids show the week as it stands."""
        self.proposal = self.proposed = None
        self.start_afresh()

    def commit(self, change: Change, why: str = "") -> bool:
        """Make a change; False with a message where it does not fit the week or cannot be saved."""
        return self.make(lambda history: history.after(change, self.who, why))

    def undo(self) -> None:
        """Take back the latest change of this desk that stands."""
        if self.make(lambda history: history.undo(self.who, by=self.who)):
            self.start_afresh()

    def redo(self) -> None:
        """Make again what this desk took back last."""
        if self.make(lambda history: history.redo(self.who, by=self.who)):
            self.start_afresh()

    def make(self, act: Callable[[History], History]) -> bool:
        """Lengthen the list of changes; True once it is on disk.

        False with a message where it does not fit the week or cannot be saved, and False with `clashes` where
        others changed the same figures meanwhile.
        """
        try:
            history = act(self.history)
            if self.kept is None:
                self.history = history
                return True
            merged = self.kept.take(history)
        except (Refused, NotSaved, Missing) as failure:
            self.start_afresh()
            self.message = ("error", str(failure))
            return False
        self.history, self.clashes = merged.history, merged.clashes
        if merged.theirs:
            self.hear(merged.theirs)
        return not merged.clashes

    def hear(self, theirs: tuple[Entry, ...]) -> None:
        """Take note of changes that others made; what is proposed is worked out anew, or asked about."""
        self.news += theirs
        self.start_afresh()
        if self.proposal is None:
            return
        touching = tuple(entry for entry in theirs if touch_each_other(self.proposal, entry.change))
        if touching:
            mine = Entry(self.proposal, Together(()), self.who)
            self.clashes += (Clash(mine, touching, "They changed the same figures before you did."),)
            self.proposal = self.proposed = None
        elif self.planned() is None:  # a proposal is never made without being asked for
            self.proposal = self.proposed = None
            self.message = ("error", "The week cannot be planned any more, so what you proposed was left.")
        else:
            self.propose(self.proposal)

    def unread_texts(self) -> list[tuple[Unused, ...]]:
        """The texts on the desk that are not in the week, by table."""
        return [
            unread_in(draft, self.week, table) if draft.key else draft.unread
            for table, draft in self.drafts.items()
        ]

    def start_afresh(self) -> None:
        """Let every grid show the week anew, with the texts that could not be read."""
        for table, draft in self.drafts.items():
            if draft.key:
                draft.unread = unread_in(draft, self.working, table)
        self.generation += 1

    def start_others_afresh(self, edited: str, changes: Sequence[Change]) -> None:
        """Let the grids of the other tables show the week anew: changes are about to alter names in them."""
        for table, draft in self.drafts.items():
            if draft.key and table != edited:
                draft.unread = renamed(unread_in(draft, self.working, table), changes)
                draft.again += 1

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
            plan, self.stopped = _tried(lambda: self._plan_of(self.week))
            self.planned_for, self.plan = self.week, plan
        return self.plan

    def _plan_of(self, week: Week) -> engine.Plan:
        if needs_search(week):
            return search(self.searching, self.search_key, len(self.history.entries), week, self.plan)
        self.searching.job = None
        return engine.plan_week(week, near=self.near or self.plan)

    @property
    def search_key(self) -> Hashable:
        """What a search for this desk goes by: the week in the records, so that every tab finds it."""
        return self.itself if self.kept is None else self.kept.week_id

    def take_best(self) -> None:
        """Show the best plan that the search has come to."""
        job = self.searching.job
        if job is not None and self.planned_for is self.week:
            self.plan = job.so_far()
            self.start_afresh()

    def search_on(self) -> None:
        """Search on from the plan on screen, for the time that the desk gives."""
        if self.plan is not None and self.planned_for is self.week:
            longer(self.searching, self.search_key, len(self.history.entries), self.plan)


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


def try_plan(
    week: Week, near: engine.Plan | Quantities | None
) -> tuple[engine.Plan | None, tuple[Finding, ...]]:
    """The week's plan, made at once, or the findings that stop it."""
    return _tried(lambda: engine.plan_week(week, near=near))


def _tried(make: Callable[[], engine.Plan]) -> tuple[engine.Plan | None, tuple[Finding, ...]]:
    """What is made, or the findings that stop it."""
    try:
        return make(), ()
    except engine.NotPlannable as stopped:
        return None, stopped.findings
    except engine.TooLarge as too_large:
        return None, (Finding(Severity.STOPS, "too large", str(too_large)),)


def read_files(
    files: Sequence[Any], answers: Answers | None = None, product: str | None = None
) -> tuple[engine.Reading | None, tuple[Finding, ...]]:
    """What the uploaded files say, or the one finding that says why they cannot be read."""
    try:
        reading = engine.read_week(files, answers=answers, product=product)
    except engine.Unreadable as refused:
        return None, (refused.finding,)
    return reading, tuple(by_gravity(reading.findings))
