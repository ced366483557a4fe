"""One edit on its way into the file: the rows, the counters and the entry of the log. Runs inside a transaction."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Iterator
from itertools import islice
from typing import Any

from sqlalchemy import Connection, Delete, Select, Update, bindparam, delete, insert, select, update

from blendapp.domain import versions
from blendapp.domain.records import KINDS, Change, Record
from blendapp.storage.entries import Entry, Role
from blendapp.storage.rows import json_of, record_from_json, record_of, row_of, select_of
from blendapp.storage.schema import BATCH_NUMBER, counter, log_change, log_entry, table_of

_AT_ONCE = 500  # identifiers in one statement; SQLite takes at least 999 values in one


class ChangedElsewhere(Exception):
    """A row is not what the edit took it for."""


def net_of(changes: Iterable[Change]) -> dict[str, dict[int, tuple[Record | None, Record | None]]]:
    """For each kind and identifier the record before and after all changes of a list.

    Raises ValueError where two changes of one record do not follow each other, or one turns a record into another.
    """
    net: dict[str, dict[int, tuple[Record | None, Record | None]]] = {kind: {} for kind in KINDS}
    for change in changes:
        before, after = change.before, change.after
        if before is not None and after is not None and (type(before), before.id) != (type(after), after.id):
            raise ValueError(f"A change cannot turn {change.kind} {before.id} into another record.")
        of_kind = net[change.kind]
        if change.id in of_kind:
            first, latest = of_kind[change.id]
            if latest != before:
                raise ValueError(f"One edit changes {change.kind} {change.id} twice from different states.")
            before = first
        of_kind[change.id] = (before, after)
    return net


def write(
    connection: Connection, what: str, changes: tuple[Change, ...], who: str, role: Role, of: int | None
) -> Entry:
    """Check every record against its row, write the rows, move the counters, add to the log.

    Raises ChangedElsewhere, ValueError, or what the database raises; the transaction must then be rolled back.
    """
    net = net_of(changes)
    _compare(connection, net)
    _keep_approved(connection, changes)
    _move_counters(connection, changes)
    # Taking all rows out before putting any in lets two records swap a name that only one may have.
    for kind in reversed(KINDS):
        gone = [{"gone": id_} for id_, (before, _after) in net[kind].items() if before is not None]
        if gone:
            connection.execute(deletion_of(kind), gone)
    for kind in KINDS:
        rows = [row_of(kind, after) for _before, after in net[kind].values() if after is not None]
        if rows:
            connection.execute(insert(table_of(kind)), rows)
    return _add_entry(connection, what, changes, who, role, of)


def _compare(connection: Connection, net: dict[str, dict[int, tuple[Record | None, Record | None]]]) -> None:
    for kind, of_kind in net.items():
        standing = records_by_id(connection, kind, of_kind)
        for id_, (before, _after) in of_kind.items():
            if standing.get(id_) != before:
                raise ChangedElsewhere(f"{kind} {id_}")


def _keep_approved(connection: Connection, changes: tuple[Change, ...]) -> None:
    """Raises ValueError for an edit that would change an approved version: whoever asks, the file does not take it."""
    if any(change.kind in ("version", "acknowledgement") for change in changes):
        ids = {
            record.version_id for change in changes if change.kind == "acknowledgement"
            for record in (change.before, change.after) if record is not None
        }
        sentence = versions.forbidden(changes, records_by_id(connection, "version", ids).get)
        if sentence is not None:
            raise ValueError(sentence)


def records_by_id(connection: Connection, kind: str, ids: Iterable[int]) -> dict[int, Record]:
    """The records that stand in the file under these identifiers."""
    found: dict[int, Record] = {}
    column = table_of(kind).c.id
    rest = iter(ids)
    while some := list(islice(rest, _AT_ONCE)):
        rows = connection.execute(select_of(kind).where(column.in_(some)))
        found |= {record.id: record for record in (record_of(kind, row) for row in rows)}
    return found


def deletion_of(kind: str) -> Delete:
    """Takes one record out; its identifier is the value `gone`."""
    table = table_of(kind)
    return delete(table).where(table.c.id == bindparam("gone"))


def next_values(connection: Connection) -> dict[str, int]:
    """For each kind the first identifier never used, and under BATCH_NUMBER the first number; from 1."""
    stored = _counters(connection)
    return {name: stored.get(name, 1) for name in (*KINDS, BATCH_NUMBER)}


COUNTERS = select(counter.c.name, counter.c.next_value)


def moved_counter(name: str) -> Update:
    """Sets one counter to the value `next_value`."""
    return update(counter).where(counter.c.name == name)


def _counters(connection: Connection) -> dict[str, int]:
    rows = connection.execute(COUNTERS)
    return {str(name): int(value) for name, value in rows}


def _move_counters(connection: Connection, changes: tuple[Change, ...]) -> None:
    stored = _counters(connection)
    moved: dict[str, int] = {}

    def first_free(name: str) -> int:
        return moved.get(name, stored.get(name, 1))

    for change in changes:
        if change.after is None or change.before is not None:
            continue
        if change.kind == "batch" and change.id >= first_free("batch"):
            if change.after.number < first_free(BATCH_NUMBER):
                raise ChangedElsewhere(f"batch number {change.after.number}")
            moved[BATCH_NUMBER] = change.after.number + 1
        moved[change.kind] = max(first_free(change.kind), change.id + 1)
    for name, value in moved.items():
        if name not in stored:
            connection.execute(insert(counter), {"name": name, "next_value": value})
        elif value != stored[name]:
            connection.execute(moved_counter(name), {"next_value": value})


def _add_entry(
    connection: Connection, what: str, changes: tuple[Change, ...], who: str, role: Role, of: int | None
) -> Entry:
    made = datetime.datetime.now(datetime.UTC)
    row = {"made": made, "who": who, "what": what, "role": role.value, "of_id": of}
    key = connection.execute(insert(log_entry), row).inserted_primary_key
    assert key is not None
    entry = Entry(key[0], made, who, what, role, of, changes)
    rows = [
        {
            "entry_id": entry.id, "position": position, "kind": change.kind, "record_id": change.id,
            "before": json_of(change.before), "after": json_of(change.after),
        }
        for position, change in enumerate(changes)
    ]
    if rows:
        connection.execute(insert(log_change), rows)
    return entry


def entries(connection: Connection, after: int, last: int | None, with_changes: bool) -> list[Entry]:
    """The entries of the log above one identifier and up to another, oldest first."""
    heads = connection.execute(heads_between(after, last)).all()
    changes: dict[int, list[Change]] = {head.id: [] for head in heads}
    if heads and with_changes:
        for entry_id, change in _changes(connection, heads[0].id, heads[-1].id):
            changes[entry_id].append(change)
    return [
        Entry(head.id, head.made, head.who, head.what, Role(head.role), head.of_id, tuple(changes[head.id]))
        for head in heads
    ]


def heads_between(after: int, last: int | None) -> Select[Any]:
    """Entries of the log above one identifier and up to another, without their changes."""
    wanted = select(log_entry).where(log_entry.c.id > after).order_by(log_entry.c.id)
    return wanted if last is None else wanted.where(log_entry.c.id <= last)


def changes_between(first: int, last: int) -> Select[Any]:
    """The changes of the entries from one identifier to another."""
    wanted = select(log_change).where(log_change.c.entry_id.between(first, last))
    return wanted.order_by(log_change.c.entry_id, log_change.c.position)


def _changes(connection: Connection, first: int, last: int) -> Iterator[tuple[int, Change]]:
    for row in connection.execute(changes_between(first, last)):
        yield row.entry_id, Change(record_from_json(row.kind, row.before), record_from_json(row.kind, row.after))
