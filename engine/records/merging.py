"""Two people on one week: changes that do not touch each other merge, the others are put side by side."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

from engine.changes import Add, Change, Together
from engine.figures import Gone, RateRow
from engine.history import Entry, History
from engine.records.journal import Conflict, Made, append
from engine.records.opening import Records
from engine.touch import Touched, touched
from engine.week import Refused

ATTEMPTS = 50
"""How often somebody may be quicker before saving is given up."""


@dataclass(frozen=True, slots=True)
class Clash:
    """A change of ours that was not made, and those of theirs that it touches.

    `theirs` is empty where it rests on another change of ours that was not made, or does not fit any more;
    `why` says so in a sentence.
    """

    mine: Entry
    theirs: tuple[Entry, ...]
    why: str


@dataclass(frozen=True, slots=True)
class Merged:
    """Both lists as one: theirs, then those of ours that do not touch them.

    `agreed` are changes of ours that they had made just so; they are not made twice.
    """

    history: History
    theirs: tuple[Entry, ...] = ()
    clashes: tuple[Clash, ...] = ()
    agreed: tuple[Entry, ...] = ()


def merge(history: History, saved: int, theirs: Sequence[Made]) -> Merged:
    """Our list with theirs worked in.

    history: our list; saved: how many of its changes, from the first, both of us have
    theirs: what they made after those

    Two changes touch each other by `engine.touch`: both give a value to the same figure of the same record,
    or one puts in, takes out or renames what the other names. A change of ours that touches theirs is not
    made but returned beside theirs, with all of ours that touch it in turn.
    """
    merged = replace(history, week=history.at(saved), entries=history.entries[:saved])
    for made in theirs:
        merged = made.on(merged)
    end = len(merged.entries)
    standing = {one: _touched(merged.entries[one]) for one in _standing(merged, saved)}
    moved: dict[int, int] = {}
    waiting: list[Touched] = []
    clashes: list[Clash] = []
    agreed: list[Entry] = []
    for position, entry in enumerate(history.entries[saved:], start=saved):
        mine = _touched(entry)
        against = [one for one, touching in standing.items() if touching.meets(mine)]
        same = next((one for one in against if _same(entry, merged.entries[one])), None)
        why = ""
        if same is not None and against == [same] and not any(mine.meets(one) for one in waiting):
            agreed.append(entry)
            moved[position] = same
            continue
        if against:
            why = "They changed the same figures meanwhile."
        elif any(mine.meets(one) for one in waiting):
            why = "It rests on another change of yours that was not made."
        else:
            try:
                merged = _made_again(merged, entry, moved, saved)
            except Refused as refused:
                why = f"It does not fit the week any more: {refused}"
        if why:
            waiting.append(mine)
            clashes.append(Clash(entry, tuple(merged.entries[one] for one in against), why))
        else:
            moved[position] = len(merged.entries) - 1
    return Merged(merged, merged.entries[saved:end], tuple(clashes), tuple(agreed))


def save(records: Records, week_id: str, history: History, saved: int) -> Merged:
    """Save our changes, merged with whatever others saved meanwhile; when this returns, they are on disk.

    Changes that clash are returned and not saved: somebody has to decide.

    Raises:
        Missing: there is no such week.
        NotSaved: they could not be written; none of them was.
    """
    outcome = Merged(history)
    for _ in range(ATTEMPTS - 1):
        try:
            append(records, week_id, outcome.history, saved)
            return outcome
        except Conflict as conflict:
            step = merge(outcome.history, saved, conflict.theirs)
        saved += len(step.theirs)
        outcome = Merged(
            step.history,
            outcome.theirs + step.theirs,
            outcome.clashes + step.clashes,
            outcome.agreed + step.agreed,
        )
    append(records, week_id, outcome.history, saved)
    return outcome


def caught_up(history: History, theirs: Sequence[Made]) -> History:
    """Our list, all of it saved, with what others saved since at its end."""
    for made in theirs:
        history = made.on(history)
    return history


def _made_again(merged: History, entry: Entry, moved: dict[int, int], saved: int) -> History:
    """The list with one change of ours at its end; an undoing is worked out anew from what it undoes."""
    if entry.undoes is None:
        return merged.grown(entry.change, entry.who, entry.when, entry.why)
    target = entry.undoes if entry.undoes < saved else moved.get(entry.undoes)
    if target is None:
        raise Refused("what it undoes was not made.")
    return merged.reverted(target, entry.who, entry.why)


def _standing(merged: History, saved: int) -> list[int]:
    """Those of their entries whose effect is there: not what they made and took back themselves."""
    undone: set[int] = set()
    for position in range(len(merged.entries) - 1, saved - 1, -1):
        target = merged.entries[position].undoes
        if target is not None and target >= saved and position not in undone:
            undone |= {position, target}
    return [position for position in range(saved, len(merged.entries)) if position not in undone]


def _touched(entry: Entry) -> Touched:
    return touched(Together((entry.change, entry.inverse)))


def _same(mine: Entry, theirs: Entry) -> bool:
    """Whether both made the very same change. The same row added twice may be meant twice, so it is asked."""
    return mine.change == theirs.change and not _adds_rows(mine.change)


def _adds_rows(change: Change) -> bool:
    if isinstance(change, Together):
        return any(_adds_rows(one) for one in change.changes)
    return isinstance(change, Add) and isinstance(change.record, RateRow | Gone)
