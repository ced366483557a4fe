from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain import cautions
from blendapp.domain.formulas import Amounts, Animal, Formula
from blendapp.domain.ingredients import Basis, Tag
from blendapp.domain.library import Library
from blendapp.domain.results import UnknownValue
from tests.mills import Maker

RUMINANTS = [Animal.CATTLE, Animal.SHEEP, Animal.GOAT]
OTHERS = [Animal.POULTRY, Animal.PIG, Animal.HORSE]
REFERENCE = json.loads((Path(__file__).parent.parent / "outside" / "data" / "caution_figures.json").read_text())
UREA_PROTEIN = 281.0


def feed(animal: Animal | None) -> Formula:
    return Formula(1, "Feed", animal=animal)


def admission(animal: Animal | None, tag: Tag) -> str | None:
    make = Maker()
    made = make.ingredient("Thing", 100, tags=(tag,))
    return cautions.forbidden_by_admission(feed(animal), [made])


def test_an_ionophore_is_forbidden_to_horses_alone() -> None:
    said = admission(Animal.HORSE, Tag.IONOPHORE)
    assert said is not None
    assert said.startswith("Thing holds an ionophore")
    assert "monensin LD50 in horses 1.38 mg/kg body weight" in said
    for animal in [*RUMINANTS, Animal.POULTRY, Animal.PIG, Animal.OTHER, None]:
        assert admission(animal, Tag.IONOPHORE) is None


@pytest.mark.parametrize("animal", RUMINANTS)
def test_ruminant_protein_is_forbidden_to_every_ruminant(animal: Animal) -> None:
    said = admission(animal, Tag.RUMINANT_PROTEIN)
    assert said is not None
    assert f"prohibited in feed for {animal}" in said
    assert "21 CFR 589.2000" in said


@pytest.mark.parametrize("animal", [*OTHERS, Animal.OTHER, None])
def test_ruminant_protein_is_not_forbidden_where_the_animal_is_no_ruminant_or_is_not_said(
    animal: Animal | None,
) -> None:
    assert admission(animal, Tag.RUMINANT_PROTEIN) is None


def test_every_forbidden_ingredient_is_named() -> None:
    make = Maker()
    made = [make.ingredient(name, 100, tags=(Tag.RUMINANT_PROTEIN,)) for name in ("Meat meal", "Bone meal")]
    said = cautions.forbidden_by_admission(feed(Animal.CATTLE), made)
    assert said is not None
    assert "Meat meal" in said
    assert "Bone meal" in said


def urea_mill(protein: float | None = UREA_PROTEIN, key: str = "crude protein", **fields: Any) -> Library:
    make = Maker()
    make.nutrient("Protein", "%", key=key)
    make.ingredient("Urea", 400, {} if protein is None else {"Protein": protein},
                    tags=(Tag.NON_PROTEIN_NITROGEN,), **fields)
    make.ingredient("Maize", 200, {"Protein": 8.5})
    return make.library


def with_protein_from_urea(percent: float) -> list[tuple[int, float]]:
    share = percent / UREA_PROTEIN
    return [(1, share), (2, 1 - share)]


@pytest.mark.parametrize("animal", OTHERS)
@pytest.mark.parametrize(("percent", "allowed"), [(1.2, True), (1.25, True), (1.2501, False), (3.0, False)])
def test_protein_from_urea_is_forbidden_to_non_ruminants_above_1_25_percent(
    animal: Animal, percent: float, allowed: bool
) -> None:
    said = cautions.forbidden_in_mix(feed(animal), urea_mill(), with_protein_from_urea(percent))
    assert (said is None) is allowed
    if said is not None:
        assert "Urea" in said
        assert "at most 1.25 %" in said
        assert "West Virginia 61-5-12.2" in said


@pytest.mark.parametrize("animal", [*RUMINANTS, Animal.OTHER, None])
def test_protein_from_urea_is_not_forbidden_to_ruminants_nor_where_the_animal_is_not_said(
    animal: Animal | None,
) -> None:
    assert cautions.forbidden_in_mix(feed(animal), urea_mill(), with_protein_from_urea(10)) is None


def test_urea_of_unknown_protein_is_forbidden_in_any_amount_to_non_ruminants() -> None:
    library = urea_mill(protein=None)
    said = cautions.forbidden_in_mix(feed(Animal.PIG), library, [(1, 1e-6), (2, 1.0)])
    assert said is not None
    assert "its crude protein is unknown" in said
    assert cautions.forbidden_in_mix(feed(Animal.PIG), library, [(1, 0.0), (2, 1.0)]) is None


def test_the_share_of_a_ration_counts_and_not_its_kilograms() -> None:
    kilograms = [(key, 20 * share) for key, share in with_protein_from_urea(1.2)]
    ration = Formula(1, "Feed", Amounts.RATION, Animal.HORSE)
    assert cautions.forbidden_in_mix(ration, urea_mill(), kilograms) is None


def test_protein_from_several_sources_of_nitrogen_adds_up() -> None:
    make = Maker()
    make.nutrient("Protein", "g/kg", key="crude protein")
    for name in ("Urea", "Biuret"):
        make.ingredient(name, 400, {"Protein": 2500}, tags=(Tag.NON_PROTEIN_NITROGEN,))
    make.ingredient("Maize", 200, {"Protein": 85})
    mix = [(1, 0.003), (2, 0.003), (3, 0.994)]
    said = cautions.forbidden_in_mix(feed(Animal.PIG), make.library, mix)
    assert said is not None
    assert "Urea, Biuret brings 1.50 %" in said


def test_the_nutrient_for_protein_from_urea_is_taken_before_all_crude_protein() -> None:
    make = Maker()
    make.nutrient("Protein", "%", key="crude protein")
    make.nutrient("From urea", "%", key="npn crude protein")
    block = make.ingredient("Block", 400, {"Protein": 40, "From urea": 10}, tags=(Tag.NON_PROTEIN_NITROGEN,))
    assert cautions.npn_crude_protein_percent(make.library, block) == 10
    plain = make.ingredient("Urea", 400, {"Protein": 281}, tags=(Tag.NON_PROTEIN_NITROGEN,))
    assert cautions.npn_crude_protein_percent(make.library, plain) == 281


def test_protein_of_dry_matter_is_counted_as_fed_and_is_unknown_without_the_dry_matter() -> None:
    wet = urea_mill(basis=Basis.DRY_MATTER, dry_matter_percent=50)
    assert cautions.npn_crude_protein_percent(wet, wet.ingredient(1)) == pytest.approx(140.5)
    lost = urea_mill(basis=Basis.DRY_MATTER)
    assert cautions.npn_crude_protein_percent(lost, lost.ingredient(1)) is None


def said_of(animal: Animal | None, library: Library, mix: list[tuple[int, float]]) -> list[str]:
    return cautions.warnings(feed(animal), library, mix, ())


def test_the_general_caution_stands_first_always_even_without_a_mix() -> None:
    said = said_of(Animal.PIG, Library(), [])
    assert said == [cautions.GENERAL_CAUTION]
    assert "qualified nutritionist must review any ration before it is fed" in said[0]
    assert "Local law and licensed practice come first" in said[0]


def copper_mill(tags: tuple[Tag, ...] = (), value: float | None = None, key: str = "added copper") -> Library:
    make = Maker()
    make.nutrient("Copper", "mg/kg", key=key)
    make.ingredient("Premix", 900, {} if value is None else {"Copper": value}, tags=tags)
    return make.library


@pytest.mark.parametrize(
    ("library", "warned"),
    [
        (copper_mill((Tag.ADDED_COPPER,)), True),
        (copper_mill((), 250.0), True),
        (copper_mill((Tag.ADDED_COPPER,), 0.0), True),
        (copper_mill((), 0.0), False),
        (copper_mill(), False),
        (copper_mill((), 250.0, "total copper"), False),
    ],
)
def test_added_copper_in_sheep_feed_is_told_by_tag_or_by_key(library: Library, warned: bool) -> None:
    found = [text for text in said_of(Animal.SHEEP, library, [(1, 1.0)]) if "copper" in text]
    assert len(found) == warned
    if warned:
        assert "Premix adds copper to a feed for sheep" in found[0]
        assert "Duncan 1997" in found[0]
        assert "(EU) 2018/1039" in found[0]


@pytest.mark.parametrize("animal", [Animal.CATTLE, Animal.GOAT, Animal.PIG, Animal.OTHER])
def test_added_copper_is_not_warned_of_in_other_feed_nor_where_none_is_used(animal: Animal) -> None:
    library = copper_mill((Tag.ADDED_COPPER,))
    assert not any("adds copper" in text for text in said_of(animal, library, [(1, 1.0)]))
    assert not any("adds copper" in text for text in said_of(Animal.SHEEP, library, [(1, 0.0)]))


def selenium_mill(unit: str = "mg/kg", **fields: Any) -> Library:
    make = Maker()
    make.nutrient("Added selenium", unit, key="added selenium")
    make.ingredient("Premix", 900, {"Added selenium": 300.0 if unit == "mg/kg" else 0.03},
                    tags=(Tag.ADDED_SELENIUM,), **fields)
    make.ingredient("Maize", 200)
    return make.library


@pytest.mark.parametrize(("share", "warned"), [(0.0005, False), (0.001, False), (0.0010001, True), (0.01, True)])
@pytest.mark.parametrize("unit", ["mg/kg", "%"])
def test_added_selenium_is_warned_of_above_0_3_mg_a_kg(share: float, warned: bool, unit: str) -> None:
    said = said_of(Animal.PIG, selenium_mill(unit), [(1, share), (2, 1 - share)])
    found = [text for text in said if "selenium" in text]
    assert len(found) == warned
    if warned:
        assert "more than 0.3 mg/kg is not allowed" in found[0]
        assert "21 CFR 573.920" in found[0]


def test_added_selenium_of_dry_matter_is_counted_as_fed() -> None:
    wet = selenium_mill(basis=Basis.DRY_MATTER, dry_matter_percent=50)
    assert not any("Added selenium is" in text for text in said_of(Animal.PIG, wet, [(1, 0.002), (2, 0.998)]))
    assert any("Added selenium is" in text for text in said_of(Animal.PIG, wet, [(1, 0.0021), (2, 0.9979)]))


def test_added_selenium_of_unknown_strength_is_warned_of() -> None:
    make = Maker()
    make.ingredient("Premix", 900, tags=(Tag.ADDED_SELENIUM,))
    (said,) = [text for text in said_of(Animal.PIG, make.library, [(1, 1.0)]) if "selenium" in text]
    assert "Premix adds selenium in an amount that is not known here" in said


@pytest.mark.parametrize("animal", [None, Animal.OTHER])
@pytest.mark.parametrize("tag", [Tag.IONOPHORE, Tag.RUMINANT_PROTEIN, Tag.NON_PROTEIN_NITROGEN])
def test_where_the_animal_is_not_said_what_is_prohibited_for_some_is_warned_of(
    animal: Animal | None, tag: Tag
) -> None:
    make = Maker()
    make.ingredient("Thing", 100, tags=(tag,))
    said = said_of(animal, make.library, [(1, 1.0)])
    assert any(f"Thing ({tag}) is prohibited for some animals" in text for text in said)
    assert any("names no animal" in text for text in said) is (animal is None)


def test_a_medicated_ingredient_says_what_was_entered_and_what_was_not() -> None:
    make = Maker()
    make.ingredient("Medicine", 100, tags=(Tag.MEDICATED,), drug="tylosin", drug_level="100 g/t", withdrawal="0 days")
    (said,) = [text for text in said_of(Animal.PIG, make.library, [(1, 1.0)]) if text.startswith("Medicated")]
    assert said == "Medicated: Medicine. Drug: tylosin; level: 100 g/t; for: not entered; withdrawal: 0 days."


def test_only_an_unsafe_unknown_is_a_caution() -> None:
    unknown = [UnknownValue("Maize", "Aflatoxin", True), UnknownValue("Maize", "Lysine", False)]
    said = cautions.warnings(feed(Animal.PIG), Library(), (), unknown)
    assert [text for text in said if "is unknown" in text] == [
        "Aflatoxin of Maize is unknown and counts as 0 under a limit that this may break; enter it."
    ]


def test_every_rule_names_its_source_and_bears_the_figure_of_the_reference() -> None:
    for rule in cautions.RULES:
        assert rule.source
    figures = {(rule.source, rule.limit, rule.unit) for rule in cautions.RULES if rule.limit is not None}
    for entry in REFERENCE["figures"]:
        assert any(
            entry["citation"] in source and value == entry["value"] and unit == entry["unit"]
            for source, value, unit in figures
        ), entry
