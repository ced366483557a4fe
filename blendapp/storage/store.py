"""An open mill file."""

from __future__ import annotations

import contextlib
import sqlite3
import threading
from collections.abc import Callable, Iterator, Sequence
from pathlib import Path
from typing import Any

from sqlalchemy import Connection
from sqlalchemy.exc import DBAPIError

from blendapp.domain.records import KINDS, Change, Record, to_plain
from blendapp.domain.wording import _
from blendapp.storage import writing
from blendapp.storage.connections import disconnect, driver_of, pragma, told_of, transaction
from blendapp.storage.entries import Entry, Role
from blendapp.storage.faults import Cause, MillFileError, fault
from blendapp.storage.files import identity, made_whole
from blendapp.storage.rows import record_of, select_of
from blendapp.storage.schema import BATCH_NUMBER

# Held while a file is opened or closed, so that no window gets a store that another is closing.
registry = threading.RLock()


class Store:
    """An open mill file, shared by all windows of this process. May be called from any thread; calls take turns.

    path: the file itself, links followed. writable, why_read_only: False with a sentence where the file can only be
    read. Every method may raise MillFileError; a write that raises has changed nothing.
    """

    def __init__(
        self, path: Path, connection: Connection, read_only: MillFileError | None, on_close: Callable[[], None]
    ) -> None:
        self.path = path
        self._read_only = read_only
        self._connection = connection
        self._on_close = on_close
        self._identity = identity(path)
        self._turn = threading.RLock()
        self._users = 1

    @property
    def writable(self) -> bool:
        return self._read_only is None

    @property
    def why_read_only(self) -> str | None:
        return None if self._read_only is None else str(self._read_only)

    @property
    def held_elsewhere(self) -> bool:
        """Whether it can only be read because another process has it open, which may let it go."""
        return self._read_only is not None and self._read_only.cause is Cause.HELD

    # -- reading

    def read_all(self) -> dict[str, list[Record]]:
        """Every record, by kind, in the order of identifiers."""
        with self._reading():
            return {kind: self._records(kind) for kind in KINDS}

    def next_ids(self) -> dict[str, int]:
        """For each kind the first identifier that was never used, not even by a record since deleted."""
        with self._reading():
            found = writing.next_values(self._connection)
        return {kind: found[kind] for kind in KINDS}

    def next_batch_number(self) -> int:
        """The first batch number that was never given.

        It is taken by the write that adds a batch with it, and by nothing else; a new batch with a number already
        given is refused there, even if that batch was deleted since.
        """
        with self._reading():
            return writing.next_values(self._connection)[BATCH_NUMBER]

    def entries(self, after: int = 0, last: int | None = None, with_changes: bool = True) -> list[Entry]:
        """The change log above the identifier `after`, up to `last` included, oldest first.

        with_changes: False leaves the changes of every entry empty, for a list of what can be undone.
        """
        with self._reading():
            return writing.entries(self._connection, after, last, with_changes)

    def dump(self) -> dict[str, list[dict[str, Any]]]:
        """Every record in plain form, without the log: equal dumps are equal mills."""
        return {kind: [to_plain(record) for record in records] for kind, records in self.read_all().items()}

    # -- writing

    def write(
        self, what: str, changes: Sequence[Change], who: str = "", role: str = "edit", of: int | None = None
    ) -> Entry:
        """Store one edit, whole, with one entry of the log; when this returns the disk has it.

        changes: in any order of records; of one record in the order of their happening. Every `before` must equal what
        the file holds. of: with role "undo" or "redo" the entry that is undone or redone. Raises MillFileError, and
        ValueError for changes that no file could take: two of one record that do not follow each other, a number that
        is not finite, a moment without a time zone, an unknown unit, a change of an approved version.
        """
        listed = tuple(changes)
        with self._turn:
            self._require_writable()
            try:
                with told_of(self.path), transaction(self._connection):
                    return writing.write(self._connection, what, listed, who, Role(role), of)
            except writing.ChangedElsewhere as error:
                raise fault(Cause.CHANGED_ELSEWHERE, self.path) from error

    def _require_writable(self) -> None:
        if self._read_only is not None:
            raise fault(self._read_only.cause, self.path)
        if identity(self.path) != self._identity:
            raise fault(Cause.MOVED, self.path)

    # -- the file

    def backup(self, path: str | Path) -> None:
        """Save a copy under a new name, whole, while the file stays in use. Never overwrites."""
        target = Path(path).absolute()
        with self._turn, told_of(target), made_whole(target) as unfinished:
            copy_into(self._connection, unfinished)

    def close(self) -> None:
        """One window less; the last one puts the log into the file, removes it, and lets the file go."""
        with registry, self._turn:
            self._users -= 1
            if self._users == 0:
                try:
                    if self.writable:
                        _merge_log(self._connection)
                finally:
                    disconnect(self._connection)
                    self._on_close()

    def _share(self) -> Store:
        """One window more."""
        with self._turn:
            self._users += 1
            return self

    def _records(self, kind: str) -> list[Record]:
        return [record_of(kind, row) for row in self._connection.execute(select_of(kind))]

    @contextlib.contextmanager
    def _reading(self) -> Iterator[None]:
        with self._turn, told_of(self.path):
            try:
                with transaction(self._connection, writes=False):
                    yield
            except (ValueError, KeyError, TypeError, DBAPIError) as error:
                if isinstance(error, DBAPIError) and getattr(error.orig, "sqlite_errorcode", 0) != sqlite3.SQLITE_ERROR:
                    raise  # told_of says what the file system did; this branch is a table or column that is not there
                text = _("“{file}” holds something that cannot be read ({reason}); open a copy of it that you saved.")
                reason = getattr(error, "orig", error)
                raise MillFileError(text.format(file=self.path, reason=reason), Cause.DAMAGED, self.path) from error


def copy_into(connection: Connection, target: Path) -> None:
    """Copy an open file into an empty one with SQLite's own backup, and leave that without a log beside it."""
    copy = sqlite3.connect(target, isolation_level=None)
    try:
        driver_of(connection).backup(copy)
        copy.execute("PRAGMA journal_mode = DELETE").fetchall()
    finally:
        copy.close()


def _merge_log(connection: Connection) -> None:
    """Put the write-ahead log into the file and remove it; if another process reads the file now, only empty it."""
    pragma(connection, "busy_timeout = 100")
    try:
        pragma(connection, "journal_mode = DELETE")
    except DBAPIError:
        with contextlib.suppress(DBAPIError):  # else the log stays beside the file, and the next opening takes it in
            pragma(connection, "wal_checkpoint(TRUNCATE)")
