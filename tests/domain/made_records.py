"""Records of every kind with any content, for property tests."""

from __future__ import annotations

import datetime
import typing
from enum import Enum
from typing import Any

from hypothesis import strategies as st

from blendapp.domain.formulas import Subject, SubjectKind
from blendapp.domain.ingredients import Tag
from blendapp.domain.records import KINDS, field_types

# A lone surrogate cannot be stored as UTF-8, and no keyboard makes one.
TEXT = st.text(st.characters(exclude_categories=["Cs"]), max_size=12)
FINITE = st.floats(allow_nan=False, allow_infinity=False)
IDS = st.integers(1, 2**40)

SUBJECTS = st.one_of(
    IDS.map(Subject.nutrient),
    st.lists(IDS, max_size=4).map(lambda ids: Subject.ingredients(*ids)),
    TEXT.map(Subject.of_class),
    st.sampled_from([Subject(SubjectKind.DRY_MATTER), Subject(SubjectKind.MOISTURE)]),
)

_PLAIN: dict[Any, st.SearchStrategy[Any]] = {
    str: TEXT, float: FINITE, int: IDS, bool: st.booleans(), datetime.date: st.dates(), Subject: SUBJECTS,
    datetime.datetime: st.datetimes(timezones=st.just(datetime.UTC)),
}


def _of(declared: Any) -> st.SearchStrategy[Any]:
    if typing.get_origin(declared) is tuple:
        return st.lists(st.sampled_from(Tag), unique=True).map(tuple)
    if isinstance(declared, type) and issubclass(declared, Enum):
        return st.sampled_from(declared)
    return _PLAIN[declared]


def records(kind: str) -> st.SearchStrategy[Any]:
    """Any record of a kind: every field with any content that its declaration allows."""
    cls = KINDS[kind]
    return st.builds(cls, **{
        name: st.none() | _of(inner) if optional else _of(inner) for name, (inner, optional) in field_types(cls).items()
    })
