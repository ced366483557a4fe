from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.checks import faults, oddities, quiet_range
from blendapp.domain.formulas import Amounts, Limit, LimitBasis, LimitKind, Subject, SubjectKind
from blendapp.domain.ingredients import Ingredient, Tag, Value
from blendapp.domain.mills import MillInfo
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from tests.mills import TODAY, Maker


def mill() -> Maker:
    """Two nutrients, three ingredients of which one is a class of its own and one only when listed, two formulas."""
    make = Maker()
    make.nutrient("Crude protein", "%", key="crude protein")
    make.nutrient("Balance", "mEq/kg", never_negative=False)
    make.nutrient("Energy", "MJ/kg")
    make.ingredient("Maize", 200, class_name="Cereals")
    make.ingredient("Wheat", 210, class_name="Cereals")
    make.ingredient("Premix", 900, tags=(Tag.ONLY_WHEN_LISTED,))
    make.formula("Mash")
    make.formula("Cow", amounts=Amounts.RATION)
    return make


def sentence(found: list[tuple[str, str]], field: str) -> str:
    assert [name for name, _text in found] == [field], found
    return found[0][1]


PROTEIN, BALANCE, ENERGY = Subject.nutrient(1), Subject.nutrient(2), Subject.nutrient(3)
MAIZE, BOTH = Subject.ingredients(1), Subject.ingredients(1, 2)


def limit(kind: str, subject: Subject, formula_id: int = 1, **fields: Any) -> Limit:
    return Limit(9, formula_id, LimitKind(kind), subject, **fields)


FAULTY = [
    (MillInfo(currency="usd"), "currency", "USD"),
    (MillInfo(currency="US"), "currency", "ISO 4217"),
    (MillInfo(currency="US1"), "currency", "“US1” is no currency code"),
    (MillInfo(ton_means="ton"), "ton_means", "short ton, long ton, t"),
    (MillInfo(cwt_means="50 kg"), "cwt_means", "100 lb, 112 lb"),
    (Nutrient(9, "Fat", "percent"), "unit", "g/kg"),
    (Nutrient(9, "Fat", key="oil"), "key", "crude fat"),
    (Nutrient(9, " crude  PROTEIN "), "name", "is taken"),
    (Nutrient(9, "dry matter"), "name", "built in"),
    (Nutrient(9, "Moisture"), "name", "built in"),
    (Nutrient(9, "  "), "name", "name is needed"),
    (Ingredient(9, "MAIZE"), "name", "is taken"),
    (Ingredient(9, "Hay", dry_matter_percent=100.5), "dry_matter_percent", "between 0 and 100 %; 100.5"),
    (Ingredient(9, "Hay", dry_matter_percent=-1), "dry_matter_percent", "between 0 and 100"),
    (Ingredient(9, "Hay", density_kg_per_l=0.0), "density_kg_per_l", "above 0"),
    (Ingredient(9, "Hay", bushel_lb=-56.0), "bushel_lb", "above 0"),
    (Ingredient(9, "Hay", stock_kg=math.nan), "stock_kg", "has an end"),
    (Ingredient(9, "Hay", stock_kg=-3.0), "stock_kg", "at least 0 kg; -3 is not"),
    (Value(9, 1, 1, 12.0, "percent"), "unit", "not known"),
    (Value(9, 1, 1, 12.0, "MJ/kg"), "unit", "does not measure Crude protein"),
    (Value(9, 1, 1, -0.1, "%"), "amount", "never be negative"),
    (Value(9, 1, 1, math.inf, "%"), "amount", "has an end"),
    (Value(9, 1, 1, 8.0, "%", n=0), "n", "at least 1"),
    (Value(9, 1, 1, 8.0, "%", sd=-0.5), "sd", "at least 0"),
    (Quote(9, 1, 200, "ton"), "per", "short ton"),
    (Quote(9, 1, 5, "bu"), "per", "Bushel lb"),
    (Quote(9, 1, math.nan), "price", "has an end"),
    (Quote(9, 1, 5, valid_from=TODAY, valid_to=TODAY.replace(day=1)), "valid_to", "before its first"),
    (Scale(9, "Big", 0.0), "step_kg", "above 0"),
    (Scale(9, "Big", 1.0, tolerance_percent=101), "tolerance_percent", "between 0 and 100"),
    (Scale(9, "Big", 1.0, 20.0, 10.0), "least_kg", "above the greatest"),
    (Mixer(9, "Mixer", 2000.0, 1000.0), "least_kg", "above the greatest"),
    (limit("nutrient", PROTEIN, minimum=20, maximum=18), "minimum", "20 is above the maximum 18"),
    (limit("nutrient", PROTEIN, minimum=20, unit="MJ/kg"), "unit", "does not measure"),
    (limit("nutrient", PROTEIN, minimum=20, unit="pct"), "unit", "not known"),
    (limit("nutrient", PROTEIN, minimum=20, basis=LimitBasis.PER_DAY), "basis", "no amount per day"),
    (limit("nutrient", PROTEIN, minimum=20, basis=LimitBasis.AT_DRY_MATTER), "basis", "88 %"),
    (limit("nutrient", PROTEIN, basis=LimitBasis.AT_DRY_MATTER, at_dry_matter_percent=101.0), "basis", "at most 100"),
    (limit("nutrient", Subject(SubjectKind.DRY_MATTER), minimum=80, basis=LimitBasis.DRY_MATTER), "basis", "says"),
    (limit("nutrient", MAIZE, minimum=20), "subject", "names a nutrient"),
    (limit("nutrient", PROTEIN, per=ENERGY), "per", "Only a ratio"),
    (limit("nutrient", PROTEIN, maximum=math.inf), "maximum", "leave it blank"),
    (limit("ingredient", MAIZE, minimum=-1), "minimum", "below 0"),
    (limit("ingredient", MAIZE, maximum=101), "maximum", "above the whole"),
    (limit("ingredient", MAIZE, maximum=1001, unit="kg/t"), "maximum", "1001 kg/t"),
    (limit("ingredient", MAIZE, maximum=2001, unit="lb/short ton"), "maximum", "above the whole"),
    (limit("ingredient", MAIZE, maximum=2, unit="kg/day"), "unit", "kg/t"),
    (limit("ingredient", MAIZE, maximum=2, unit="% of dry matter"), "unit", "not known here"),
    (limit("ingredient", MAIZE, 2, maximum=2, unit="%"), "unit", "kg/day"),
    (limit("ingredient", MAIZE, 2, maximum=101, unit="% of dry matter"), "maximum", "above the whole"),
    (limit("ingredient", MAIZE, 2, maximum=20, basis=LimitBasis.DRY_MATTER), "basis", "% of dry matter"),
    (limit("ingredient", BOTH, maximum=10), "subject", "one ingredient"),
    (limit("ingredient", Subject.of_class("Cereals"), maximum=10), "subject", "one ingredient"),
    (limit("group", PROTEIN, maximum=10), "subject", "ingredients, or one class"),
    (limit("group", BOTH, maximum=130), "maximum", "above the whole"),
    (limit("ratio", PROTEIN, minimum=1), "per", "needs what it is over"),
    (limit("ratio", PROTEIN, per=MAIZE, minimum=1), "per", "one of each"),
    (limit("ratio", PROTEIN, per=ENERGY, minimum=-1), "minimum", "below 0"),
    (limit("ratio", PROTEIN, per=ENERGY, minimum=1, unit="g/kg"), "unit", "like g/MJ"),
    (limit("ratio", MAIZE, per=BOTH, minimum=0.1, unit="%"), "unit", "leave “%” out"),
    (limit("practical", MAIZE), "minimum", "worth weighing"),
    (limit("practical", MAIZE, minimum=0.5, maximum=5), "maximum", "kind ingredient"),
    (limit("practical", MAIZE, 2, minimum=5, unit="% of dry matter"), "unit", "as fed"),
    (limit("count", BOTH), "maximum", "whole number"),
    (limit("count", BOTH, maximum=1.5), "maximum", "whole number"),
    (limit("count", BOTH, maximum=-1), "maximum", "whole number"),
    (limit("count", BOTH, minimum=1, maximum=1), "minimum", "maximum only"),
    (limit("count", BOTH, maximum=math.inf), "maximum", "has an end"),
]


@pytest.mark.parametrize(("record", "field", "words"), FAULTY)
def test_a_fault_is_found_in_its_field_with_its_mend(record: Any, field: str, words: str) -> None:
    assert words in sentence(faults(record, mill().library), field)


SOUND = [
    MillInfo(currency="EUR", ton_means="short ton", cwt_means="112 lb"),
    Nutrient(9, "Fat", "g/kg", key="crude fat"),
    Nutrient(9, "Rumen index", ""),
    Nutrient(1, "crude protein"),
    Ingredient(9, "Hay", dry_matter_percent=0.0),
    Ingredient(9, "Hay", dry_matter_percent=100.0, stock_kg=0.0),
    Value(9, 1, 1, 0.0, "%"),
    Value(9, 1, 2, -120.0, "mEq/kg"),
    Value(9, 1, 1, 90.0, "g/kg"),
    Quote(9, 1, 0.0),
    Quote(9, 1, -15.0, "kg"),
    Quote(9, 1, None),
    Quote(9, 1, 5, "bu", 56.0, valid_from=TODAY, valid_to=TODAY),
    Scale(9, "Big", 5.0, 20.0, 20.0, 0.0),
    limit("nutrient", PROTEIN, minimum=18, maximum=18),
    limit("nutrient", BALANCE, minimum=-50),
    limit("nutrient", PROTEIN, 2, minimum=1.2, basis=LimitBasis.PER_DAY, unit="kg/day"),
    limit("nutrient", PROTEIN, minimum=17, basis=LimitBasis.AT_DRY_MATTER, at_dry_matter_percent=100.0),
    limit("nutrient", Subject(SubjectKind.DRY_MATTER), 2, minimum=20, basis=LimitBasis.PER_DAY),
    limit("ingredient", MAIZE),
    limit("ingredient", MAIZE, maximum=2000, unit="lb/short ton"),
    limit("ingredient", MAIZE, maximum=1_000_000, unit="g/t"),
    limit("ingredient", MAIZE, 2, maximum=40, unit="% of dry matter"),
    limit("ingredient", MAIZE, 2, maximum=400),
    limit("group", Subject.of_class("Cereals"), maximum=100),
    limit("ratio", PROTEIN, per=ENERGY, minimum=10, unit="g/MJ"),
    limit("ratio", MAIZE, per=BOTH, maximum=0.5),
    limit("practical", MAIZE, minimum=0.5),
    limit("count", BOTH, maximum=1),
]


@pytest.mark.parametrize("record", SOUND)
def test_what_is_sound_is_neither_refused_nor_odd(record: Any) -> None:
    library = mill().library
    assert faults(record, library) == []
    assert oddities(record, library) == []


def test_every_fault_of_one_record_is_found_together() -> None:
    scale = Scale(9, " ", -1.0, -2.0, -3.0, 200.0)
    assert {name for name, _text in faults(scale, mill().library)} == {
        "name", "step_kg", "least_kg", "greatest_kg", "tolerance_percent"
    }


def test_minimum_above_maximum_does_not_hide_an_inclusion_outside_the_whole() -> None:
    found = faults(limit("ingredient", MAIZE, minimum=150, maximum=120), mill().library)
    assert [name for name, _text in found] == ["minimum", "minimum", "maximum"]


def test_an_ingredient_that_would_go_into_itself_is_refused_with_the_chain() -> None:
    library = mill().library
    maize = library.ingredient(1)
    text = sentence(faults(replace(maize, made_by_formula_id=1), library), "made_by_formula_id")
    assert "“Maize” would go into itself (Maize < Maize)" in text
    assert "maximum of 0" in text
    assert library.ingredient(1) == maize


ODD = [
    (Value(9, 1, 3, 101.0, "MJ/kg"), None, ""),
    (Value(9, 1, 1, 281.0, "%"), None, ""),
    (limit("group", Subject.ingredients(1, 3), maximum=10), "subject", "Premix is not admitted"),
    (limit("ratio", MAIZE, per=Subject.ingredients(1, 3), maximum=0.5), "per", "Premix is not admitted"),
    (limit("group", Subject.of_class("Meals"), maximum=10), "subject", "No admitted ingredient has the class Meals"),
    (limit("practical", Subject.ingredients(3), minimum=0.5), "subject", "Premix is not admitted"),
    (limit("count", BOTH, maximum=2), "maximum", "says nothing"),
    (limit("count", BOTH, maximum=12), "maximum", "says nothing"),
]


@pytest.mark.parametrize(("record", "field", "words"), ODD)
def test_an_oddity_is_let_in_and_said(record: Any, field: str | None, words: str) -> None:
    library = mill().library
    assert faults(record, library) == []
    found = oddities(record, library)
    if field is None:
        assert found == []
    else:
        assert words in sentence(found, field)


def test_more_than_the_whole_is_odd_save_for_protein() -> None:
    make = mill()
    fat = make.nutrient("Fat", "g/kg", key="crude fat")
    library = make.library
    assert "more than the whole" in sentence(oddities(Value(9, 1, fat.id, 1001.0, "g/kg"), library), "amount")
    assert oddities(Value(9, 1, fat.id, 1000.0, "g/kg"), library) == []
    assert oddities(Value(9, 1, 1, 2810.0, "g/kg"), library) == []


@pytest.mark.parametrize("unit", ["%", "g/kg", "mg/kg"])
def test_within_the_quiet_range_nothing_is_said_of_an_amount(unit: str) -> None:
    make = mill()
    fat = make.nutrient("Fat", "g/kg", key="crude fat")
    least, greatest = quiet_range(fat, unit)
    for amount in (least, greatest):
        value = Value(9, 1, fat.id, amount, unit)
        assert faults(value, make.library) == []
        assert oddities(value, make.library) == []
    assert faults(Value(9, 1, fat.id, least - 1e-9, unit), make.library)
    assert oddities(Value(9, 1, fat.id, greatest * (1 + 1e-9), unit), make.library)


def test_a_nutrient_that_may_be_negative_has_no_quiet_least() -> None:
    assert quiet_range(Nutrient(1, "Balance", "mEq/kg", never_negative=False), "mEq/kg")[0] == -math.inf


def test_a_taken_name_is_free_again_once_its_record_is_gone() -> None:
    library = mill().library
    library.apply([Change(library.ingredient(1), None)])
    assert faults(Ingredient(9, "Maize"), library) == []
