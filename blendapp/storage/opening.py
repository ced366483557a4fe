"""Making and opening mill files: what is refused, what can only be read, and what is upgraded first."""

from __future__ import annotations

import contextlib
import os
import sqlite3
import weakref
from collections.abc import Callable, Sequence
from pathlib import Path

import sqlalchemy
from filelock import FileLock, Timeout
from sqlalchemy import Connection
from sqlalchemy.exc import DBAPIError, OperationalError

from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.storage import schema, writing
from blendapp.storage.connections import connect, disconnect, keep_log, pragma, told_of, transaction
from blendapp.storage.entries import Role
from blendapp.storage.faults import Cause, MillFileError, fault, from_system
from blendapp.storage.files import made_whole, may_write, must_be_read_alone, on_local_disk, require_mill_file
from blendapp.storage.store import Store, copy_into, registry

# Files that this process has open, so that its windows share one connection and one lock: two connections of one
# process would be two writers. Weak, so that a store nobody holds does not stay.
_open: weakref.WeakValueDictionary[str, Store] = weakref.WeakValueDictionary()


def create(path: str | Path, changes: Sequence[Change] = (), what: str | None = None, who: str = "") -> Store:
    """Make a new mill file and open it. It appears whole, with its first records, or not at all; never overwrites.

    changes: the first records, stored as one entry of the log that cannot be undone (role "record"). Raises
    MillFileError, and ValueError as Store.write does.
    """
    _refuse_address(path)
    target = Path(path)
    listed = tuple(changes)
    with told_of(target), made_whole(target) as unfinished:
        connection = connect(unfinished, writable=True)
        try:
            _fill(connection, listed, _("New mill") if what is None else what, who)
        finally:
            disconnect(connection)
    return open_store(target)


def _fill(connection: Connection, changes: tuple[Change, ...], what: str, who: str) -> None:
    from blendapp.storage.upgrading import upgrade

    with transaction(connection):
        upgrade(connection)
        pragma(connection, f"application_id = {schema.APPLICATION_ID}")
        if changes:
            writing.write(connection, what, changes, who, Role.RECORD, None)


def open_store(path: str | Path) -> Store:
    """Open a mill file; another window of this process that has it open shares the store.

    An older file is upgraded, after a copy of it was put beside it. A file that another process has open, or that may
    not be written, is opened to be read only: see Store.why_read_only. Raises MillFileError.
    """
    _refuse_address(path)
    given = Path(path)
    key = os.path.normcase(os.path.realpath(given))
    with registry:
        if (shared := _open.get(key)) is not None:
            return shared._share()
        store = _open_file(given, Path(os.path.realpath(given)), lambda: _open.pop(key, None))
        _open[key] = store
        return store


def _refuse_address(path: str | Path) -> None:
    if "://" in str(path):
        raise fault(Cause.ADDRESS, str(path))


def _open_file(given: Path, path: Path, forget: Callable[[], object]) -> Store:
    require_mill_file(given)
    with contextlib.ExitStack() as undone:
        read_only, lock = _take_lock(given, path)
        if lock is not None:
            undone.callback(lock.release)
        connection = connect(path, writable=read_only is None, immutable=must_be_read_alone(path))
        undone.callback(disconnect, connection)
        with told_of(given):
            _require_sound(connection, given)
            revision = _known_revision(connection, given)
            if read_only is None:
                keep_log(connection, write_ahead=on_local_disk(path))
            if revision != schema.REVISION:
                if read_only is not None:
                    raise fault(Cause.OLDER, given)
                _bring_up_to_date(connection, given, path, revision)
        undone.pop_all()

    def close() -> None:
        forget()
        if lock is not None:
            lock.release()

    return Store(path, connection, read_only, close)


def _take_lock(given: Path, path: Path) -> tuple[MillFileError | None, FileLock | None]:
    """Why the file can only be read, or the lock that keeps other processes from writing it.

    The operating system lets go of the lock when a process ends, however it ends; the empty lock file that may stay
    holds nobody up.
    """
    if not may_write(path):
        return fault(Cause.READ_ONLY, given), None
    lock = FileLock(path.with_name(f".{path.name}.lock"), timeout=0, thread_local=False)
    try:
        lock.acquire()
    except Timeout:
        return fault(Cause.HELD, given), None
    except (OSError, NotImplementedError):
        return fault(Cause.READ_ONLY, given), None
    with contextlib.suppress(OSError):  # whoever may write the mill file may take its lock
        os.chmod(lock.lock_file, path.stat().st_mode & 0o666)
    return None, lock


def _require_sound(connection: Connection, given: Path) -> None:
    if pragma(connection, "application_id") != [(schema.APPLICATION_ID,)]:
        raise fault(Cause.NOT_A_MILL_FILE, given)
    if pragma(connection, "quick_check(1)") != [("ok",)]:
        raise fault(Cause.DAMAGED, given)


def _bring_up_to_date(connection: Connection, given: Path, path: Path, revision: str) -> None:
    from blendapp.storage.upgrading import upgrade

    keep_copy(connection, path, revision)
    pragma(connection, "foreign_keys = OFF")  # a table that is made anew would else take its links with it
    try:
        with transaction(connection):
            upgrade(connection)
            if pragma(connection, "foreign_key_check"):
                raise fault(Cause.DAMAGED, given)
    except (MillFileError, DBAPIError):
        raise
    except Exception as error:  # a step of this program that cannot deal with this file
        text = _(
            "“{file}” could not be upgraded ({reason}) and is left as it was; "
            "go on with the version of this program that made it, and report this."
        )
        raise MillFileError(text.format(file=given, reason=error), Cause.OLDER, given) from error
    pragma(connection, "foreign_keys = ON")


def _known_revision(connection: Connection, given: Path) -> str:
    """The revision of the file; raises MillFileError for one that this program does not know, or none."""
    try:
        found = connection.execute(sqlalchemy.text("SELECT version_num FROM alembic_version")).scalar()
    except OperationalError as error:
        if getattr(error.orig, "sqlite_errorcode", None) != sqlite3.SQLITE_ERROR:
            raise
        found = None  # there is no such table
    if found is None:
        raise fault(Cause.DAMAGED, given)
    if found not in schema.REVISIONS:
        raise fault(Cause.NEWER, given)
    return str(found)


def keep_copy(connection: Connection, path: Path, revision: str) -> Path:
    """Put a copy of an open file beside it before an upgrade, under a name that is free; its path."""
    for attempt in range(1, 1000):
        number = "" if attempt == 1 else f" {attempt}"
        copy = path.with_name(f"{path.stem} before upgrade from {revision}{number}{path.suffix}")
        try:
            with made_whole(copy) as unfinished:
                copy_into(connection, unfinished)
        except MillFileError as error:
            if error.cause is not Cause.EXISTS:
                raise
        else:
            return copy
    raise from_system(FileExistsError(17, "too many copies"), path)
