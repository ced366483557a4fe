"""Contents from atomic masses, conversions of basis and energy, and shares of urea, through formulas of the program.

Figures and their sources stand in data/feed_checks.json.
"""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain import units
from blendapp.domain.cautions import npn_crude_protein_percent
from blendapp.domain.formulas import Amounts
from blendapp.domain.ingredients import Basis, Tag
from blendapp.domain.results import Result, Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker

CHECKS: dict[str, Any] = json.loads((Path(__file__).parent / "data" / "feed_checks.json").read_text())
MASSES = CHECKS["atomic_masses"]
# Elements of a compound in the table, and the group that counts as itself in feeds.
NOT_ELEMENTS = {"lysine", "methionine", "threonine", "tryptophan", "CP_equivalent_Nx6_25"}


def atoms(formula: str) -> dict[str, int]:
    """Counts of atoms in a chemical formula such as Ca(H2PO4)2.H2O."""
    total: dict[str, int] = {}
    for part in formula.split("."):
        count, rest = re.fullmatch(r"(\d*)(.*)", part).groups()  # type: ignore[union-attr]
        while "(" in rest:
            rest = re.sub(r"\(([^()]*)\)(\d*)", lambda m: m.group(1) * int(m.group(2) or 1), rest)
        for element, number in re.findall(r"([A-Z][a-z]?)(\d*)", rest):
            total[element] = total.get(element, 0) + int(number or 1) * int(count or 1)
    return total


def solved(make: Maker) -> Result:
    result = formulate(make.library, 1, TODAY)
    assert result.status is Status.OPTIMAL, result.cause
    return result


@pytest.mark.parametrize("compound", CHECKS["stoichiometry"], ids=lambda c: c["compound"])
def test_a_pure_compound_brings_what_its_atoms_weigh(compound: dict[str, Any]) -> None:
    """Half of it with half of something without: the mix has half of what the atoms say, in % and in g/kg."""
    counts = atoms(compound["formula"])
    mass = sum(MASSES[element] * number for element, number in counts.items())
    assert mass == pytest.approx(compound["molar_mass"], abs=0.002)
    make = Maker()
    content = {}
    for name, printed in compound["percent"].items():
        if name not in NOT_ELEMENTS:
            from_atoms = 100 * MASSES[name] * counts[name] / mass
            assert from_atoms == pytest.approx(printed, abs=0.002)
        elif name == "CP_equivalent_Nx6_25":
            assert 100 * MASSES["N"] * counts["N"] / mass * 6.25 == pytest.approx(printed, abs=0.01)
        content[name] = 10 * printed
        make.nutrient(name, "g/kg")
    make.ingredient("Pure", 500, content)
    make.ingredient("Filler", 100, dict.fromkeys(content, 0.0))
    feed = make.formula()
    make.limit(feed, "ingredient", "Pure", 50, 50)
    for name in content:
        make.limit(feed, "nutrient", name, unit="%")
    result = solved(make)
    for limit, (name, printed) in zip(result.limits[1:], compound["percent"].items(), strict=True):
        assert limit.name == name
        assert limit.value == pytest.approx(printed / 2, rel=1e-12)


def test_the_canned_cat_food_has_the_published_figures_in_dry_matter() -> None:
    example = CHECKS["pet_food_basis"]
    label = example["guaranteed"]
    make = Maker()
    names = ("protein", "fat", "calcium", "phosphorus")
    for name in names:
        make.nutrient(name)
    make.nutrient("energy", "kcal/kg")
    content = {name: label[name] for name in names} | {"energy": label["energy_kcal_kg"]}
    make.ingredient("Can", 900, content, dry_matter_percent=100 - label["moisture"])
    feed = make.formula()
    for name in (*names, "energy"):
        make.limit(feed, "nutrient", name, basis="dry matter")
    for name in names:
        make.limit(feed, "ratio", name, per="energy")
    result = solved(make)
    published, per_energy = example["published"]["dm"], example["published"]["at_4000_kcal"]
    for one in result.limits[:5]:
        assert one.value == pytest.approx(published[one.name], rel=1e-12)
    for one in result.limits[5:]:
        assert one.value is not None
        assert one.value * 4000 == pytest.approx(per_energy[one.name], abs=0.05)
        assert one.value * 4000 == pytest.approx(example["computed"]["at_4000_kcal"][one.name], rel=1e-12)


def at_moisture(amount: float, unit: str, basis: Basis, dry: float, shown: str) -> float:
    make = Maker()
    make.nutrient("Thing", unit)
    make.ingredient("Feed", 200, {"Thing": amount}, basis=basis, dry_matter_percent=dry)
    make.limit(make.formula(), "nutrient", "Thing", basis=shown)
    value = solved(make).limits[0].value
    assert value is not None
    return value


def test_protein_of_9_percent_in_dry_matter_is_8_19_at_9_percent_moisture() -> None:
    rule = CHECKS["moisture_conversion"][0]
    assert "8.19 % CP at 9 % moisture" in rule["example"]
    for dry in (91.0, 40.0):
        found = at_moisture(9.0, "%", Basis.DRY_MATTER, dry, "at 91 % dry matter")
        assert found == pytest.approx(rule["value"], rel=1e-12)
    assert at_moisture(9.0, "%", Basis.DRY_MATTER, 91.0, "as fed") == pytest.approx(rule["value"], rel=1e-12)


def test_one_ppm_at_30_percent_dry_matter_is_3_3_ppm_of_dry_matter() -> None:
    expected = CHECKS["moisture_conversion"][1]["value"]
    assert at_moisture(1.0, "ppm", Basis.AS_FED, 30.0, "dry matter") == pytest.approx(expected, rel=1e-12)


def test_a_feed_at_10_percent_moisture_may_hold_15_34_mg_where_the_law_says_15_at_12_percent() -> None:
    """Totals of European law are at 12 % moisture, that is at 88 % dry matter."""
    expected = CHECKS["moisture_conversion"][2]["value"]
    make = Maker()
    make.nutrient("Copper", "mg/kg")
    make.ingredient("Bare", 100, {"Copper": 0.0}, dry_matter_percent=90)
    make.ingredient("Rich", 90, {"Copper": 100.0}, dry_matter_percent=90)
    feed = make.formula()
    make.limit(feed, "nutrient", "Copper", None, 15.0, basis="at 88 % dry matter")
    result = solved(make)
    assert result.limits[0].value == 15.0
    assert result.nutrients[0].value == pytest.approx(expected, rel=1e-12)


def test_a_megajoule_is_239_006_kilocalories() -> None:
    expected = CHECKS["energy_units"]["kcal_per_MJ_4_184"]
    assert units.convert(1.0, "MJ/kg", "kcal/kg") == pytest.approx(expected, rel=1e-14)
    make = Maker()
    make.nutrient("Energy", "MJ/kg")
    make.ingredient("Feed", 200, {"Energy": 1.0})
    feed = make.formula(amounts=Amounts.RATION)
    make.limit(feed, "ingredient", "Feed", 10, 10)
    make.limit(feed, "nutrient", "Energy", unit="kcal/kg")
    make.limit(feed, "nutrient", "Energy", basis="per day", unit="Mcal/day")
    result = solved(make)
    assert [one.value for one in result.limits[1:]] == pytest.approx([expected, expected / 100], rel=1e-12)


def test_range_cubes_with_8_percent_protein_from_urea_hold_2_85_percent_urea() -> None:
    """Nebraska beef FAQ 2010: 37 % crude protein, 8 of it from urea at 281 % (29 natural; the page prints 31)."""
    share = CHECKS["urea_share"]
    make = Maker()
    make.nutrient("Crude protein", key="crude protein")
    make.nutrient("From urea", key="npn crude protein")
    make.ingredient("Urea", 400, {"Crude protein": 281.0, "From urea": 281.0}, tags=(Tag.NON_PROTEIN_NITROGEN,))
    make.ingredient("Meal", 300, {"Crude protein": 46.0, "From urea": 0.0})
    make.ingredient("Hulls", 120, {"Crude protein": 12.0, "From urea": 0.0})
    cubes = make.formula()
    make.limit(cubes, "ingredient", "Urea")
    make.limit(cubes, "nutrient", "Crude protein", 37, 37)
    make.limit(cubes, "nutrient", "From urea", 8, 8)
    result = solved(make)
    urea = next(i for i in result.mix if i.name == "Urea")
    assert 100 * (urea.amount or 0) == pytest.approx(share["computed"]["urea_percent"], rel=1e-9)
    assert 100 * (urea.amount or 0) == pytest.approx(share["published"]["urea_percent"], abs=0.005)
    natural = result.nutrients[0].value - result.nutrients[1].value  # type: ignore[operator]
    assert natural == pytest.approx(share["computed"]["natural_protein"], rel=1e-9)
    assert npn_crude_protein_percent(make.library, make.library.ingredient(1)) == 281.0
