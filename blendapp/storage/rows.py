"""Records as rows of their tables, and back."""

from __future__ import annotations

import datetime
import json
import math
import typing
from collections.abc import Callable, Mapping, Sequence
from enum import Enum
from functools import cache
from typing import Any

from sqlalchemy import Select, select

from blendapp.domain import units
from blendapp.domain.formulas import Subject
from blendapp.domain.records import KINDS, Record, field_types, from_plain, to_plain
from blendapp.storage.schema import table_of

# Columns that no record holds, and how they follow from the record.
DERIVED: dict[str, dict[str, Callable[[Record], float | None]]] = {
    "value": {"canonical": lambda value: value.canonical},
    "lot_value": {"canonical": lambda value: value.amount * units.concentration(value.unit).factor},
    "quote": {"price_per_t": lambda quote: quote.price_per_t},
}


def row_of(kind: str, record: Record) -> dict[str, Any]:
    """The columns of a record, the derived ones included.

    Raises ValueError for a number that is not finite, a moment without a time zone, a unit without a canonical value.
    """
    row = {name: _column(getattr(record, name)) for name in field_types(KINDS[kind])}
    for name, derive in DERIVED.get(kind, {}).items():
        row[name] = derive(record)
    return row


@cache
def select_of(kind: str) -> Select[Any]:
    """All records of a kind in the order of their identifiers, with the columns that record_of takes."""
    table = table_of(kind)
    return select(*(table.c[name] for name in field_types(KINDS[kind]))).order_by(table.c.id)


def record_of(kind: str, row: Sequence[Any]) -> Record:
    """The record in a row of select_of. Raises ValueError, KeyError or TypeError where the row holds something else."""
    return _maker(kind)(row)


@cache
def _maker(kind: str) -> Callable[[Sequence[Any]], Record]:
    cls = KINDS[kind]
    converters = [_converter(declared) for declared, _optional in field_types(cls).values()]

    def make(row: Sequence[Any]) -> Record:
        return cls(*[
            value if convert is None or value is None else convert(value)
            for convert, value in zip(converters, row, strict=True)
        ])

    return make


def _converter(declared: Any) -> Callable[[Any], Any] | None:
    if typing.get_origin(declared) is tuple:
        inside = typing.get_args(declared)[0]
        return lambda text: tuple(inside(part) for part in text.split(", ") if part)
    if declared is Subject:
        return Subject.decode
    if isinstance(declared, type) and issubclass(declared, Enum):
        return {member.value: member for member in declared}.__getitem__
    return declared if declared in (float, int) else None


def _column(value: Any) -> Any:
    if isinstance(value, float) and not math.isfinite(value):
        raise ValueError(f"A mill file keeps no number {value}.")
    if isinstance(value, datetime.datetime) and value.tzinfo is None:
        raise ValueError(f"A moment needs its time zone; {value.isoformat()} has none.")
    if isinstance(value, Subject):
        return value.encode()
    if isinstance(value, tuple):
        return ", ".join(str(part) for part in value)
    return value.value if isinstance(value, Enum) else value


def json_of(record: Record | None) -> str | None:
    """A record as the log keeps it."""
    if record is None:
        return None
    return json.dumps(to_plain(record), ensure_ascii=False, allow_nan=False, separators=(",", ":"))


def record_from_json(kind: str, text: str | None) -> Record | None:
    """The record that the log keeps as JSON; fields that it lacks take their defaults."""
    if text is None:
        return None
    plain: Mapping[str, Any] = json.loads(text)
    return from_plain(kind, plain)
