"""One edit on its way into the file: the rows, the counters and the entry of the log. Runs inside a transaction."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Iterator, Sequence
from itertools import islice
from typing import Any

from sqlalchemy import Connection, bindparam, delete, insert, select, update

from blendapp.domain.records import KINDS, Change, Record
from blendapp.storage.entries import Entry, Role
from blendapp.storage.rows import json_of, record_from_json, record_of, row_of, select_of
from blendapp.storage.schema import BATCH_NUMBER, counter, log_change, log_entry, table_of

_AT_ONCE = 500  # identifiers in one statement; SQLite takes at least 999 values in one


class ChangedElsewhere(Exception):
    """A row is not what the edit took it for."""


def require_plain(changes: Sequence[Change]) -> None:
    """Raises ValueError where a list of changes says two things about one record, or changes an identifier."""
    seen: set[tuple[str, int]] = set()
    for change in changes:
        before, after = change.before, change.after
        if before is not None and after is not None and (type(before), before.id) != (type(after), after.id):
            raise ValueError(f"A change cannot turn {change.kind} {before.id} into another record.")
        if (change.kind, change.id) in seen:
            raise ValueError(f"One edit names {change.kind} {change.id} twice.")
        seen.add((change.kind, change.id))


def write(
    connection: Connection, what: str, changes: tuple[Change, ...], who: str, role: Role, of: int | None
) -> Entry:
    """Check every record against its row, write the rows, move the counters, add to the log.

    Raises ChangedElsewhere, ValueError, or what the database raises; the transaction must then be rolled back.
    """
    by_kind = {kind: [change for change in changes if change.kind == kind] for kind in KINDS}
    _compare(connection, by_kind)
    _move_counters(connection, changes)
    # Taking all rows out before putting any in lets two records swap a name that only one may have.
    for kind in reversed(KINDS):
        gone = [change.id for change in by_kind[kind] if change.before is not None]
        if gone:
            connection.execute(_deletion(kind), [{"gone": id_} for id_ in gone])
    for kind in KINDS:
        rows = [row_of(kind, change.after) for change in by_kind[kind] if change.after is not None]
        if rows:
            connection.execute(insert(table_of(kind)), rows)
    return _add_entry(connection, what, changes, who, role, of)


def _compare(connection: Connection, by_kind: dict[str, list[Change]]) -> None:
    for kind, changes in by_kind.items():
        standing = records_by_id(connection, kind, (change.id for change in changes))
        for change in changes:
            if standing.get(change.id) != change.before:
                raise ChangedElsewhere(f"{kind} {change.id}")


def records_by_id(connection: Connection, kind: str, ids: Iterable[int]) -> dict[int, Record]:
    """The records that stand in the file under these identifiers."""
    found: dict[int, Record] = {}
    column = table_of(kind).c.id
    rest = iter(ids)
    while some := list(islice(rest, _AT_ONCE)):
        rows = connection.execute(select_of(kind).where(column.in_(some)))
        found |= {record.id: record for record in (record_of(kind, row) for row in rows)}
    return found


def _deletion(kind: str) -> Any:
    table = table_of(kind)
    return delete(table).where(table.c.id == bindparam("gone"))


def next_values(connection: Connection) -> dict[str, int]:
    """For each kind the first identifier never used, and under BATCH_NUMBER the first number; from 1."""
    stored = _counters(connection)
    return {name: stored.get(name, 1) for name in (*KINDS, BATCH_NUMBER)}


def _counters(connection: Connection) -> dict[str, int]:
    rows = connection.execute(select(counter.c.name, counter.c.next_value))
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
            connection.execute(update(counter).where(counter.c.name == name), {"next_value": value})


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


def entries(connection: Connection, after: int, last: int | None) -> list[Entry]:
    """The entries of the log above an identifier, oldest first; with `last` only the newest so many of them."""
    wanted = select(log_entry).where(log_entry.c.id > after).order_by(log_entry.c.id.desc())
    heads = connection.execute(wanted if last is None else wanted.limit(last)).all()[::-1]
    if not heads:
        return []
    changes: dict[int, list[Change]] = {head.id: [] for head in heads}
    for entry_id, change in _changes(connection, heads[0].id):
        changes[entry_id].append(change)
    return [
        Entry(head.id, head.made, head.who, head.what, Role(head.role), head.of_id, tuple(changes[head.id]))
        for head in heads
    ]


def _changes(connection: Connection, first: int) -> Iterator[tuple[int, Change]]:
    order = (log_change.c.entry_id, log_change.c.position)
    for row in connection.execute(select(log_change).where(log_change.c.entry_id >= first).order_by(*order)):
        yield row.entry_id, Change(record_from_json(row.kind, row.before), record_from_json(row.kind, row.after))
