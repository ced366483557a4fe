from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain import limit_units, units
from blendapp.domain.formulas import Amounts, Limit, LimitBasis, LimitKind, Subject, SubjectKind
from blendapp.domain.library import Library
from tests.mills import Maker

PER_DAY, DRY = LimitBasis.PER_DAY, LimitBasis.DRY_MATTER
SUBJECTS = {
    "protein": Subject.nutrient(1), "energy": Subject.nutrient(2), "vitamin": Subject.nutrient(3),
    "balance": Subject.nutrient(4), "index": Subject.nutrient(5), "trace": Subject.nutrient(6),
    "calories": Subject.nutrient(7), "dry": Subject(SubjectKind.DRY_MATTER), "water": Subject(SubjectKind.MOISTURE),
    "wheat": Subject.ingredients(1), "both": Subject.ingredients(1, 2), "cereals": Subject.of_class("Cereals"),
}


@pytest.fixture(scope="module")
def library() -> Library:
    make = Maker()
    for name, unit in (("Protein", "%"), ("Energy", "MJ/kg"), ("Vitamin", "IU/kg"), ("Balance", "mEq/kg"),
                       ("Index", ""), ("Trace", "mg/kg"), ("Calories", "kcal/lb")):
        make.nutrient(name, unit)
    make.ingredient("Wheat", class_name="Cereals")
    make.ingredient("Maize")
    return make.library


def limit(kind: str, subject: str, per: str | None = None, **fields: Any) -> Limit:
    return Limit(1, 1, LimitKind(kind), SUBJECTS[subject], None if per is None else SUBJECTS[per], **fields)


# kind, subject, per, unit, basis, amounts, unit shown, factor
LIMITS = [
    ("nutrient", "protein", None, "", LimitBasis.AS_FED, "blend", "%", 0.01),
    ("nutrient", "protein", None, "g/kg", DRY, "ration", "g/kg", 0.001),
    ("nutrient", "protein", None, "g/short ton", LimitBasis.AS_FED, "blend", "g/short ton", 1 / 907184.74),
    ("nutrient", "protein", None, "", PER_DAY, "ration", "kg/day", 1.0),
    ("nutrient", "protein", None, "g/day", PER_DAY, "ration", "g/day", 0.001),
    ("nutrient", "energy", None, "", LimitBasis.AT_DRY_MATTER, "blend", "MJ/kg", 1.0),
    ("nutrient", "energy", None, "kcal/kg", LimitBasis.AS_FED, "blend", "kcal/kg", 0.004184),
    ("nutrient", "energy", None, "Mcal/day", PER_DAY, "ration", "Mcal/day", 4.184),
    ("nutrient", "calories", None, "", LimitBasis.AS_FED, "blend", "kcal/lb", 0.004184 / 0.45359237),
    ("nutrient", "calories", None, "", PER_DAY, "ration", "kcal/day", 0.004184),
    ("nutrient", "vitamin", None, "IU/lb", LimitBasis.AS_FED, "blend", "IU/lb", 1 / 0.45359237),
    ("nutrient", "vitamin", None, "", PER_DAY, "ration", "IU/day", 1.0),
    ("nutrient", "balance", None, "", LimitBasis.AS_FED, "blend", "mEq/kg", 1.0),
    ("nutrient", "index", None, "", LimitBasis.AS_FED, "blend", "", 1.0),
    ("nutrient", "index", None, "", PER_DAY, "ration", "/day", 1.0),
    ("nutrient", "trace", None, "ppb", LimitBasis.AS_FED, "blend", "ppb", 1e-9),
    ("nutrient", "dry", None, "", LimitBasis.AS_FED, "blend", "%", 0.01),
    ("nutrient", "dry", None, "", PER_DAY, "ration", "kg/day", 1.0),
    ("nutrient", "water", None, "g/kg", LimitBasis.AS_FED, "blend", "g/kg", 0.001),
    ("ingredient", "wheat", None, "", LimitBasis.AS_FED, "blend", "%", 0.01),
    ("ingredient", "wheat", None, "kg/t", LimitBasis.AS_FED, "blend", "kg/t", 0.001),
    ("ingredient", "wheat", None, "g/t", LimitBasis.AS_FED, "blend", "g/t", 1e-6),
    ("ingredient", "wheat", None, "lb/short ton", LimitBasis.AS_FED, "blend", "lb/short ton", 0.0005),
    ("ingredient", "wheat", None, "", LimitBasis.AS_FED, "ration", "kg/day", 1.0),
    ("ingredient", "wheat", None, "g/day", LimitBasis.AS_FED, "ration", "g/day", 0.001),
    ("ingredient", "wheat", None, "lb/day", LimitBasis.AS_FED, "ration", "lb/day", 0.45359237),
    ("ingredient", "wheat", None, "% of dry matter", LimitBasis.AS_FED, "ration", "% of dry matter", 0.01),
    ("group", "both", None, "", LimitBasis.AS_FED, "blend", "%", 0.01),
    ("group", "cereals", None, "% of dry matter", LimitBasis.AS_FED, "ration", "% of dry matter", 0.01),
    ("practical", "wheat", None, "", LimitBasis.AS_FED, "blend", "%", 0.01),
    ("count", "both", None, "", LimitBasis.AS_FED, "blend", "", 1.0),
    ("ratio", "protein", "energy", "", LimitBasis.AS_FED, "blend", "", 0.01),
    ("ratio", "protein", "energy", "g/MJ", LimitBasis.AS_FED, "blend", "g/MJ", 0.001),
    ("ratio", "protein", "energy", "g/Mcal", LimitBasis.AS_FED, "blend", "g/Mcal", 0.001 / 4.184),
    ("ratio", "trace", "protein", "", LimitBasis.AS_FED, "ration", "", 1e-4),
    ("ratio", "vitamin", "energy", " IU / MJ ", LimitBasis.AS_FED, "blend", " IU / MJ ", 1.0),
    ("ratio", "both", "wheat", "", LimitBasis.AS_FED, "blend", "", 1.0),
    ("ratio", "protein", "dry", "", LimitBasis.AS_FED, "blend", "", 1.0),
]


@pytest.mark.parametrize(("kind", "subject", "per", "unit", "basis", "amounts", "shown", "factor"), LIMITS)
def test_a_limit_is_shown_in_its_unit_and_has_its_factor(
    library: Library, kind: str, subject: str, per: str | None, unit: str, basis: LimitBasis, amounts: str,
    shown: str, factor: float,
) -> None:
    one = limit(kind, subject, per, unit=unit, basis=basis)
    assert limit_units.shown_unit(library, one, Amounts(amounts)) == shown
    assert limit_units.factor(library, one, Amounts(amounts)) == pytest.approx(factor, rel=1e-13)


def test_every_kind_has_a_case_here() -> None:
    assert {case[0] for case in LIMITS} == set(LimitKind)


@pytest.mark.parametrize(
    ("one", "amounts", "words"),
    [
        (limit("nutrient", "protein", unit="MJ/kg"), "blend", "does not measure"),
        (limit("nutrient", "protein", unit="IU/day", basis=PER_DAY), "ration", "does not measure"),
        (limit("nutrient", "protein", unit="g/kg", basis=PER_DAY), "ration", "kg/day"),
        (limit("nutrient", "protein", unit="g/day"), "ration", "g/kg"),
        (limit("nutrient", "dry", unit="MJ/kg"), "blend", "does not measure"),
        (limit("ingredient", "wheat", unit="kg/day"), "blend", "lb/short ton"),
        (limit("ingredient", "wheat", unit="%"), "ration", "lb/day"),
        (limit("group", "both", unit="% of dry matter"), "blend", "lb/short ton"),
        (limit("ratio", "protein", "energy", unit="MJ/g"), "blend", "like g/MJ"),
        (limit("ratio", "protein", "energy", unit="g"), "blend", "like g/MJ"),
        (limit("ratio", "both", "wheat", unit="g/g"), "blend", "no unit"),
    ],
)
def test_a_unit_of_another_kind_is_refused_with_the_mend(
    library: Library, one: Limit, amounts: str, words: str
) -> None:
    with pytest.raises(ValueError, match=words):
        limit_units.factor(library, one, Amounts(amounts))


@pytest.mark.parametrize("name", units.CONCENTRATION)
def test_a_concentration_and_its_intake_are_displayed_bounds_of_one_kind(library: Library, name: str) -> None:
    make = Maker()
    make.nutrient("Thing", name)
    one = Limit(1, 1, LimitKind.NUTRIENT, Subject.nutrient(1), minimum=1.0)
    assert limit_units.factor(make.library, one, Amounts.BLEND) == units.CONCENTRATION[name].factor
