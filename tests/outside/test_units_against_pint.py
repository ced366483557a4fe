"""Every factor of the unit table against pint, which states its units independently (its default registry)."""

from __future__ import annotations

import pint
import pytest

from blendapp.domain import units

# Pint has neither international units of activity nor equivalents; as dimensions of their own they check the "per".
REGISTRY = pint.UnitRegistry(cache_folder=None)
REGISTRY.define("iu_of_activity = [activity_of_a_vitamin]")
REGISTRY.define("equivalent_of_charge = [equivalents]")
REGISTRY.define("one_thing = [things]")

CONCENTRATION = {
    "%": ("percent", "dimensionless"),
    "g/kg": ("gram / kilogram", "dimensionless"),
    "mg/kg": ("milligram / kilogram", "dimensionless"),
    "ug/kg": ("microgram / kilogram", "dimensionless"),
    "ppm": ("ppm", "dimensionless"),
    "ppb": ("nanogram / gram", "dimensionless"),
    "g/t": ("gram / metric_ton", "dimensionless"),
    "g/short ton": ("gram / short_ton", "dimensionless"),
    "mg/lb": ("milligram / pound", "dimensionless"),
    "IU/kg": ("iu_of_activity / kilogram", "iu_of_activity / kilogram"),
    "IU/lb": ("iu_of_activity / pound", "iu_of_activity / kilogram"),
    "mEq/kg": ("milliequivalent_of_charge / kilogram", "milliequivalent_of_charge / kilogram"),
    "MJ/kg": ("megajoule / kilogram", "megajoule / kilogram"),
    "kJ/kg": ("kilojoule / kilogram", "megajoule / kilogram"),
    "kcal/kg": ("kilocalorie / kilogram", "megajoule / kilogram"),
    "kcal/lb": ("kilocalorie / pound", "megajoule / kilogram"),
    "Mcal/kg": ("megacalorie / kilogram", "megajoule / kilogram"),
    "/kg": ("one_thing / kilogram", "one_thing / kilogram"),
}

PER_DAY = {
    "kg/day": ("kilogram / day", "kilogram / day"),
    "g/day": ("gram / day", "kilogram / day"),
    "mg/day": ("milligram / day", "kilogram / day"),
    "IU/day": ("iu_of_activity / day", "iu_of_activity / day"),
    "mEq/day": ("milliequivalent_of_charge / day", "milliequivalent_of_charge / day"),
    "MJ/day": ("megajoule / day", "megajoule / day"),
    "kcal/day": ("kilocalorie / day", "megajoule / day"),
    "Mcal/day": ("megacalorie / day", "megajoule / day"),
    "/day": ("one_thing / day", "one_thing / day"),
}

BLEND_INCLUSION = {
    "%": ("percent", "dimensionless"),
    "kg/t": ("kilogram / metric_ton", "dimensionless"),
    "g/t": ("gram / metric_ton", "dimensionless"),
    "lb/short ton": ("pound / short_ton", "dimensionless"),
}

RATION_INCLUSION = {
    "kg/day": ("kilogram / day", "kilogram / day"),
    "g/day": ("gram / day", "kilogram / day"),
    "lb/day": ("pound / day", "kilogram / day"),
}

PRICE_PER_KG = {
    "t": ("metric_ton", "kilogram"),
    "kg": ("kilogram", "kilogram"),
    "100 kg": ("100 * kilogram", "kilogram"),
    "lb": ("pound", "kilogram"),
    "cwt": ("short_hundredweight", "kilogram"),
    "long cwt": ("long_hundredweight", "kilogram"),
    "short ton": ("short_ton", "kilogram"),
    "long ton": ("long_ton", "kilogram"),
}


def factor(expression: str, base: str) -> float:
    return float(REGISTRY.Quantity(expression).to(base).magnitude)


@pytest.mark.parametrize("name", units.CONCENTRATION)
def test_a_unit_of_concentration_has_the_factor_that_pint_gives(name: str) -> None:
    assert units.CONCENTRATION[name].factor == pytest.approx(factor(*CONCENTRATION[name]), rel=1e-12)


@pytest.mark.parametrize("name", units.PER_DAY)
def test_a_unit_of_intake_has_the_factor_that_pint_gives(name: str) -> None:
    assert units.PER_DAY[name].factor == pytest.approx(factor(*PER_DAY[name]), rel=1e-12)


@pytest.mark.parametrize("name", units.BLEND_INCLUSION)
def test_a_unit_of_inclusion_in_a_blend_has_the_factor_that_pint_gives(name: str) -> None:
    assert units.BLEND_INCLUSION[name] == pytest.approx(factor(*BLEND_INCLUSION[name]), rel=1e-12)


@pytest.mark.parametrize("name", units.RATION_INCLUSION)
def test_a_unit_of_inclusion_in_a_ration_has_the_factor_that_pint_gives(name: str) -> None:
    assert units.RATION_INCLUSION[name] == pytest.approx(factor(*RATION_INCLUSION[name]), rel=1e-12)


@pytest.mark.parametrize("name", units.PRICE_PER_KG)
def test_a_mass_that_a_price_is_per_weighs_what_pint_says(name: str) -> None:
    assert units.PRICE_PER_KG[name] == pytest.approx(factor(*PRICE_PER_KG[name]), rel=1e-12)


def test_the_two_hundredweights_weigh_what_pint_says() -> None:
    assert units.CWT_MEANINGS["100 lb"] == pytest.approx(factor("short_hundredweight", "kilogram"), rel=1e-12)
    assert units.CWT_MEANINGS["112 lb"] == pytest.approx(factor("long_hundredweight", "kilogram"), rel=1e-12)


@pytest.mark.parametrize("unit", units.CONCENTRATION)
@pytest.mark.parametrize("to", units.CONCENTRATION)
def test_two_units_convert_exactly_where_pint_finds_them_of_one_kind(unit: str, to: str) -> None:
    (source, base), (target, _base) = CONCENTRATION[unit], CONCENTRATION[to]
    try:
        expected = REGISTRY.Quantity(3.5, source).to(target).magnitude
    except pint.DimensionalityError:
        with pytest.raises(ValueError, match="same kind"):
            units.convert(3.5, unit, to)
        return
    assert base == _base
    assert units.convert(3.5, unit, to) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("name", units.CONCENTRATION)
def test_the_intake_of_a_nutrient_is_counted_in_a_unit_of_its_own_kind(name: str) -> None:
    own = units.own_per_day(name)
    assert units.PER_DAY[own].family is units.CONCENTRATION[name].family


MEASURES = {
    "mg": "milligram", "t": "metric_ton", "oz": "ounce", "lb": "pound", "short ton": "short_ton",
    "long ton": "long_ton", "ml": "milliliter", "US gal": "gallon", "imperial gal": "imperial_gallon",
    "kg": "kilogram", "g": "gram", "l": "liter",
}


@pytest.mark.parametrize("name", [*units.MASS_KG, *units.VOLUME_L])
def test_a_mass_or_volume_that_a_step_may_be_typed_in_is_what_pint_says(name: str) -> None:
    found = {**units.MASS_KG, **units.VOLUME_L}[name]
    base = "kilogram" if name in units.MASS_KG else "liter"
    assert found == pytest.approx(factor(MEASURES[name], base), rel=1e-12)
