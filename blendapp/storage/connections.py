"""One connection to one mill file, with the promises that the file makes; transactions on it."""

from __future__ import annotations

import contextlib
import sqlite3
from collections.abc import Iterator
from pathlib import Path

from sqlalchemy import Connection, create_engine
from sqlalchemy.exc import DBAPIError
from sqlalchemy.pool import StaticPool

from blendapp.domain.wording import _
from blendapp.storage.faults import Cause, MillFileError, from_sqlite

BUSY_S = 5.0  # how long to wait for another process that is reading or writing this moment


def connect(path: Path, *, writable: bool, immutable: bool = False) -> Connection:
    """The connection of a mill file, which it does not change. Transactions are begun by transaction() alone.

    immutable: the folder can take no file beside, and nobody can change the file. Raises MillFileError.
    """
    address = f"{path.absolute().as_uri()}?mode={'rw' if writable else 'ro'}{'&immutable=1' if immutable else ''}"

    def open_it() -> sqlite3.Connection:
        return sqlite3.connect(address, uri=True, timeout=BUSY_S, isolation_level=None, check_same_thread=False)

    engine = create_engine("sqlite+pysqlite://", creator=open_it, poolclass=StaticPool)
    with told_of(path):
        connection = engine.connect()
        try:
            pragma(connection, "synchronous = FULL")
            pragma(connection, "foreign_keys = ON")
            pragma(connection, "trusted_schema = OFF")
        except BaseException:
            disconnect(connection)
            raise
    return connection


def pragma(connection: Connection, text: str) -> list[tuple[object, ...]]:
    """The rows that one of SQLite's own statements answers."""
    result = connection.exec_driver_sql(f"PRAGMA {text}")
    return [tuple(row) for row in result] if result.returns_rows else []


def keep_log(connection: Connection, write_ahead: bool) -> None:
    """Choose how the file outlives a kill: a write-ahead log on local disks, a rollback journal elsewhere."""
    pragma(connection, f"journal_mode = {'WAL' if write_ahead else 'DELETE'}")


def disconnect(connection: Connection) -> None:
    """Close; what is committed is safe."""
    engine = connection.engine
    connection.close()
    engine.dispose()


def driver_of(connection: Connection) -> sqlite3.Connection:
    """Python's own connection, for SQLite's backup."""
    driver = connection.connection.driver_connection
    assert isinstance(driver, sqlite3.Connection)
    return driver


@contextlib.contextmanager
def told_of(path: Path) -> Iterator[None]:
    """Errors of the database that are about the file are raised as MillFileError; others pass."""
    try:
        yield
    except DBAPIError as error:
        told = from_sqlite(error.orig, path)
        if told is None:
            raise
        raise told from error
    except Unlinked as error:
        text = _(
            "The edit would leave a record in “{file}” that names one that is gone ({which}) and was not stored; "
            "correct it and repeat."
        )
        raise MillFileError(text.format(file=path, which=error), Cause.INCONSISTENT, path) from error
    except sqlite3.Error as error:
        told = from_sqlite(error, path)
        if told is None:
            raise
        raise told from error


class Unlinked(Exception):
    """A transaction would leave a record that names one that does not exist."""


@contextlib.contextmanager
def transaction(connection: Connection, writes: bool = True) -> Iterator[None]:
    """All or nothing. Foreign keys are checked at the end; anything raised inside leaves the file as it was."""
    connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")
    try:
        yield
        connection.exec_driver_sql("COMMIT")
    except BaseException as error:
        missing = _missing_link(connection, error)
        # SQLite may have rolled back on its own, as it does when the disk is full.
        if driver_of(connection).in_transaction:
            connection.exec_driver_sql("ROLLBACK")
        if missing:
            raise Unlinked(missing) from error
        raise


def _missing_link(connection: Connection, error: BaseException) -> str:
    """Which record names one that does not exist, where that is why a transaction could not end; else ""."""
    cause = error.orig if isinstance(error, DBAPIError) else None
    if getattr(cause, "sqlite_errorcode", None) != sqlite3.SQLITE_CONSTRAINT_FOREIGNKEY:
        return ""
    for table, row, target, _key in pragma(connection, "foreign_key_check"):
        return f"{table} {row} > {target}"
    return ""
