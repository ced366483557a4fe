"""Every kind of record that a mill file holds, and its plain form for the file and the change log."""

from __future__ import annotations

import datetime
import types
import typing
from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields
from enum import Enum
from functools import cache
from typing import Any

from blendapp.domain.formulas import Formula, Limit, MixingStep, Subject
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.mills import (
    Acknowledgement,
    FormulaVersion,
    MillInfo,
    Person,
    PriceList,
    PrintedBatch,
    Synonym,
)
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale, Site, Supplier
from blendapp.domain.quotes import Quote

Record = Any  # one of the classes of KINDS; typing.Union of them adds nothing that a reader can use

# In an order in which rows can be written: a record refers only to kinds above its own, made_by_formula_id and
# replaces_id apart.
KINDS: dict[str, type[Record]] = {
    "site": Site,
    "supplier": Supplier,
    "mill": MillInfo,
    "person": Person,
    "scale": Scale,
    "mixer": Mixer,
    "nutrient": Nutrient,
    "formula": Formula,
    "mixing_step": MixingStep,
    "ingredient": Ingredient,
    "value": Value,
    "price_list": PriceList,
    "lot": Lot,
    "lot_value": LotValue,
    "bin": Bin,
    "quote": Quote,
    "synonym": Synonym,
    "limit": Limit,
    "version": FormulaVersion,
    "acknowledgement": Acknowledgement,
    "batch": PrintedBatch,
}

KIND_OF: dict[type[Record], str] = {cls: kind for kind, cls in KINDS.items()}


@dataclass(frozen=True)
class Change:
    """One record before and after an edit; None where it did not or does no longer exist."""

    before: Record | None
    after: Record | None

    @property
    def kind(self) -> str:
        return KIND_OF[type(self.after if self.after is not None else self.before)]

    @property
    def id(self) -> int:
        record: Record = self.after if self.after is not None else self.before
        return int(record.id)

    @property
    def reversed(self) -> Change:
        return Change(self.after, self.before)


def added(record: Record) -> Change:
    return Change(None, record)


def removed(record: Record) -> Change:
    return Change(record, None)


def field_type(declared: Any) -> tuple[Any, bool]:
    """The class behind a declared field and whether it may be None: `float | None` gives (float, True)."""
    if isinstance(declared, types.UnionType) or typing.get_origin(declared) is typing.Union:
        inside = [part for part in typing.get_args(declared) if part is not type(None)]
        return inside[0], len(inside) < len(typing.get_args(declared))
    return declared, False


_FIELD_TYPES: dict[type[Record], Mapping[str, tuple[Any, bool]]] = {}


def field_types(cls: type[Record]) -> Mapping[str, tuple[Any, bool]]:
    """For each field of a record class, in order: its class and whether it may be None."""
    found = _FIELD_TYPES.get(cls)
    if found is None:
        hints = typing.get_type_hints(cls)
        found = _FIELD_TYPES[cls] = {f.name: field_type(hints[f.name]) for f in fields(cls)}
    return found


def to_plain(record: Record) -> dict[str, Any]:
    """A record as text, numbers, booleans and None only, ready for JSON; dates in ISO 8601, tags joined by commas."""
    return {name: _plain(getattr(record, name)) for name in field_types(type(record))}


def from_plain(kind: str, plain: Mapping[str, Any]) -> Record:
    """The record behind its plain form; fields that the form lacks take their defaults."""
    found = {}
    for name, read in _readers(kind).items():
        if name in plain:
            value = plain[name]
            found[name] = value if read is None or value is None else read(value)
    return KINDS[kind](**found)


def _plain(value: Any) -> Any:
    if isinstance(value, Subject):
        return value.encode()
    if isinstance(value, tuple):
        return ", ".join(str(part) for part in value)
    if isinstance(value, datetime.datetime | datetime.date):
        return value.isoformat()
    return value.value if isinstance(value, Enum) else value


@cache
def _readers(kind: str) -> Mapping[str, Callable[[Any], Any] | None]:
    """For each field of a kind of record what turns its plain form into its value, None where they are the same."""
    return {name: _reader(declared) for name, (declared, _optional) in field_types(KINDS[kind]).items()}


def _reader(cls: Any) -> Callable[[Any], Any] | None:
    if typing.get_origin(cls) is tuple:
        inside = typing.get_args(cls)[0]
        return lambda value: tuple(inside(part) for part in str(value).split(", ") if part)
    if cls is Subject:
        return Subject.decode
    if cls in (datetime.date, datetime.datetime):
        return lambda value: cls.fromisoformat(value) if isinstance(value, str) else value
    if cls in (float, int):
        return lambda value: value if isinstance(value, bool) else cls(value)
    if isinstance(cls, type) and issubclass(cls, Enum):
        members = {member.value: member for member in cls}
        return lambda value: members[value] if value in members else cls(value)
    return None
