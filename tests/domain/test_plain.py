from __future__ import annotations

import dataclasses
import datetime
import json
import math
import typing
from enum import Enum
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.plain import canonical, from_plain, to_plain
from blendapp.domain.results import Result

FINITE = st.floats(allow_nan=False, allow_infinity=False)
TEXT = st.text(st.characters(exclude_categories=["Cs"]), max_size=8)
LEAVES: dict[Any, st.SearchStrategy[Any]] = {
    str: TEXT, float: FINITE, int: st.integers(0, 2**40), bool: st.booleans(), datetime.date: st.dates(),
    type(None): st.none(),
}


def anything(declared: Any) -> st.SearchStrategy[Any]:
    """Any content of an annotated field, dataclasses inside included."""
    inside = typing.get_args(declared)
    if typing.get_origin(declared) is tuple:
        if inside[-1] is Ellipsis:
            return st.lists(anything(inside[0]), max_size=2).map(tuple)
        return st.tuples(*map(anything, inside))
    if inside:
        return st.one_of(*map(anything, inside))
    if dataclasses.is_dataclass(declared):
        hints = typing.get_type_hints(declared)
        return st.builds(declared, **{f.name: anything(hints[f.name]) for f in dataclasses.fields(declared)})
    return st.sampled_from(declared) if issubclass(declared, Enum) else LEAVES[declared]


@given(anything(Result))
def test_a_result_comes_back_equal_from_its_plain_form_through_json(result: Result) -> None:
    text = canonical(to_plain(result))
    back = from_plain(Result, json.loads(text))
    assert back == result
    assert canonical(to_plain(back)) == text
    for field in dataclasses.fields(result):
        assert type(getattr(back, field.name)) is type(getattr(result, field.name)), field.name


@dataclasses.dataclass(frozen=True)
class Old:
    name: str
    on: datetime.date | None
    pairs: tuple[tuple[int, float], ...]
    later: str = "as before"


def test_a_field_that_a_plain_form_lacks_takes_its_default_and_one_too_many_is_left_out() -> None:
    plain = {"name": "n", "on": "2026-03-02", "pairs": [[1, 2]], "gone": 4}
    back = from_plain(Old, plain)
    assert back == Old("n", datetime.date(2026, 3, 2), ((1, 2.0),))
    assert isinstance(back.pairs[0][1], float)


@pytest.mark.parametrize("plain", [
    {"on": None, "pairs": []}, {"name": "n", "on": "yesterday", "pairs": []}, {"name": "n", "on": None, "pairs": [[1]]},
    {"name": "n", "on": None, "pairs": 5},
])
def test_data_of_another_shape_is_an_error(plain: Any) -> None:
    with pytest.raises((TypeError, ValueError, KeyError, AttributeError)):
        from_plain(Old, plain)


def test_the_canonical_text_does_not_depend_on_the_order_of_keys_and_holds_no_endless_number() -> None:
    assert canonical({"b": 1, "a": [1.5, "é"]}) == canonical({"a": [1.5, "é"], "b": 1}) == '{"a":[1.5,"é"],"b":1}'
    with pytest.raises(ValueError, match="JSON"):
        canonical({"a": math.inf})
