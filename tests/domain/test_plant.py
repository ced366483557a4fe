"""What counts where the mill works, what stands in which bin, how a feed is made, what a scale can give."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.checks import faults, oddities
from blendapp.domain.formulas import Formula, MixingStep
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale, Site, Span, Supplier
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from tests.mills import TODAY, Maker

NORTH, SOUTH = 1, 2


def plant(site_id: int | None) -> Library:
    """Of each thing one at either site and one of no site; prices of maize at the mill and in the north."""
    make = Maker(site_id=site_id)
    make.nutrient("Protein", never_negative=True)
    make.ingredient("Maize", 200.0)
    make.ingredient("Wheat")
    for record in (
        Site(NORTH, "North"), Site(SOUTH, "South"), Supplier(1, "Vela"),
        Scale(1, "S1", 5.0, site_id=NORTH), Scale(2, "S2", 1.0, site_id=SOUTH), Scale(3, "S3", 0.1),
        Mixer(1, "M1", site_id=NORTH), Mixer(2, "M2", site_id=SOUTH), Mixer(3, "M3"),
        Lot(1, 1, "L1"), Lot(2, 2, "L2"),
        Bin(1, "1", 1, 1, NORTH), Bin(2, "2", 1, None, SOUTH), Bin(3, "3", 1), Bin(4, "4", 2, None, NORTH),
        Quote(7, 1, 230.0, site_id=NORTH),
    ):
        make.put(record)
    return make.library


def names(found: list[Any]) -> list[str]:
    return [one.name for one in found]


@pytest.mark.parametrize(("site_id", "scales", "mixers", "bins"), [
    (NORTH, ["S1", "S3"], ["M1", "M3"], ["1", "3", "4"]),
    (SOUTH, ["S2", "S3"], ["M2", "M3"], ["2", "3"]),
    (None, ["S1", "S2", "S3"], ["M1", "M2", "M3"], ["1", "2", "3", "4"]),
])
def test_plant_of_the_site_and_of_no_site_counts_and_all_of_it_without_a_site(
    site_id: int | None, scales: list[str], mixers: list[str], bins: list[str]
) -> None:
    library = plant(site_id)
    assert (names(library.scales), names(library.mixers), names(library.bins)) == (scales, mixers, bins)


def test_another_site_sees_its_own_plant_and_prices_and_leaves_the_library_as_it_was() -> None:
    library = plant(SOUTH)
    there = library.at_site(NORTH)
    assert names(there.scales) == ["S1", "S3"]
    assert (there.price_per_t(1, TODAY), library.price_per_t(1, TODAY)) == (230.0, 200.0)
    assert names(library.scales) == ["S2", "S3"]
    assert library.mill.site_id == SOUTH
    assert names(there.at_site(None).scales) == ["S1", "S2", "S3"]


def test_a_library_without_a_mill_record_can_be_seen_from_a_site() -> None:
    library = Library.of({"site": [Site(1, "North")], "scale": [Scale(1, "S1", 5.0, site_id=1), Scale(2, "S2", 1.0)]})
    assert names(library.at_site(7).scales) == ["S2"]
    assert library.at_site(7).mill == MillInfo(site_id=7)


def test_an_ingredient_stands_in_every_bin_of_the_site_that_holds_it() -> None:
    assert names(plant(NORTH).bins_of(1)) == ["1", "3"]
    assert names(plant(None).bins_of(1)) == ["1", "2", "3"]
    assert plant(SOUTH).bins_of(2) == []


def step(record_id: int, formula_id: int | None, position: int, text: str) -> MixingStep:
    return MixingStep(record_id, formula_id, position, text)


def test_own_steps_come_in_their_order_and_else_those_of_every_formula() -> None:
    library = Library.of({"mixing_step": [
        step(1, None, 2, "mix"), step(2, None, 1, "weigh"), step(3, 5, 2, "press"), step(4, 5, 1, "condition"),
    ]})
    assert [s.text for s in library.steps_of(5)] == ["condition", "press"]
    assert [s.text for s in library.steps_of(6)] == ["weigh", "mix"]
    assert Library().steps_of(6) == []


def test_a_scale_gives_kg_and_a_meter_what_its_litres_weigh() -> None:
    assert Scale(1, "S", 5.0, 20.0, 2000.0).span(0.5) == Span(5.0, 20.0, 2000.0)
    meter = Scale(1, "P", None, step_l=0.5, least_l=2.0, greatest_l=200.0)
    # 0.5 l, 2 l and 200 l of an oil of 0.92 kg/l
    found = meter.span(0.92)
    assert found is not None
    assert (found.step_kg, found.least_kg, found.greatest_kg) == pytest.approx((0.46, 1.84, 184.0))
    assert meter.span(None) is None
    assert Scale(1, "P", None, step_l=0.5).span(1.4) == Span(0.7)
    assert Scale(1, "nothing", None).span(1.0) is None


@pytest.mark.parametrize(("record", "field", "words"), [
    (Scale(9, "X", None), "step_kg", "needs its step"),
    (Scale(9, "X", 1.0, step_l=1.0), "step_l", "not both"),
    (Scale(9, "X", None, step_l=0.0), "step_l", "above 0 l"),
    (Scale(9, "X", None, 5.0, step_l=1.0), "least_kg", "bounded in l"),
    (Scale(9, "X", 1.0, least_l=5.0), "least_l", "bounded in kg"),
    (Scale(9, "X", None, step_l=1.0, least_l=5.0, greatest_l=2.0), "least_l", "above the greatest"),
    (Bin(9, "1", site_id=NORTH), "name", "“1” is taken"),
    (Bin(9, " "), "name", "A name is needed"),
    (Bin(9, "9", 2, 1), "lot_id", "another ingredient"),
    (Bin(9, "9", None, 1), "lot_id", "another ingredient"),
    (Lot(9, 1, " "), "name", "A name is needed"),
    (LotValue(9, 1, 1, 9.0, "MJ/kg"), "unit", "does not measure Protein"),
    (LotValue(9, 1, 1, -9.0, "%"), "amount", "never be negative"),
    (Site(9, "north"), "name", "“north” is taken"),
    (Supplier(9, ""), "name", "A name is needed"),
    (MillInfo(sheet_mass="stone"), "sheet_mass", "kg, lb"),
    (MillInfo(paper="A3"), "paper", "A4, letter"),
    (Formula(9, "F", loss_percent=100.0), "loss_percent", "leaves nothing"),
    (Formula(9, "F", loss_percent=-1.0), "loss_percent", "between 0 and 100"),
    (Formula(9, "F", loss_percent=120.0), "loss_percent", "between 0 and 100"),
    (Formula(9, "F", product_dry_matter_percent=0.0), "product_dry_matter_percent", "above 0"),
    (Formula(9, "F", product_dry_matter_percent=101.0), "product_dry_matter_percent", "at most 100"),
    (Ingredient(9, "I", opened=True), "opened", "name the formula"),
    (MixingStep(9, None, 1, " "), "text", "says what to do"),
    (MixingStep(9, None, 0, "mix"), "position", "at least 1"),
    (MixingStep(9, None, 1, "mix", 0.0), "minutes", "above 0 min"),
])
def test_a_fault_of_the_plant_is_found_in_its_field_with_its_mend(record: Any, field: str, words: str) -> None:
    found = dict(faults(record, plant(NORTH)))
    assert words in found[field]


@pytest.mark.parametrize("record", [
    Scale(9, "X", None, step_l=1.0, least_l=2.0, greatest_l=2.0),
    Bin(9, "1"), Bin(9, "1", site_id=7), Bin(9, "9", 1, 1), Lot(9, 2, "L1"), LotValue(9, 1, 1, 9.0, "g/kg"),
    Formula(9, "F", loss_percent=0.0, product_dry_matter_percent=100.0), MixingStep(9, None, 1, "mix", 0.5),
    MillInfo(sheet_mass="lb", paper="letter"),
])
def test_what_is_sound_of_the_plant_is_neither_refused_nor_odd(record: Any) -> None:
    assert faults(record, plant(NORTH)) == []
    assert oddities(record, plant(NORTH)) == []


def test_a_second_lot_of_one_name_is_let_in_and_said() -> None:
    library = plant(NORTH)
    twin = Lot(9, 1, "l1")
    library.apply([Change(None, twin)])
    assert faults(twin, library) == []
    assert "called “l1” too" in dict(oddities(twin, library))["name"]
