"""Weeks on disk: created from a reading, found, copied, archived, and loaded with their list of changes."""

import secrets
from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import ColumnElement, Connection, RowMapping, func, insert, or_, select, true, update

from engine.findings import Finding
from engine.history import History
from engine.intake.build_lists import Unused
from engine.intake.reading import Reading
from engine.records.failures import Missing, reading, saving
from engine.records.figures_rows import load_figures, rules_row, store_figures
from engine.records.journal import NO_SUCH_WEEK, load_changes
from engine.records.opening import Records
from engine.records.rate_rows import RateIds, load_rates, store_rates
from engine.records.remarks import load_remarks, load_unread, store_remarks, store_unread
from engine.records.schema import customers, depots, weeks
from engine.week import Week

DESK = "desk"
"""The desk whose weeks these are, where nobody says otherwise."""

SHARED_UNTIL = 10
"""A copied week shares its rate table while fewer than one row in this many differs from it."""


@dataclass(frozen=True, slots=True)
class Listed:
    """A week in the list: `version` counts its changes, `read_id` is its name for somebody who only reads,
    `desk` whose it is."""

    id: str
    read_id: str
    name: str
    created: datetime
    changed: datetime
    archived: datetime | None
    version: int
    unit: str
    currency: str
    desk: str = DESK


@dataclass(frozen=True, slots=True)
class Opened:
    """A week from the records.

    findings: what was said of its sheets and stays until it is answered; unused: texts that nobody could
    read yet; `may_change` is False where the week was opened by its `read_id`.
    """

    listed: Listed
    history: History
    decimal_mark: str
    findings: tuple[Finding, ...] = ()
    unused: tuple[Unused, ...] = ()
    may_change: bool = True


def create_week(records: Records, read: Reading, desk: str = DESK) -> Opened:
    """Put a week that was read into the records; when this returns, it is on disk.

    Raises:
        NotSaved: it could not be written; nothing of it was.
        TooLarge: a figure has more digits than can be kept exactly.
    """
    with saving(f"the week '{read.week.rules.week}'", records.where), records.write() as connection:
        listed = _store(connection, read.week, desk, read.style.decimal_mark)
        store_remarks(connection, listed.id, read.lasting)
        store_unread(connection, listed.id, read.unused)
    records.keep(("week", listed.id), read.week)
    return Opened(
        listed, History.of(read.week), read.style.decimal_mark, tuple(read.lasting), tuple(read.unused)
    )


def copy_week(records: Records, week_id: str, name: str, desk: str = DESK) -> Opened:
    """A new week with the figures of another as they are now, under another name.

    Holds and gone goods stay behind: they are facts and decisions of that week.

    Raises:
        Missing: there is no such week.
        NotSaved: it could not be written; nothing of it was.
    """
    origin = open_week(records, week_id)
    return _stored_copy(records, origin, origin.history.week, name, desk)


def restore_as_new(records: Records, week_id: str, version: int, name: str, desk: str = DESK) -> Opened:
    """A new week with the figures that another had after `version` changes, holds and gone goods included.

    Raises:
        Missing: there is no such week, or it never had so many changes.
        NotSaved: it could not be written; nothing of it was.
    """
    origin = open_week(records, week_id)
    if not 0 <= version <= len(origin.history.entries):
        raise Missing(f"The week never had {version} changes: it has {len(origin.history.entries)}.")
    return _stored_copy(records, origin, origin.history.at(version), name, desk, with_facts=True)


def open_week(records: Records, any_id: str) -> Opened:
    """A week by its id, or for reading only by its `read_id`, with its list of changes replayed.

    Raises:
        Missing: there is no such week.
        NotSaved: the records cannot be read.
    """
    with reading("the week", records.where), records.read() as connection:
        head = _head(connection, any_id)
        week_id = head["id"]
        uploaded = _uploaded(records, connection, head)
        history = History.of(uploaded)
        for made in load_changes(connection, week_id):
            history = made.on(history)
        return Opened(
            listed_in(head),
            history,
            head["decimal_mark"],
            load_remarks(connection, week_id),
            load_unread(connection, week_id),
            may_change=any_id == week_id,
        )


def list_weeks(
    records: Records,
    search: str = "",
    archived: bool = False,
    desk: str | Collection[str] | None = DESK,
    limit: int = 200,
) -> list[Listed]:
    """Weeks, the latest first, whose name, depots or customers have the words that are searched for.

    desk: whose weeks, one desk's or several'; None: every desk's
    """
    query = select(weeks).where(of_desk(desk))
    query = query.where(weeks.c.archived.is_not(None) if archived else weeks.c.archived.is_(None))
    for word in search.split():
        pattern = "%" + word.lower().replace("\\", "\\\\").replace("%", "\\%").replace("_", "\\_") + "%"
        query = query.where(or_(*(_has(pattern, column) for column in _searched())))
    query = query.order_by(weeks.c.created.desc(), weeks.c.id).limit(limit)
    with reading("the list of weeks", records.where), records.read() as connection:
        return [listed_in(row) for row in connection.execute(query).mappings()]


def archive_week(records: Records, week_id: str, archived: bool = True) -> None:
    """Take a week out of the list, or put it back; nothing of it is deleted.

    Raises:
        Missing: there is no such week.
        NotSaved: it could not be written.
    """
    with saving("that the week is archived", records.where), records.write() as connection:
        done = connection.execute(
            update(weeks)
            .where(weeks.c.id == week_id)
            .values(archived=datetime.now(UTC) if archived else None)
        )
        if done.rowcount == 0:
            raise Missing(NO_SUCH_WEEK)


def _store(
    connection: Connection, week: Week, desk: str, decimal_mark: str, copied_from: str | None = None
) -> Listed:
    now = datetime.now(UTC)
    ids = store_rates(connection, week.rates.table)
    row = {
        "id": secrets.token_urlsafe(16),
        "read_id": secrets.token_urlsafe(16),
        "desk": desk,
        "name": week.rules.week,
        "created": now,
        "changed": now,
        "archived": None,
        "copied_from": copied_from,
        "version": 0,
        "decimal_mark": decimal_mark,
        "rates_added": week.rates.added,
        **rules_row(week.rules),
        **ids._asdict(),
    }
    connection.execute(insert(weeks).values(row))
    store_figures(connection, row["id"], week)
    return listed_in(row)


def _stored_copy(
    records: Records, origin: Opened, week: Week, name: str, desk: str, with_facts: bool = False
) -> Opened:
    copied = _renamed(week, name, with_facts)
    with saving(f"the week '{name}'", records.where), records.write() as connection:
        listed = _store(connection, copied, desk, origin.decimal_mark, origin.listed.id)
        store_remarks(connection, listed.id, origin.findings)
        store_unread(connection, listed.id, origin.unused)
    records.keep(("week", listed.id), copied)
    return Opened(listed, History.of(copied), origin.decimal_mark, origin.findings, origin.unused)


def _renamed(week: Week, name: str, with_facts: bool) -> Week:
    rules = replace(week.rules, week=name)
    differing = len(week.rates.overlay) + len(week.rates.removed)
    if with_facts:
        return replace(week, rules=rules)
    flat = differing * SHARED_UNTIL >= len(week.rates.table)
    rates = replace(week.rates, table=week.rates.flat, overlay={}, removed=frozenset(), added=0)
    return replace(week, rules=rules, rates=rates if flat else week.rates, holds={}, gone={})


def _uploaded(records: Records, connection: Connection, head: RowMapping) -> Week:
    """The week as uploaded, from memory where it was read before: it never changes."""
    key = ("week", head["id"])
    found = records.kept(key)
    if found is None:
        ids = RateIds(*(head[name] for name in RateIds._fields))
        table = records.kept(("rates", ids))
        if table is None:
            table = load_rates(connection, ids)
            records.keep(("rates", ids), table)
        found = load_figures(connection, head["id"], head, table)
        records.keep(key, found)
    return found  # type: ignore[no-any-return]


def _head(connection: Connection, any_id: str) -> RowMapping:
    query = select(weeks).where(or_(weeks.c.id == any_id, weeks.c.read_id == any_id))
    head = connection.execute(query).mappings().one_or_none()
    if head is None:
        raise Missing(NO_SUCH_WEEK)
    return head


def of_desk(desk: str | Collection[str] | None) -> ColumnElement[bool]:
    """Which weeks are these desks'; all where none is said."""
    if desk is None:
        return true()
    return weeks.c.desk.in_([desk] if isinstance(desk, str) else list(desk))


def listed_in(row: Mapping[Any, Any]) -> Listed:
    times = {name: _utc(row[name]) for name in ("created", "changed", "archived")}
    plain = ("id", "read_id", "name", "version", "unit", "currency", "desk")
    return Listed(**{name: row[name] for name in plain}, **times)  # type: ignore[arg-type]


def _utc(moment: datetime | None) -> datetime | None:
    """SQLite keeps no time zone; all times are written in UTC."""
    return moment.replace(tzinfo=UTC) if moment is not None and moment.tzinfo is None else moment


def _searched() -> list[Any]:
    return [weeks.c.name, depots.c.name, customers.c.name]


def _has(pattern: str, column: Any) -> Any:
    fits = func.lower(column).like(pattern, escape="\\")
    if column.table is weeks:
        return fits
    return select(column.table.c.week_id).where(column.table.c.week_id == weeks.c.id, fits).exists()
