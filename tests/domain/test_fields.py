from __future__ import annotations

import dataclasses
import math

import pytest

from blendapp.domain.fields import FIELDS, Field, field_of, fields_of
from blendapp.domain.records import KINDS


def test_no_field_of_a_kind_is_declared_twice_nor_two_headed_alike() -> None:
    names = [(field.kind, field.name) for field in FIELDS]
    headings = [(field.kind, field.heading) for field in FIELDS]
    assert len(set(names)) == len(names)
    assert len(set(headings)) == len(headings)


def test_every_field_is_an_attribute_of_its_kind_of_record() -> None:
    for field in FIELDS:
        assert field.name in {f.name for f in dataclasses.fields(KINDS[field.kind])}, field


def test_a_field_is_found_by_kind_and_name() -> None:
    assert field_of("scale", "step_kg").heading == "Step kg"
    assert [field.name for field in fields_of("mixer")] == ["name", "least_kg", "greatest_kg", "site_id"]
    with pytest.raises(KeyError):
        field_of("mixer", "colour")


@pytest.mark.parametrize("field", [field for field in FIELDS if field.least is not None])
def test_the_least_and_the_greatest_are_allowed_and_a_hair_beyond_is_not(field: Field) -> None:
    assert field.least is not None
    assert field.fault(field.least) is None
    said = field.fault(math.nextafter(field.least, -math.inf))
    assert said is not None
    assert field.label in said
    if field.greatest is not None:
        assert field.fault(field.greatest) is None
        assert field.fault(math.nextafter(field.greatest, math.inf)) is not None


@pytest.mark.parametrize("field", [field for field in FIELDS if field.above is not None])
def test_an_exclusive_end_is_not_allowed(field: Field) -> None:
    assert field.above is not None
    assert "must be above" in (field.fault(field.above) or "")
    assert field.fault(math.nextafter(field.above, math.inf)) is None


@pytest.mark.parametrize("field", FIELDS)
def test_a_blank_is_never_a_fault(field: Field) -> None:
    assert field.fault(None) is None
