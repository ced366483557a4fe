"""Frozen results as plain data for JSON, and back: nested dataclasses, tuples, enumerations and dates.

Records of the mill file have a flat form of their own, records.to_plain.
"""

from __future__ import annotations

import datetime
import json
import types
import typing
from dataclasses import fields, is_dataclass
from enum import Enum
from functools import cache
from typing import Any


def to_plain(value: Any) -> Any:
    """Dictionaries, lists, text, numbers, booleans and None only; dates in ISO 8601."""
    if isinstance(value, Enum):
        return value.value
    if is_dataclass(value) and not isinstance(value, type):
        return {f.name: to_plain(getattr(value, f.name)) for f in fields(value)}
    if isinstance(value, tuple | list):
        return [to_plain(part) for part in value]
    if isinstance(value, datetime.datetime | datetime.date):
        return value.isoformat()
    return value


def from_plain(declared: Any, plain: Any) -> Any:
    """What to_plain made plain: declared is a dataclass or the annotation of one of its fields.

    A field that the plain form lacks takes its default, one that the class lacks is left out. Raises ValueError,
    TypeError, KeyError or AttributeError for data of another shape.
    """
    if plain is None:
        return None
    if isinstance(declared, types.UnionType) or typing.get_origin(declared) is typing.Union:
        return from_plain(next(part for part in typing.get_args(declared) if part is not type(None)), plain)
    if typing.get_origin(declared) is tuple:
        inside = typing.get_args(declared)
        if inside[-1] is Ellipsis:
            return tuple(from_plain(inside[0], part) for part in plain)
        return tuple(from_plain(one, part) for one, part in zip(inside, plain, strict=True))
    if is_dataclass(declared) and isinstance(declared, type):
        return declared(**{name: from_plain(hint, plain[name]) for name, hint in _hints(declared) if name in plain})
    if declared in (datetime.date, datetime.datetime):
        return declared.fromisoformat(plain)
    if declared is float:
        return float(plain)
    return declared(plain) if isinstance(declared, type) and issubclass(declared, Enum) else plain


@cache
def _hints(cls: type) -> tuple[tuple[str, Any], ...]:
    hints = typing.get_type_hints(cls)
    return tuple((f.name, hints[f.name]) for f in fields(cls) if f.init)


def canonical(plain: Any) -> str:
    """The one JSON text of plain data: keys sorted, no spaces. Raises ValueError for a number that is not finite."""
    return json.dumps(plain, ensure_ascii=False, allow_nan=False, sort_keys=True, separators=(",", ":"))
