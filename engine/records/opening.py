"""Where the records are, and how they are opened: SQLite in the user's folder, or PostgreSQL by URL."""

import os
import sqlite3
import time
from collections import OrderedDict
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from threading import Lock
from typing import Any

from platformdirs import user_data_path
from sqlalchemy import URL, Connection, Engine, create_engine, event, make_url
from sqlalchemy.exc import ArgumentError, NoSuchModuleError

from engine.records.failures import NotSaved, reason_of, saving
from engine.records.migrating import bring_up_to_date

VARIABLE = "HITHE_RECORDS"
"""The environment variable that says where the records are."""

BUSY_SECONDS = 15
CONNECT_SECONDS = 10
KEPT = 6
"""How many uploaded weeks and rate tables a process keeps in memory, since they never change."""


@dataclass(frozen=True)
class Records:
    """The open records. `where` is their name for a person, without a password."""

    engine: Engine
    where: str
    _kept: "OrderedDict[tuple[str, object], Any]" = field(default_factory=OrderedDict, repr=False)
    _lock: Lock = field(default_factory=Lock, repr=False)

    @contextmanager
    def read(self) -> Iterator[Connection]:
        """A connection that sees one state of the records."""
        with self.engine.connect() as connection:
            if self.engine.dialect.name == "postgresql":
                connection = connection.execution_options(isolation_level="REPEATABLE READ")
            with connection.begin():
                yield connection

    @contextmanager
    def write(self) -> Iterator[Connection]:
        """A connection whose work is all there on leaving, or not at all."""
        with self.engine.connect() as connection:
            writer = connection.execution_options(hithe_writes=True)
            with writer.begin():
                yield writer

    def kept(self, key: tuple[str, object]) -> Any:
        """What was kept in memory under a key, None where there is nothing."""
        with self._lock:
            if key in self._kept:
                self._kept.move_to_end(key)
            return self._kept.get(key)

    def keep(self, key: tuple[str, object], value: Any) -> None:
        """Keep in memory what never changes on disk."""
        with self._lock:
            self._kept[key] = value
            while len(self._kept) > KEPT:
                self._kept.popitem(last=False)

    def close(self) -> None:
        self.engine.dispose()


def default_place() -> str:
    """What HITHE_RECORDS says, or the file in the user's data folder."""
    return os.environ.get(VARIABLE) or str(user_data_path("hithe") / "records.sqlite")


def open_records(place: str | Path | None = None) -> Records:
    """Open the records, make them if there are none, and bring their tables up to date.

    place: a database URL (sqlite:/// or postgresql://) or the path of a file; None: `default_place()`

    Raises:
        NotSaved: they cannot be opened, or a newer version of Hithe made them.
    """
    url = url_of(default_place() if place is None else place)
    where = f"in {url.database}" if _is_sqlite(url) else f"at {url.set(drivername='postgresql')}"
    try:
        engine = _sqlite(url) if _is_sqlite(url) else _postgresql(url)
    except (ModuleNotFoundError, NoSuchModuleError):
        raise NotSaved(
            f"There is no driver for the records {where}: install Hithe with `pip install 'hithe[postgres]'`."
        ) from None
    except OSError as error:
        raise NotSaved(f"The records {where} cannot be opened. {reason_of(error)}") from error
    with saving("anything yet, the records could not be opened", where):
        bring_up_to_date(engine)
    return Records(engine, where)


def are_there(place: str | Path | None = None) -> bool:
    """Whether records may be found at a place: False where their file would first have to be made.

    Raises:
        NotSaved: it is no place for records.
    """
    url = url_of(default_place() if place is None else place)
    named = url.database or ""
    return not _is_sqlite(url) or named.startswith("file:") or Path(named).is_file()


def url_of(place: str | Path) -> URL:
    """The URL of a place given as a URL or as a path.

    Raises:
        NotSaved: it is neither, or of a database that cannot hold records.
    """
    text = str(place)
    if "://" not in text:
        return URL.create("sqlite", database=str(Path(text).expanduser()))
    try:
        url = make_url(text)
    except ArgumentError:
        raise NotSaved(
            "The place of the records is neither a path nor a URL: "
            "give a file, sqlite:///FILE or postgresql://USER@HOST/DATABASE."
        ) from None
    if url.drivername in ("postgresql", "postgres"):
        return url.set(drivername="postgresql+psycopg")
    if not _is_sqlite(url) and url.get_backend_name() != "postgresql":
        raise NotSaved(
            f"Records cannot be kept in '{url.drivername}': give a file, sqlite:///FILE or "
            f"postgresql://USER@HOST/DATABASE."
        )
    return url


def _is_sqlite(url: URL) -> bool:
    return url.drivername.split("+")[0] == "sqlite"


def _sqlite(url: URL) -> Engine:
    if url.database and url.database != ":memory:" and not url.database.startswith("file:"):
        Path(url.database).parent.mkdir(parents=True, exist_ok=True)
    engine = create_engine(url, connect_args={"timeout": BUSY_SECONDS})

    @event.listens_for(engine, "connect")
    def prepare(connection: sqlite3.Connection, _: object) -> None:
        connection.isolation_level = None  # transactions are begun below: the driver begins them too late
        _keep_a_log(connection)
        for setting in ("synchronous = FULL", "foreign_keys = ON"):
            connection.execute(f"PRAGMA {setting}").close()
        connection.create_function("lower", 1, _lower, deterministic=True)  # its own knows ASCII only

    @event.listens_for(engine, "begin")
    def begin(connection: Connection) -> None:
        # A reader that turns writer cannot wait for another writer, so writers say so at once.
        writes = connection.get_execution_options().get("hithe_writes")
        connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")

    return engine


def _keep_a_log(connection: sqlite3.Connection) -> None:
    """Sets the journal mode, for which SQLite does not always wait while another connection does the same."""
    until = time.monotonic() + BUSY_SECONDS
    while True:
        try:
            connection.execute("PRAGMA journal_mode = WAL").close()
            return
        except sqlite3.OperationalError as refused:
            if refused.sqlite_errorcode & 0xFF != sqlite3.SQLITE_BUSY or time.monotonic() > until:
                raise
            time.sleep(0.02)


def _lower(text: str | None) -> str | None:
    return None if text is None else text.lower()


def _postgresql(url: URL) -> Engine:
    engine = create_engine(
        url,
        pool_pre_ping=True,
        connect_args={"connect_timeout": CONNECT_SECONDS, "application_name": "hithe"},
    )

    @event.listens_for(engine, "connect")
    def prepare(connection: Any, _: object) -> None:
        with connection.cursor() as cursor:
            cursor.execute("SET synchronous_commit = on")
            cursor.execute(f"SET lock_timeout = '{BUSY_SECONDS}s'")
            cursor.execute("SET timezone = 'UTC'")
        connection.commit()

    return engine
