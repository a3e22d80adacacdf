"""The named events of a week: which of its changes a bridge tells apart from its figures."""

from collections.abc import Callable

from engine.changes import Change, Together
from engine.compare.mixed import Event
from engine.history import Entry, History
from engine.week import Refused, Week

MOST_EVENTS = 12
"""More changes than this are figures being typed rather than things that happened."""


def events_of(
    history: History, words: Callable[[Change], str], since: int = 0, until: int | None = None
) -> tuple[Week, tuple[Event, ...]]:
    """The week before its events, and the events that lead from there to the week.

    Every change in force is an event while there are few. Of many only those made with a reason, or under a
    note, are: the others belong to the figures. Where even those are too many, or cannot be told apart from
    the rest, there are none, and the week before is the week itself.

    Args:
        history: the list of changes.
        words: what a change is called where it has neither reason nor note.
        since, until: versions of the week: after how many changes it starts and ends (None: all of them).
    """
    last = len(history.entries) if until is None else until
    week = history.week if last == len(history.entries) else history.at(last)
    standing = _standing(history.entries[:last], since)
    named = standing if len(standing) <= MOST_EVENTS else [one for one in standing if _is_named(one)]
    if len(named) > MOST_EVENTS:
        return week, ()
    before = history.uploaded if since == 0 else history.at(since)
    try:
        for one in standing:
            if one not in named:
                before = before.apply(one.change)
        again = before
        for one in named:
            again = again.apply(one.change)
    except Refused:
        return week, ()
    if again != week:
        return week, ()
    return before, tuple(Event(_name(one, words), one.change) for one in named)


def _standing(entries: tuple[Entry, ...], since: int) -> list[Entry]:
    """The entries from a position on without what was undone, and without its undoing."""
    chains: dict[int, list[int]] = {}
    root: dict[int, int] = {}
    for position in range(since, len(entries)):
        undoes = entries[position].undoes
        root[position] = root[undoes] if undoes is not None and undoes >= since else position
        chains.setdefault(root[position], []).append(position)
    return [entries[first] for first, chain in sorted(chains.items()) if len(chain) % 2]


def _is_named(entry: Entry) -> bool:
    return bool(entry.why) or (isinstance(entry.change, Together) and bool(entry.change.note))


def _name(entry: Entry, words: Callable[[Change], str]) -> str:
    said = words(entry.change)
    return f"{said} ({entry.why})" if entry.why and entry.why not in said else said
