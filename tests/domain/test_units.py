from __future__ import annotations

import pytest

from blendapp.domain import units


@pytest.mark.parametrize(
    ("per", "to_a_tonne"), [("cwt", 22.04623), ("short ton", 1.10231), ("long ton", 0.98421), ("kg", 1000.0),
                            ("100 kg", 10.0), ("t", 1.0), ("lb", 2204.62262)]
)
def test_a_price_per_a_mass_becomes_the_price_of_a_tonne_by_the_stated_factor(per: str, to_a_tonne: float) -> None:
    assert round(units.price_per_t(1.0, per), 5) == to_a_tonne


@pytest.mark.parametrize(
    ("grain", "to_a_tonne"),
    [("Maize", 39.36826), ("Corn", 39.36826), ("Wheat", 36.74371), ("Soya", 36.74371), ("Soybeans", 36.74371),
     ("Barley", 45.92964), ("Oats", 68.89446)],
)
def test_the_legal_bushel_gives_the_stated_factor(grain: str, to_a_tonne: float) -> None:
    weight = units.legal_bushel_lb(grain)
    assert weight is not None
    assert round(units.price_per_t(1.0, "bu", weight), 5) == to_a_tonne


@pytest.mark.parametrize("name", ["Soybean meal", "Maize gluten meal", "Wheat bran", "Oats, hulled", "", "Grain"])
def test_what_is_made_from_a_grain_has_no_legal_bushel(name: str) -> None:
    assert units.legal_bushel_lb(name) is None


@pytest.mark.parametrize("name", ["Wheat grain", "Grain, wheat", "WHOLE OATS", "barley, whole"])
def test_words_that_leave_a_grain_what_it_is_leave_it_its_bushel(name: str) -> None:
    assert units.legal_bushel_lb(name) is not None


@pytest.mark.parametrize("weight", [None, 0.0])
def test_a_price_per_bushel_of_unknown_weight_is_refused_with_the_mend(weight: float | None) -> None:
    with pytest.raises(ValueError, match="Bushel lb"):
        units.price_per_t(5.0, "bu", weight)


@pytest.mark.parametrize("per", ["ton", "tonne", "T", "", "bushel"])
def test_a_bare_ton_is_never_guessed(per: str) -> None:
    with pytest.raises(ValueError, match="short ton"):
        units.price_per_t(5.0, per)


@pytest.mark.parametrize("unit", ["g", "percent", "MG/KG", "kg/t", "mg/day"])
def test_an_unknown_unit_is_refused_with_those_that_are_known(unit: str) -> None:
    with pytest.raises(ValueError, match=r"mg/kg.*Mcal/kg"):
        units.concentration(unit)
    with pytest.raises(ValueError, match=r"kg/day.*MJ/day"):
        units.per_day("mg/kg")


def test_a_blank_unit_is_a_bare_number_per_kg() -> None:
    assert units.concentration("").name == "/kg"
    assert units.own_per_day("") == "/day"


@pytest.mark.parametrize(
    ("unit", "day"), [("%", "kg/day"), ("g/kg", "g/day"), ("MJ/kg", "MJ/day"), ("IU/lb", "IU/day"), ("ppm", "mg/day"),
                      ("mEq/kg", "mEq/day"), ("Mcal/kg", "Mcal/day"), ("kcal/lb", "kcal/day")]
)
def test_an_intake_is_counted_in_the_numerator_of_the_nutrient(unit: str, day: str) -> None:
    assert units.own_per_day(unit) == day


def test_every_unit_of_concentration_has_an_intake() -> None:
    assert {units.own_per_day(name) for name in units.CONCENTRATION} == set(units.PER_DAY)


def test_a_kilocalorie_is_4_184_kilojoules() -> None:
    assert units.convert(1.0, "kcal/kg", "kJ/kg") == pytest.approx(4.184, rel=1e-14)
