"""The list of changes: the uploaded week, and every change since with who made it, when and why.

The list only grows. Undoing appends the reverting change, so that everybody who follows the list sees
the same thing, and what was done can always be read. An entry, its undoing, the undoing of that and so
on are a chain: what the first of them did is in force while their number is odd.
"""

from dataclasses import dataclass, replace
from datetime import UTC, datetime
from functools import cached_property

from engine.changes import Change, Together
from engine.touch import Touched, touched
from engine.week import Refused, Week


@dataclass(frozen=True, slots=True)
class Entry:
    """One change in the list. `undoes` is the position of the entry that this one reverts."""

    change: Change
    inverse: Change
    who: str = ""
    when: datetime | None = None
    why: str = ""
    undoes: int | None = None


@dataclass(frozen=True)
class History:
    """A week as uploaded, the changes since, and the week that they lead to."""

    uploaded: Week
    week: Week
    entries: tuple[Entry, ...] = ()

    @classmethod
    def of(cls, week: Week) -> "History":
        return cls(week, week)

    def after(self, change: Change, who: str = "", why: str = "") -> "History":
        """The list with one more change.

        Raises:
            Refused: the change does not fit the week; the list is as it was.
        """
        return self.grown(change, who, datetime.now(UTC), why)

    def grown(
        self, change: Change, who: str, when: datetime | None, why: str = "", undoes: int | None = None
    ) -> "History":
        """The list with one more entry, all said of it, as when it is read back.

        Raises:
            Refused: the change does not fit the week; the list is as it was.
        """
        entry = Entry(change, self.week.inverse(change), who, when, why, undoes)
        return replace(self, week=self.week.apply(change), entries=(*self.entries, entry))

    @property
    def can_undo(self) -> int | None:
        """The position of the entry that undo would revert, None where there is nothing left."""
        return self.undoable()

    @property
    def can_redo(self) -> int | None:
        """The position of the entry whose reverting redo would revert, None where there is none."""
        return self.redoable()

    def undoable(self, by: str | None = None) -> int | None:
        """The latest entry in force, of one person or (None) of anybody; None where there is none."""
        ends = (chain[-1] for chain in self._chains if len(chain) % 2)
        return max((end for end in ends if by in (None, self.entries[end].who)), default=None)

    def redoable(self, by: str | None = None) -> int | None:
        """The latest undoing that can be undone: no new change was made since, by that person or anybody."""
        found = (chain[-1] for chain in self._chains if not len(chain) % 2)
        end = max((end for end in found if by in (None, self.entries[end].who)), default=None)
        if end is None:
            return None
        since = self.entries[end + 1 :]
        fresh = any(entry.undoes is None and by in (None, entry.who) for entry in since)
        return None if fresh else end

    def undo(self, who: str = "", by: str | None = None) -> "History":
        """The list with the latest change that still stands reverted, of one person or of anybody.

        Raises:
            Refused: there is none, or something that was changed since rests on it.
        """
        position = self.undoable(by)
        if position is None:
            raise Refused("There is nothing to undo.")
        return self.reverted(position, who)

    def redo(self, who: str = "", by: str | None = None) -> "History":
        """The list with the latest undoing reverted, as long as nothing else was changed after it."""
        position = self.redoable(by)
        if position is None:
            raise Refused("There is nothing to redo.")
        return self.reverted(position, who)

    def in_force(self, position: int) -> bool:
        """Whether what the entry at a position did still stands."""
        chain = self._chains[self._chain_of[position]]
        return bool((len(chain) - chain.index(position)) % 2)

    def resting_on(self, position: int) -> list[int]:
        """Entries made after the one at a position, and not taken back since, that touch what it did.

        While there are any, the entry cannot be reverted.
        """
        number = self._chain_of[position]
        end = self._chains[number][-1]
        mine = self._touched(end)
        later = (
            chain[-1]
            for other, chain in enumerate(self._chains)
            if other != number and sum(one > end for one in chain) % 2
        )
        return [one for one in sorted(later) if mine.meets(self._touched(one))]

    def reverted(self, position: int, who: str = "", why: str = "") -> "History":
        """The list with the entry at a position undone, wherever it stands; an undoing is made good.

        Raises:
            Refused: it is undone already, or a later change that stands rests on it.
        """
        if not 0 <= position < len(self.entries):
            raise Refused(f"There is no change number {position + 1} in the list.")
        if not self.in_force(position):
            raise Refused(f"Change {position + 1} is undone already.")
        resting = self.resting_on(position)
        if resting:
            numbers = ", ".join(str(one + 1) for one in resting[:5])
            more = f" and {len(resting) - 5} more" if len(resting) > 5 else ""
            raise Refused(
                f"Change {position + 1} cannot be undone by itself: change {numbers}{more} was made after it "
                f"to the same figures. Undo that first."
            )
        end = self._chains[self._chain_of[position]][-1]
        return self.grown(self.entries[end].inverse, who, datetime.now(UTC), why, end)

    def at(self, version: int) -> Week:
        """The week as it was after the first `version` changes."""
        week = self.uploaded
        for entry in self.entries[:version]:
            week = week.apply(entry.change)
        return week

    def figures_at(self, version: int) -> Week:
        """A week with the same figures as `at`, by stepping back: quicker for what was a moment ago.

        Rate rows that were added since are taken out in it, and not as if they had never been: a row of their
        kind that is added to it is counted otherwise. Read it, and build nothing on it.
        """
        week = self.week
        for entry in reversed(self.entries[version:]):
            week = week.apply(entry.inverse)
        return week

    def back_to(self, version: int, who: str = "", why: str = "") -> "History":
        """The list with one grouped change that makes the week what it was after `version` changes.

        Raises:
            Refused: there is no such version, or the week is that one.
        """
        if not 0 <= version < len(self.entries):
            raise Refused(f"There is no earlier version {version} of this week.")
        back = tuple(entry.inverse for entry in reversed(self.entries[version:]))
        return self.after(Together(back, f"Back to version {version}"), who, why)

    @cached_property
    def _chains(self) -> list[list[int]]:
        """Positions of each change and of what undid and redid it, in order of the first."""
        chains: list[list[int]] = []
        number: dict[int, int] = {}
        for position, entry in enumerate(self.entries):
            if entry.undoes is None:
                number[position] = len(chains)
                chains.append([position])
            else:
                number[position] = number[entry.undoes]
                chains[number[position]].append(position)
        return chains

    @cached_property
    def _chain_of(self) -> dict[int, int]:
        return {position: number for number, chain in enumerate(self._chains) for position in chain}

    def _touched(self, position: int) -> Touched:
        entry = self.entries[position]
        return touched(Together((entry.change, entry.inverse)))
