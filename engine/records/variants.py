"""Variants of a week, and the plan that was really sent, kept beside the week in the records."""

from collections.abc import Sequence
from datetime import UTC, datetime
from types import MappingProxyType

from sqlalchemy import Connection, delete, func, insert, select

from engine.changes import Change, Together
from engine.figures import RateKey
from engine.intake.earlier import Quantities
from engine.records.bulk import insert_rows
from engine.records.decimals import as_row, decimal_in
from engine.records.encode import change_as_text, change_from_text
from engine.records.failures import Missing, reading, saving
from engine.records.journal import NO_SUCH_WEEK
from engine.records.opening import Records
from engine.records.schema import sent, variants, weeks


def save_variant(records: Records, week_id: str, name: str, changes: Sequence[Change], who: str = "") -> None:
    """Keep a named list of changes; one of the same name is replaced, in its place.

    Raises:
        Missing: there is no such week.
        NotSaved: it could not be written; nothing of it was.
        NotUnderstood: a change that cannot be stored.
    """
    body = change_as_text(Together(tuple(changes), name))
    row = {"name": name, "body": body, "who": who, "made": datetime.now(UTC)}
    with saving(f"the variant '{name}'", records.where), records.write() as connection:
        _lock(connection, week_id)
        same = variants.c.week_id == week_id, variants.c.name == name
        place = connection.execute(select(variants.c.position).where(*same)).scalar()
        if place is None:
            last = select(func.max(variants.c.position)).where(variants.c.week_id == week_id)
            place = (connection.execute(last).scalar() or 0) + 1
        connection.execute(delete(variants).where(*same))
        connection.execute(insert(variants).values({"week_id": week_id, "position": place, **row}))


def list_variants(records: Records, week_id: str) -> list[tuple[str, tuple[Change, ...], str]]:
    """Name, changes and maker of every variant of a week, the oldest first.

    Raises:
        NotSaved: the records cannot be read.
    """
    query = select(variants).where(variants.c.week_id == week_id).order_by(variants.c.position)
    with reading("the variants", records.where), records.read() as connection:
        found = []
        for row in connection.execute(query):
            change = change_from_text(row.body)
            changes = change.changes if isinstance(change, Together) else (change,)
            found.append((row.name, changes, row.who))
        return found


def remove_variant(records: Records, week_id: str, name: str) -> None:
    """Take a variant out; one that is not there stays away.

    Raises:
        NotSaved: it could not be written.
    """
    with saving(f"that the variant '{name}' is taken out", records.where), records.write() as connection:
        connection.execute(delete(variants).where(variants.c.week_id == week_id, variants.c.name == name))


def save_sent(records: Records, week_id: str, quantities: Quantities) -> None:
    """Let this be the plan that was really sent in a week; none: what was kept is taken out.

    Raises:
        Missing: there is no such week.
        NotSaved: it could not be written; nothing of it was.
        TooLarge: a quantity with more digits than can be kept exactly.
    """
    rows = [
        {"week_id": week_id, "position": n, **key._asdict(), **as_row({"quantity": quantity}, ("quantity",))}
        for n, (key, quantity) in enumerate(quantities.items())
    ]
    with saving("the plan as it was sent", records.where), records.write() as connection:
        _lock(connection, week_id)
        connection.execute(delete(sent).where(sent.c.week_id == week_id))
        insert_rows(connection, sent, rows)


def load_sent(records: Records, week_id: str) -> Quantities:
    """The plan that was really sent in a week, empty where nobody said.

    Raises:
        NotSaved: the records cannot be read.
    """
    query = select(sent).where(sent.c.week_id == week_id).order_by(sent.c.position)
    with reading("the plan as it was sent", records.where), records.read() as connection:
        found = {}
        for row in connection.execute(query).mappings():
            quantity = decimal_in(row, "quantity")
            if quantity is not None:
                found[RateKey(row["depot"], row["customer"], row["haulier"], row["number"])] = quantity
        return MappingProxyType(found)


def _lock(connection: Connection, week_id: str) -> None:
    """The row of the week is locked, so that of two who write at once the later stays whole."""
    there = select(weeks.c.id).where(weeks.c.id == week_id).with_for_update()
    if connection.execute(there).scalar() is None:
        raise Missing(NO_SUCH_WEEK)
