"""Brings the tables up to date when records are opened, from whichever version made them."""

from pathlib import Path

from alembic import command
from alembic.config import Config
from alembic.script import ScriptDirectory
from sqlalchemy import Connection, Engine, inspect, text

from engine.records.failures import NotSaved

SCRIPTS = Path(__file__).with_name("migrations")
LATEST = "0004"
"""The newest version of the tables; a test holds it against the migrations."""

_ADVISORY_LOCK = 7_205_318
"""A number of our own, so that of several processes that open new records one makes the tables."""


def bring_up_to_date(engine: Engine, version: str = "head") -> None:
    """Make the tables, or change them step by step to a version; all in one transaction.

    Raises:
        NotSaved: a newer version of Hithe made the records.
    """
    with engine.connect() as connection, connection.begin():
        found = version_of(connection)
    if found == LATEST and version == "head":
        return
    if found is not None and found not in known_versions():
        raise NotSaved(
            f"These records were made by a newer Hithe (their tables are version {found}, this one "
            f"knows up to {LATEST}). Nothing was touched: open them with the newer one, or update this one."
        )
    with engine.connect() as connection:
        if engine.dialect.name == "sqlite":
            # A table that is made anew is dropped first, which must not take the rows that point to it along.
            connection.exec_driver_sql("PRAGMA foreign_keys = OFF")
            connection.rollback()
        writer = connection.execution_options(hithe_writes=True)
        try:
            with writer.begin():
                if engine.dialect.name == "postgresql":
                    writer.execute(text("SELECT pg_advisory_xact_lock(:number)"), {"number": _ADVISORY_LOCK})
                command.upgrade(_config(writer), version)
        finally:
            connection.invalidate()  # a fresh connection minds its foreign keys again


def version_of(connection: Connection) -> str | None:
    """Which version the tables are, None where there are none."""
    if not inspect(connection).has_table("alembic_version"):
        return None
    return connection.execute(text("SELECT version_num FROM alembic_version")).scalar()


def known_versions() -> list[str]:
    """All versions that this program can bring up to date, newest first."""
    return [script.revision for script in ScriptDirectory.from_config(_config(None)).walk_revisions()]


def _config(connection: Connection | None) -> Config:
    config = Config()
    config.set_main_option("script_location", str(SCRIPTS).replace("%", "%%"))
    config.attributes["connection"] = connection
    return config
