"""Where the week on the desk is kept: its place in the records, and how much of it is on disk."""

from dataclasses import dataclass

from engine.findings import Finding
from engine.history import History
from engine.intake.build_lists import Unused
from engine.records import Merged, Records, save
from engine.week import Refused

READING_ONLY = "This link is for reading only: nothing was changed."


@dataclass
class Kept:
    """A week in the records. `saved` counts the changes of our list that are on disk.

    `unread` and `said` are the texts that nobody could read and what is to be said of the sheets, as they
    stand on disk; `noted` is the version whose totals do.
    """

    records: Records
    week_id: str
    read_id: str
    saved: int = 0
    may_change: bool = True
    unread: tuple[Unused, ...] = ()
    said: tuple[Finding, ...] = ()
    noted: int = -1

    def take(self, history: History) -> Merged:
        """Save our list, merged with what others saved; when this returns, it is on disk.

        Raises:
            Refused: the week was opened for reading only.
            NotSaved: it could not be written, and what is and is not saved.
        """
        if not self.may_change:
            raise Refused(READING_ONLY)
        merged = save(self.records, self.week_id, history, self.saved)
        self.saved = len(merged.history.entries)
        return merged
