"""The list of changes under every order of acts: what is in memory, on disk and replayed are one week."""

from contextlib import suppress
from typing import Any

from hypothesis import HealthCheck, settings
from hypothesis import strategies as st
from hypothesis.stateful import (
    RuleBasedStateMachine,
    invariant,
    precondition,
    rule,
    run_state_machine_as_test,
)

from engine.records import Records, caught_up, changes_since, create_week, open_week, save
from engine.week import Refused, Week
from tests.records.making import a_change, read, small_week

SETTINGS = settings(
    max_examples=25, stateful_step_count=25, deadline=None, suppress_health_check=list(HealthCheck)
)
PEOPLE = ("Ann", "Ben")


class TwoDesks(RuleBasedStateMachine):
    """Two people change one week, save when they like, and look at what the other did."""

    records: Records

    def __init__(self) -> None:
        super().__init__()
        opened = create_week(self.records, read(small_week()))
        self.week_id = opened.listed.id
        self.lists = dict.fromkeys(PEOPLE, opened.history)
        self.saved = dict.fromkeys(PEOPLE, 0)
        self.step = 0
        self.acknowledged = 0

    @rule(who=st.sampled_from(PEOPLE), data=st.data())
    def change(self, who: str, data: st.DataObject) -> None:
        self.step += 1
        pick: Any = lambda options: data.draw(st.sampled_from(options))  # noqa: E731
        history = self.lists[who]
        change = a_change(history.week, pick, self.step)
        after = history.after(change, who, "a reason")
        assert after.week.apply(after.entries[-1].inverse) == history.week
        self.lists[who] = after

    @rule(who=st.sampled_from(PEOPLE), by_anybody=st.booleans())
    def undo(self, who: str, by_anybody: bool) -> None:
        self._try(who, lambda history: history.undo(who, by=None if by_anybody else who))

    @rule(who=st.sampled_from(PEOPLE), by_anybody=st.booleans())
    def redo(self, who: str, by_anybody: bool) -> None:
        self._try(who, lambda history: history.redo(who, by=None if by_anybody else who))

    @rule(who=st.sampled_from(PEOPLE), data=st.data())
    def revert(self, who: str, data: st.DataObject) -> None:
        history = self.lists[who]
        position = data.draw(st.integers(0, max(0, len(history.entries) - 1)))
        before = None if not history.entries else history.in_force(position)
        self._try(who, lambda history: history.reverted(position, who))
        if self.lists[who] is not history:
            assert before
            assert not self.lists[who].in_force(position)

    @rule(who=st.sampled_from(PEOPLE), data=st.data())
    def back(self, who: str, data: st.DataObject) -> None:
        history = self.lists[who]
        version = data.draw(st.integers(0, len(history.entries)))
        self._try(who, lambda history: history.back_to(version, who))
        if self.lists[who] is not history:
            assert self.lists[who].week == history.at(version)

    @rule(who=st.sampled_from(PEOPLE))
    def save(self, who: str) -> None:
        before = self.lists[who]
        outcome = save(self.records, self.week_id, before, self.saved[who])
        fresh = len(before.entries) - self.saved[who]
        kept = fresh - len(outcome.clashes) - len(outcome.agreed)
        assert len(outcome.history.entries) == self.saved[who] + len(outcome.theirs) + kept
        self.lists[who] = outcome.history
        self.saved[who] = len(outcome.history.entries)
        self.acknowledged += kept

    @precondition(lambda self: any(len(self.lists[who].entries) == self.saved[who] for who in PEOPLE))
    @rule()
    def look(self) -> None:
        for who in PEOPLE:
            if len(self.lists[who].entries) == self.saved[who]:
                made = changes_since(self.records, self.week_id, self.saved[who])
                self.lists[who] = caught_up(self.lists[who], made)
                self.saved[who] = len(self.lists[who].entries)

    @invariant()
    def what_is_in_memory_is_what_replaying_gives(self) -> None:
        for history in self.lists.values():
            week: Week = history.uploaded
            for entry in history.entries:
                week = week.apply(entry.change)
            assert week == history.week
            version = len(history.entries) // 2
            assert history.figures_at(version) == history.at(version)

    @invariant()
    def what_is_on_disk_is_what_was_acknowledged(self) -> None:
        stored = open_week(self.records, self.week_id).history
        assert len(stored.entries) == self.acknowledged
        for who, history in self.lists.items():
            assert stored.entries[: self.saved[who]] == history.entries[: self.saved[who]]

    def _try(self, who: str, act: Any) -> None:
        """An act that may be refused; a refusal changes nothing."""
        history = self.lists[who]
        with suppress(Refused):
            self.lists[who] = act(history)


def test_memory_disk_and_replay_are_one_week(records: Records) -> None:
    machine = type("Machine", (TwoDesks,), {"records": records})
    run_state_machine_as_test(machine, settings=SETTINGS)
