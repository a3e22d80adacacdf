"""The list of changes on disk: appended to in one go or not at all, and never altered."""

import secrets
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

from sqlalchemy import Connection, func, select, update
from sqlalchemy.exc import DBAPIError, SQLAlchemyError

from engine.changes import Change
from engine.history import Entry, History
from engine.records.bulk import insert_rows
from engine.records.encode import change_as_text, change_from_text, kind_of
from engine.records.failures import Missing, reading, saving
from engine.records.figures_rows import replace_facts
from engine.records.opening import Records
from engine.records.schema import changes, weeks

NO_SUCH_WEEK = "There is no such week in these records: the address may be mistyped, or of other records."


@dataclass(frozen=True, slots=True)
class Made:
    """A change as it stands on disk, with who made it, when and why.

    `undoes` is the position (from 0) of the change that it reverts.
    """

    change: Change
    who: str
    when: datetime
    why: str = ""
    undoes: int | None = None

    def on(self, history: History) -> History:
        """The list with this change at its end."""
        return history.grown(self.change, self.who, self.when, self.why, self.undoes)


class Conflict(Exception):
    """Somebody else changed the week meanwhile; nothing was saved.

    `theirs` are the changes made since the version that was expected, in order.
    """

    def __init__(self, expected: int, theirs: tuple[Made, ...]) -> None:
        self.expected = expected
        self.theirs = theirs
        super().__init__(
            f"The week was changed meanwhile: {len(theirs)} change{'' if len(theirs) == 1 else 's'} "
            f"since version {expected}. Nothing was saved."
        )


def append(records: Records, week_id: str, history: History, saved: int) -> int:
    """Save the changes of a list that are not on disk yet; when this returns, they are.

    history: the whole list; saved: how many of its changes, from the first, are on disk

    Returns the version of the week, which is the number of its changes.

    Raises:
        Conflict: the week has other changes by now; nothing was saved.
        Missing: there is no such week.
        NotSaved: they could not be written; none of them was.
        NotUnderstood: a change that cannot be stored; none of them was.
    """
    fresh = history.entries[saved:]
    if not fresh:
        return saved
    tokens = [secrets.token_urlsafe(16) for _ in fresh]
    rows = [
        _row(week_id, saved + n, token, entry)
        for n, (token, entry) in enumerate(zip(tokens, fresh, strict=True), 1)
    ]
    said = f"{len(fresh)} change{'' if len(fresh) == 1 else 's'} to the week"
    with saving(said, records.where):
        try:
            with records.write() as connection:
                if not _advanced(connection, week_id, saved, len(fresh)):
                    theirs = load_changes(connection, week_id, saved)
                    raise _lost(connection, week_id, saved, theirs)
                insert_rows(connection, changes, rows)
                replace_facts(connection, week_id, history.figures_at(saved), history.week)
        except DBAPIError:
            if not _all_there(records, tokens):
                raise
    return len(history.entries)


def version_of(records: Records, week_id: str) -> int:
    """How many changes a week has on disk.

    Raises:
        Missing: there is no such week.
        NotSaved: the records cannot be read.
    """
    with reading("the week's version", records.where), records.read() as connection:
        found = connection.execute(select(weeks.c.version).where(weeks.c.id == week_id)).scalar()
    if found is None:
        raise Missing(NO_SUCH_WEEK)
    return int(found)


def changes_since(records: Records, week_id: str, version: int) -> tuple[Made, ...]:
    """The changes of a week after the first `version` ones, in order."""
    with reading("the week's changes", records.where), records.read() as connection:
        return load_changes(connection, week_id, version)


def load_changes(connection: Connection, week_id: str, version: int = 0) -> tuple[Made, ...]:
    """The changes of a week after the first `version` ones, in order."""
    query = (
        select(changes)
        .where(changes.c.week_id == week_id, changes.c.sequence > version)
        .order_by(changes.c.sequence)
    )
    return tuple(
        Made(
            change_from_text(row.body),
            row.who,
            row.made if row.made.tzinfo else row.made.replace(tzinfo=UTC),
            row.why,
            None if row.undoes is None else row.undoes - 1,
        )
        for row in connection.execute(query)
    )


def _row(week_id: str, sequence: int, token: str, entry: Entry) -> dict[str, object]:
    return {
        "week_id": week_id,
        "sequence": sequence,
        "token": token,
        "kind": kind_of(entry.change),
        "body": change_as_text(entry.change),
        "who": entry.who,
        "made": entry.when or datetime.now(UTC),
        "why": entry.why,
        "undoes": None if entry.undoes is None else entry.undoes + 1,
    }


def _advanced(connection: Connection, week_id: str, expected: int, by: int) -> bool:
    """Whether the week was still at the version expected; if so it is further on now."""
    done = connection.execute(
        update(weeks)
        .where(weeks.c.id == week_id, weeks.c.version == expected)
        .values(version=expected + by, changed=datetime.now(UTC))
    )
    return bool(done.rowcount == 1)


def _lost(connection: Connection, week_id: str, expected: int, theirs: tuple[Made, ...]) -> Exception:
    there = connection.execute(select(weeks.c.id).where(weeks.c.id == week_id)).scalar()
    return Missing(NO_SUCH_WEEK) if there is None else Conflict(expected, theirs)


def _all_there(records: Records, tokens: Sequence[str]) -> bool:
    """Whether changes reached the disk although the answer did not reach us."""
    query = select(func.count()).select_from(changes).where(changes.c.token.in_(tokens))
    try:
        with records.read() as connection:
            return connection.execute(query).scalar() == len(tokens)
    except SQLAlchemyError:
        return False
