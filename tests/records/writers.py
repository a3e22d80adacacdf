"""A program that changes a week in the records, for tests of several writers and of writers that are killed.

    python -m tests.records.writers PLACE WEEK_ID WHO COUNT

Every change is the writer's own: it says `WHO NUMBER` on standard output once the change is acknowledged.
"""

import sys

from engine.changes import Alter, Change, Together
from engine.records import Records, open_records, open_week, save
from tests.records.making import D


def change_number(who: str, number: int) -> Change:
    """A change that says who made it and which of theirs it is; all of them touch the same rule."""
    return Together((Alter("rule", "", "load_size", D(number)),), f"{who} {number}")


def keep_changing(records: Records, week_id: str, who: str, first: int, count: int) -> int:
    """Make changes one after the other, each on the latest version; returns how many merges it took."""
    history = open_week(records, week_id).history
    saved = len(history.entries)
    merged = 0
    for number in range(first, first + count):
        change = change_number(who, number)
        outcome = save(records, week_id, history.after(change, who), saved)
        merged += bool(outcome.theirs)
        while outcome.clashes:  # the other one changed the same rule meanwhile: ours is made again on theirs
            saved = len(outcome.history.entries)
            outcome = save(records, week_id, outcome.history.after(change, who), saved)
        history, saved = outcome.history, len(outcome.history.entries)
        sys.stdout.write(f"{who} {number}\n")
        sys.stdout.flush()
    return merged


def note_of(change: Change) -> str:
    return change.note if isinstance(change, Together) else ""


if __name__ == "__main__":
    place, week, name, amount = sys.argv[1:]
    keep_changing(open_records(place), week, name, 0, int(amount))
