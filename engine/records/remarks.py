"""What was said of a week's sheets, and the texts on them that nobody could read yet."""

import json
from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from sqlalchemy import Connection, delete, select

from engine.figures import RateKey
from engine.findings import Finding, Severity
from engine.intake.build_lists import Unused
from engine.records.bulk import insert_rows
from engine.records.failures import saving
from engine.records.opening import Records
from engine.records.schema import remarks, unread


def save_remarks(
    records: Records, week_id: str, texts: Sequence[Unused], findings: Sequence[Finding]
) -> None:
    """Let the texts that nobody could read yet, and what stays to be said of the sheets, be these.

    Raises:
        NotSaved: they could not be written.
    """
    with saving("the cells that could not be read", records.where), records.write() as connection:
        connection.execute(delete(unread).where(unread.c.week_id == week_id))
        connection.execute(delete(remarks).where(remarks.c.week_id == week_id))
        store_unread(connection, week_id, texts)
        store_remarks(connection, week_id, findings)


def store_remarks(connection: Connection, week_id: str, findings: Sequence[Finding]) -> None:
    """Write findings beside a week."""
    rows = []
    for position, finding in enumerate(findings):
        said = {
            **asdict(finding),
            "severity": finding.severity.word,
            "options": json.dumps(finding.options),
        }
        rows.append({"week_id": week_id, "position": position, **said})
    insert_rows(connection, remarks, rows)


def load_remarks(connection: Connection, week_id: str) -> tuple[Finding, ...]:
    """The findings beside a week, as they were written."""
    query = select(remarks).where(remarks.c.week_id == week_id).order_by(remarks.c.position)
    found = []
    for row in connection.execute(query).mappings():
        said: dict[str, Any] = {name: row[name] for name in row if name not in ("week_id", "position")}
        said["severity"] = Severity[row["severity"].upper()]
        said["options"] = tuple(json.loads(row["options"]))
        found.append(Finding(**said))
    return tuple(found)


def store_unread(connection: Connection, week_id: str, texts: Sequence[Unused]) -> None:
    """Write texts that nobody could read beside a week."""
    rows = [
        {
            "week_id": week_id,
            "position": position,
            "table_name": one.table,
            "record": None if one.key is None else json.dumps(one.key),
            "texts": json.dumps(dict(one.texts)),
        }
        for position, one in enumerate(texts)
    ]
    insert_rows(connection, unread, rows)


def load_unread(connection: Connection, week_id: str) -> tuple[Unused, ...]:
    """The texts beside a week, as they were written."""
    query = select(unread).where(unread.c.week_id == week_id).order_by(unread.c.position)
    found = []
    for row in connection.execute(query):
        key = None if row.record is None else json.loads(row.record)
        named = RateKey(*key) if isinstance(key, list) else key
        found.append(Unused(row.table_name, json.loads(row.texts), named))
    return tuple(found)
