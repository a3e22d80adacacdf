"""Rate tables on disk: stored once by what they hold, however many weeks share them."""

import hashlib
from collections.abc import Iterator
from typing import Any, NamedTuple

import numpy as np
import numpy.typing as npt
from sqlalchemy import Connection, Row, Table, select
from sqlalchemy.dialects import postgresql, sqlite

from engine.exact import BLANK, DecimalColumn
from engine.rates import DECIMAL_FIELDS, NO_CODE, RateTable
from engine.records.bulk import CHUNK, insert_columns, insert_rows, read_columns
from engine.records.schema import name_lists, names, rate_rows, rate_tables

_NEVER_BLANK = ("depot", "customer", "per_load", "closed")


class RateIds(NamedTuple):
    """What a week points to: its rate table and the lists of names in it."""

    rate_table_id: int
    depot_list_id: int
    customer_list_id: int
    haulier_list_id: int


def store_rates(connection: Connection, table: RateTable) -> RateIds:
    """The ids of a rate table and its names; what is on disk already is not written again."""
    return RateIds(
        _store_rows(connection, table),
        _store_names(connection, table.depot_names),
        _store_names(connection, table.customer_names),
        _store_names(connection, table.haulier_names),
    )


def load_rates(connection: Connection, ids: RateIds) -> RateTable:
    """The rate table that these ids point to."""
    head = connection.execute(select(rate_tables).where(rate_tables.c.id == ids.rate_table_id)).one()
    scales = {name: getattr(head, f"{name}_scale") for name in DECIMAL_FIELDS}
    kept = [name for name in DECIMAL_FIELDS if scales[name] is not None]
    days = ["valid_from_day"] if head.has_valid_from else []
    wanted = ["depot", "customer", "haulier", "rate", "per_load", "closed", *kept, *days]
    columns = _read(connection, ids.rate_table_id, wanted, head.row_count)
    return RateTable(
        _names(connection, ids.depot_list_id),
        _names(connection, ids.customer_list_id),
        _names(connection, ids.haulier_list_id),
        depot=columns["depot"].astype(np.int32),
        customer=columns["customer"].astype(np.int32),
        haulier=_or_no_code(columns["haulier"]),
        rate=DecimalColumn(columns["rate"], head.rate_scale),
        per_load=columns["per_load"].astype(bool),
        closed=columns["closed"].astype(bool),
        decimals={name: DecimalColumn(columns[name], scales[name]) for name in kept},
        valid_from=_or_no_code(columns["valid_from_day"]) if days else None,
    )


def _store_names(connection: Connection, listed: tuple[str, ...]) -> int:
    digest = hashlib.sha256()
    for name in listed:
        text = name.encode("utf-8")
        digest.update(len(text).to_bytes(8, "little") + text)
    number, is_new = _stored_once(connection, name_lists, {"content_hash": digest.hexdigest()})
    if is_new:
        insert_rows(
            connection,
            names,
            [{"list_id": number, "code": code, "name": name} for code, name in enumerate(listed)],
        )
    return number


def _store_rows(connection: Connection, table: RateTable) -> int:
    head: dict[str, Any] = {
        "content_hash": content_hash(table),
        "row_count": len(table),
        "rate_scale": table.rate.places,
        "has_valid_from": table.valid_from is not None,
    }
    for name in DECIMAL_FIELDS:
        column = table.decimals.get(name)
        head[f"{name}_scale"] = None if column is None else column.places
    number, is_new = _stored_once(connection, rate_tables, head)
    if is_new:
        kept = [name for name in DECIMAL_FIELDS if name in table.decimals]
        days = [] if table.valid_from is None else ["valid_from_day"]
        listed = ["depot", "customer", "haulier", "rate", "per_load", "closed", *kept, *days]
        chunks = _chunks(number, table, kept)
        insert_columns(connection, rate_rows, ["table_id", "position", *listed], chunks)
    return number


def _stored_once(connection: Connection, table: Table, head: dict[str, Any]) -> tuple[int, bool]:
    """The id of the row with this content hash, and whether it was put in just now.

    Two writers may bring the same content at once: the second waits for the first and finds it there.
    """
    found = select(table.c.id).where(table.c.content_hash == head["content_hash"])
    number = connection.execute(found).scalar()
    if number is not None:
        return int(number), False
    dialect = postgresql if connection.dialect.name == "postgresql" else sqlite
    added = dialect.insert(table).values(head).on_conflict_do_nothing().returning(table.c.id)
    number = connection.execute(added).scalar()
    if number is not None:
        return int(number), True
    return int(connection.execute(found).scalar_one()), False


def content_hash(table: RateTable) -> str:
    """What tells the rows of a rate table from others; names are hashed apart."""
    digest = hashlib.sha256()
    parts: list[tuple[str, int, npt.NDArray[Any]]] = [
        ("depot", 0, table.depot),
        ("customer", 0, table.customer),
        ("haulier", 0, table.haulier),
        ("rate", table.rate.places, table.rate.values),
        ("per_load", 0, table.per_load),
        ("closed", 0, table.closed),
    ]
    parts += [(name, column.places, column.values) for name, column in sorted(table.decimals.items())]
    if table.valid_from is not None:
        parts.append(("valid_from", 0, table.valid_from))
    for name, places, values in parts:
        digest.update(f"{name} {places} {len(values)} {values.dtype.itemsize}\n".encode())
        little = values.astype(values.dtype.newbyteorder("<"), copy=False)
        digest.update(np.ascontiguousarray(little).tobytes())
    return digest.hexdigest()


def _chunks(number: int, table: RateTable, kept: list[str]) -> Iterator[list[tuple[Any, ...]]]:
    for start in range(0, len(table), CHUNK):
        part = slice(start, start + CHUNK)
        rows = len(table.depot[part])
        columns: list[Any] = [
            [number] * rows,
            range(start, start + rows),
            table.depot[part].tolist(),
            table.customer[part].tolist(),
            _none_where(table.haulier[part], NO_CODE),
            _none_where(table.rate.values[part], BLANK),
            table.per_load[part].tolist(),
            table.closed[part].tolist(),
            *(_none_where(table.decimals[name].values[part], BLANK) for name in kept),
        ]
        if table.valid_from is not None:
            columns.append(_none_where(table.valid_from[part], NO_CODE))
        yield list(zip(*columns, strict=True))


def _none_where(values: npt.NDArray[Any], blank: int) -> list[int | None]:
    listed: list[int | None] = values.tolist()
    if (values == blank).any():
        return [None if value == blank else value for value in listed]
    return listed


def _read(connection: Connection, number: int, wanted: list[str], count: int) -> dict[str, Any]:
    """The columns of a rate table as int64 arrays, blanks as BLANK."""
    found = np.empty((count, len(wanted)), dtype=np.int64)
    cells = ", ".join(name if name in _NEVER_BLANK else f"COALESCE({name}, ?)" for name in wanted)
    blanks = (BLANK,) * sum(name not in _NEVER_BLANK for name in wanted)
    query = f"SELECT {cells} FROM {rate_rows.name} WHERE table_id = ? ORDER BY position"
    start = 0
    for rows in read_columns(connection, query, (*blanks, number)):
        found[start : start + len(rows)] = rows
        start += len(rows)
    return {name: np.ascontiguousarray(found[:, place]) for place, name in enumerate(wanted)}


def _or_no_code(values: npt.NDArray[np.int64]) -> npt.NDArray[np.int32]:
    return np.where(values == BLANK, NO_CODE, values).astype(np.int32)


def _names(connection: Connection, number: int) -> tuple[str, ...]:
    found: list[Row[Any]] = list(
        connection.execute(select(names.c.name).where(names.c.list_id == number).order_by(names.c.code))
    )
    return tuple(row.name for row in found)
