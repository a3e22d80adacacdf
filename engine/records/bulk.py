"""Many rows at once, by the quickest way each database has."""

from collections.abc import Iterable, Sequence
from typing import Any

from sqlalchemy import Connection, Table, insert

from engine.records.decimals import Row


def insert_rows(connection: Connection, table: Table, rows: Sequence[Row]) -> None:
    """Put rows into a table; all of them name the same columns."""
    if rows:
        connection.execute(insert(table), list(rows))


def insert_columns(
    connection: Connection,
    table: Table,
    names: Sequence[str],
    chunks: Iterable[Sequence[Sequence[Any]]],
) -> None:
    """Put in very many rows of plain values.

    names: the columns; chunks: some thousands of rows each, in the order of the columns
    """
    columns = ", ".join(names)
    if connection.dialect.name == "postgresql":
        text = f"COPY {table.name} ({columns}) FROM STDIN"
        cursor: Any = connection.connection.cursor()
        with cursor, cursor.copy(text) as copy:
            for chunk in chunks:
                copy.write("".join(_line(row) for row in chunk))
        return
    blanks = ", ".join("?" * len(names))
    for chunk in chunks:
        connection.exec_driver_sql(f"INSERT INTO {table.name} ({columns}) VALUES ({blanks})", list(chunk))


def _line(row: Sequence[Any]) -> str:
    """A row of numbers and truth values as PostgreSQL's COPY reads it; it holds no text that needs care."""
    return "\t".join(["\\N" if value is None else str(value) for value in row]) + "\n"
