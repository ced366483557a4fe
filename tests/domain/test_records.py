from __future__ import annotations

import dataclasses
import json
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.formulas import LimitBasis, Subject, SubjectKind, read_basis, write_basis
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.records import KIND_OF, KINDS, Change, added, from_plain, removed, to_plain
from tests.domain.made_records import SUBJECTS, records


@pytest.mark.parametrize("kind", KINDS)
@given(data=st.data())
def test_a_record_comes_back_equal_from_its_plain_form_through_json(kind: str, data: st.DataObject) -> None:
    record = data.draw(records(kind))
    plain = json.loads(json.dumps(to_plain(record), allow_nan=False))
    back = from_plain(kind, plain)
    assert back == record
    for field in dataclasses.fields(record):
        assert type(getattr(back, field.name)) is type(getattr(record, field.name)), field.name


@pytest.mark.parametrize("kind", KINDS)
@given(data=st.data())
def test_the_plain_form_holds_only_text_numbers_booleans_and_none(kind: str, data: st.DataObject) -> None:
    for name, value in to_plain(data.draw(records(kind))).items():
        assert value is None or type(value) in (str, int, float, bool), name


def test_a_field_that_a_plain_form_lacks_takes_its_default() -> None:
    assert from_plain("nutrient", {"id": 4, "name": "Lysine"}) == Nutrient(4, "Lysine")


def test_every_kind_names_one_class_of_frozen_records_with_an_identifier() -> None:
    assert len(set(KINDS.values())) == len(KINDS)
    for kind, cls in KINDS.items():
        assert KIND_OF[cls] == kind
        assert cls.__dataclass_params__.frozen
        assert "id" in {field.name for field in dataclasses.fields(cls)}


def test_a_record_refers_only_to_kinds_above_its_own() -> None:
    refers = {"formula_id": "formula", "ingredient_id": "ingredient", "nutrient_id": "nutrient", "site_id": "site",
              "scale_id": "scale", "lot_id": "lot", "version_id": "version", "supplier_id": "supplier",
              "price_list_id": "price_list", "person_id": "person", "approved_by_id": "person",
              "made_by_id": "person"}
    order = list(KINDS)
    for kind, cls in KINDS.items():
        for field in dataclasses.fields(cls):
            if field.name in refers:
                assert order.index(refers[field.name]) < order.index(kind), (kind, field.name)


def test_a_change_knows_its_record_and_its_reverse() -> None:
    old, new = Nutrient(3, "Lysine"), Nutrient(3, "Lysin")
    change = Change(old, new)
    assert (change.kind, change.id, change.reversed) == ("nutrient", 3, Change(new, old))
    assert added(old).reversed == removed(old)
    assert (removed(old).kind, removed(old).id) == ("nutrient", 3)


@given(SUBJECTS)
def test_a_subject_comes_back_from_its_text(subject: Subject) -> None:
    assert Subject.decode(subject.encode()) == subject


@pytest.mark.parametrize(
    ("subject", "text"),
    [(Subject.nutrient(4), "nutrient 4"), (Subject.ingredients(2, 5), "ingredients 2 5"),
     (Subject.of_class("Cereals, whole"), "class Cereals, whole"), (Subject(SubjectKind.DRY_MATTER), "dry matter"),
     (Subject.of_class("dry matter"), "class dry matter")],
)
def test_a_subject_is_stored_as_words(subject: Subject, text: str) -> None:
    assert subject.encode() == text


def test_an_unknown_subject_is_refused() -> None:
    with pytest.raises(ValueError, match="tag"):
        Subject.decode("tag 3")


@given(st.integers(1, 1000).map(lambda n: n / 10))
def test_a_stated_dry_matter_comes_back_from_its_text(percent: float) -> None:
    assert read_basis(write_basis(LimitBasis.AT_DRY_MATTER, percent)) == (LimitBasis.AT_DRY_MATTER, percent)


@given(st.integers(1, 10_000_000).map(lambda n: n / 100_000))
def test_a_finely_stated_dry_matter_comes_back_from_its_text(percent: float) -> None:
    assert read_basis(write_basis(LimitBasis.AT_DRY_MATTER, percent)) == (LimitBasis.AT_DRY_MATTER, percent)


@pytest.mark.parametrize("basis", [LimitBasis.AS_FED, LimitBasis.DRY_MATTER, LimitBasis.PER_DAY])
def test_a_plain_basis_comes_back_from_its_text(basis: LimitBasis) -> None:
    assert read_basis(write_basis(basis, None)) == (basis, None)


@pytest.mark.parametrize(
    ("text", "found"),
    [("", (LimitBasis.AS_FED, None)), ("  As  Fed ", (LimitBasis.AS_FED, None)), ("DRY MATTER",
     (LimitBasis.DRY_MATTER, None)), ("at 88 % dry matter", (LimitBasis.AT_DRY_MATTER, 88.0)),
     ("at 87,5% DM", (LimitBasis.AT_DRY_MATTER, 87.5)), ("At 100 % Dry Matter", (LimitBasis.AT_DRY_MATTER, 100.0))],
)
def test_a_basis_is_read_as_people_write_it(text: str, found: tuple[LimitBasis, float | None]) -> None:
    assert read_basis(text) == found


@pytest.mark.parametrize(
    "text", ["dry", "at dry matter", "at 0 % dry matter", "at 100.1 % dry matter", "88 % dry matter", "at -5 % dm"]
)
def test_an_unknown_basis_is_refused_with_the_mend(text: str) -> None:
    with pytest.raises(ValueError, match=r"as fed, dry matter|above 0 and at most 100"):
        read_basis(text)


def test_names_of_fields_and_types_agree_with_the_dataclasses() -> None:
    from blendapp.domain.records import field_types

    for cls in KINDS.values():
        declared: dict[str, Any] = dict(field_types(cls))
        assert list(declared) == [field.name for field in dataclasses.fields(cls)]
        for field in dataclasses.fields(cls):
            if field.default is None:
                assert declared[field.name][1], f"{cls.__name__}.{field.name} may be None by default"
