"""The list of changes: the uploaded week, and every change since with who made it, when and why.

The list only grows. Undoing appends the reverting change, so that everybody who follows the list sees
the same thing, and what was done can always be read.
"""

from dataclasses import dataclass, replace
from datetime import UTC, datetime

from engine.changes import Change
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
        return self._grown(change, who, why, None)

    @property
    def can_undo(self) -> int | None:
        """The position of the entry that undo would revert, None where there is nothing left."""
        done, _ = self._stacks()
        return done[-1] if done else None

    @property
    def can_redo(self) -> int | None:
        """The position of the entry whose reverting redo would revert, None where there is none."""
        _, undone = self._stacks()
        return undone[-1] if undone else None

    def undo(self, who: str = "") -> "History":
        """The list with the latest change that still stands reverted."""
        return self._reverting(self.can_undo, who, "There is nothing to undo.")

    def redo(self, who: str = "") -> "History":
        """The list with the latest undoing reverted, as long as nothing else was changed after it."""
        return self._reverting(self.can_redo, who, "There is nothing to redo.")

    def _reverting(self, position: int | None, who: str, nothing: str) -> "History":
        if position is None:
            raise Refused(nothing)
        return self._grown(self.entries[position].inverse, who, "", position)

    def _grown(self, change: Change, who: str, why: str, undoes: int | None) -> "History":
        entry = Entry(change, self.week.inverse(change), who, datetime.now(UTC), why, undoes)
        return replace(self, week=self.week.apply(change), entries=(*self.entries, entry))

    def _stacks(self) -> tuple[list[int], list[int]]:
        """Positions of the entries that stand, and of the undoings that may be undone in turn."""
        done: list[int] = []
        undone: list[int] = []
        for position, entry in enumerate(self.entries):
            if entry.undoes is None:
                done.append(position)
                undone.clear()
            elif done and entry.undoes == done[-1]:
                done.pop()
                undone.append(position)
            else:  # an undoing was undone: the change stands again, now through this entry
                undone.pop()
                done.append(position)
        return done, undone
