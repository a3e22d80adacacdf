"""Many rows at once, by the quickest way each database has."""

from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from sqlalchemy import Connection, Date, DateTime, Table, insert

from engine.records.decimals import Row

MANY = 50
"""From how many rows the quick way is worth its while."""

CHUNK = 20_000

_ESCAPES = str.maketrans({"\\": "\\\\", "\t": "\\t", "\n": "\\n", "\r": "\\r"})


def insert_rows(connection: Connection, table: Table, rows: Sequence[Row]) -> None:
    """Put rows into a table; all of them name the same columns, in the same order."""
    if len(rows) < MANY or any(isinstance(column.type, Date | DateTime) for column in table.columns):
        if rows:
            connection.execute(insert(table), list(rows))
        return
    insert_columns(connection, table, list(rows[0]), [[tuple(row.values()) for row in rows]])


def insert_columns(
    connection: Connection,
    table: Table,
    names: Sequence[str],
    chunks: Iterable[Sequence[Sequence[Any]]],
) -> None:
    """Put in very many rows of numbers, texts and truth values.

    names: the columns; chunks: some thousands of rows each, in the order of the columns
    """
    columns = ", ".join(names)
    if connection.dialect.name == "postgresql":
        text = f"COPY {table.name} ({columns}) FROM STDIN"
        cursor: Any = connection.connection.cursor()
        with cursor, cursor.copy(text) as copy:
            for chunk in chunks:
                copy.write("".join(map(_line, chunk)))
        return
    blanks = ", ".join("?" * len(names))
    for chunk in chunks:
        connection.exec_driver_sql(f"INSERT INTO {table.name} ({columns}) VALUES ({blanks})", list(chunk))


def read_columns(
    connection: Connection, text: str, arguments: tuple[Any, ...]
) -> Iterator[list[tuple[Any, ...]]]:
    """The rows of a query by the thousand, as the driver gives them.

    text: with `?` for each argument
    """
    driver: Any = connection.connection
    if connection.dialect.name == "postgresql":
        cursor = driver.cursor(name="rows")  # one with a name is kept on the server and read piece by piece
        text = text.replace("?", "%s")
    else:
        cursor = driver.cursor()
    cursor.execute(text, arguments)
    while rows := cursor.fetchmany(CHUNK):
        yield rows
    cursor.close()


def _line(row: Sequence[Any]) -> str:
    """A row as PostgreSQL's COPY reads it."""
    return "\t".join(map(_cell, row)) + "\n"


def _cell(value: Any) -> str:
    if value is None:
        return "\\N"
    return value.translate(_ESCAPES) if isinstance(value, str) else str(value)
