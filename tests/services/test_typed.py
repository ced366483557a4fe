"""What a person types into the fields of records: units, links by name, words of closed lists."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from blendapp.domain.formulas import Admits
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.services import edits, mixing, plant, typed
from blendapp.services.mill import Mill
from tests.mills import three_ingredients

Opened = Callable[[Library], Mill]


@pytest.fixture
def mill(opened: Opened) -> Mill:
    made = opened(three_ingredients()[0])
    plant.add_site(made, "North")
    plant.add_supplier(made, "Vela Grain")
    plant.add_scale(made, "Big", 5)
    plant.add_bin(made, "Bin 1")
    plant.add_lot(made, 2, "S4")
    mixing.add_step(made, None, "Mix dry")
    return made


def one(mill: Mill, kind: str, record_id: int = 1) -> Any:
    return mill.library.records[kind][record_id]


def put(mill: Mill, kind: str, field: str, text: str, record_id: int = 1) -> Any:
    typed.set_typed(mill, one(mill, kind, record_id), field, text)
    return getattr(one(mill, kind, record_id), field)


@pytest.mark.parametrize(("text", "kg"), [
    ("2", 2.0), ("2.5 kg", 2.5), ("500 g", 0.5), ("5 lb", 5 * 0.45359237), ("5lb", 5 * 0.45359237),
    ("8 oz", 8 / 16 * 0.45359237), ("1 short ton", 2000 * 0.45359237),
])
def test_a_step_is_typed_in_any_mass(mill: Mill, text: str, kg: float) -> None:
    assert put(mill, "scale", "step_kg", text) == pytest.approx(kg, rel=1e-15)


@pytest.mark.parametrize(("text", "litres"), [("0.5", 0.5), ("250 ml", 0.25), ("1 US gal", 3.785411784)])
def test_a_meters_step_is_typed_in_any_volume(mill: Mill, text: str, litres: float) -> None:
    assert put(mill, "scale", "step_l", text) == pytest.approx(litres, rel=1e-12)


def test_a_gallon_that_is_neither_us_nor_imperial_is_asked_about(mill: Mill) -> None:
    with pytest.raises(ValueError, match=r"“gal” is not known there, use one of .*US gal, imperial gal"):
        put(mill, "scale", "step_l", "2 gal")


def test_a_step_in_litres_takes_the_place_of_the_one_in_kg_and_back(mill: Mill) -> None:
    put(mill, "scale", "greatest_kg", "1 t")
    put(mill, "scale", "step_l", "0.5")
    scale = one(mill, "scale")
    assert (scale.step_kg, scale.greatest_kg, scale.step_l) == (None, None, 0.5)
    put(mill, "scale", "step_kg", "2")
    assert (one(mill, "scale").step_kg, one(mill, "scale").step_l) == (2.0, None)


def test_a_scale_left_without_any_step_is_refused(mill: Mill) -> None:
    with pytest.raises(Refused, match="A scale needs its step"):
        put(mill, "scale", "step_kg", "")


def test_a_step_of_0_and_a_word_for_a_number_are_refused(mill: Mill) -> None:
    with pytest.raises(ValueError, match="must be above 0 kg"):
        put(mill, "scale", "step_kg", "0 g")
    with pytest.raises(ValueError, match="is not a number here"):
        put(mill, "scale", "tolerance_percent", "little")
    assert put(mill, "scale", "tolerance_percent", "1.5 %") == 1.5


def test_a_link_is_typed_by_name_and_cleared_by_a_blank(mill: Mill) -> None:
    assert put(mill, "bin", "ingredient_id", " maize ") == 1
    assert put(mill, "bin", "site_id", "north") == 1
    assert put(mill, "mill", "site_id", "North") == 1
    assert put(mill, "ingredient", "supplier_id", "Vela grain") == 1
    assert put(mill, "mixing_step", "formula_id", "feed") == 1
    assert put(mill, "bin", "site_id", "") is None


def test_an_unknown_name_is_met_with_the_one_most_like_it(mill: Mill) -> None:
    with pytest.raises(ValueError, match=r"There is no ingredient “Mais”\. Did you mean “Maize”"):
        put(mill, "bin", "ingredient_id", "Mais")
    with pytest.raises(ValueError, match=r"There is no site “xyz”\. Choose one of the mill's own, or add it first"):
        put(mill, "mill", "site_id", "xyz")


def test_a_lot_brings_its_ingredient_and_another_ingredient_takes_the_lot_out(mill: Mill) -> None:
    assert put(mill, "bin", "lot_id", "S4") == 1
    assert one(mill, "bin").ingredient_id == 2
    put(mill, "bin", "ingredient_id", "Maize")
    assert (one(mill, "bin").ingredient_id, one(mill, "bin").lot_id) == (1, None)
    with pytest.raises(ValueError, match="There is no lot “S4” of this ingredient"):
        put(mill, "bin", "lot_id", "S4")


def test_of_two_lots_of_one_name_the_ingredient_decides(mill: Mill) -> None:
    plant.add_lot(mill, 1, "S4")
    with pytest.raises(ValueError, match="enter the ingredient first"):
        put(mill, "bin", "lot_id", "S4")
    put(mill, "bin", "ingredient_id", "Maize")
    assert put(mill, "bin", "lot_id", "S4") == 2


def test_words_of_closed_lists_are_taken_in_any_case_and_no_others(mill: Mill) -> None:
    assert put(mill, "mill", "paper", "Letter") == "letter"
    assert put(mill, "mill", "paper", "a4") == "A4"
    assert put(mill, "mill", "sheet_mass", "LB") == "lb"
    assert put(mill, "formula", "animal", "Pig") == "pig"
    with pytest.raises(ValueError, match="Paper is one of A4, letter; “A3” is none of them"):
        put(mill, "mill", "paper", "A3")


def test_an_ingredient_is_opened_only_where_a_formula_makes_it(mill: Mill) -> None:
    with pytest.raises(Refused, match="name the formula that makes it"):
        put(mill, "ingredient", "opened", "yes", 3)
    edits.add_formula(mill, "Premix", admits=Admits.LISTED)
    put(mill, "ingredient", "made_by_formula_id", "Premix", 3)
    assert put(mill, "ingredient", "opened", "yes", 3) is True
    put(mill, "ingredient", "made_by_formula_id", "", 3)
    assert one(mill, "ingredient", 3).opened is False


def test_a_formulas_loss_and_a_steps_minutes_are_numbers_within_their_ranges(mill: Mill) -> None:
    assert put(mill, "formula", "loss_percent", "1.5 %") == 1.5
    assert put(mill, "formula", "product_dry_matter_percent", "88") == 88
    assert put(mill, "mixing_step", "minutes", "2.5 min") == 2.5
    assert put(mill, "mixing_step", "setting", " 40 rpm ") == "40 rpm"
    with pytest.raises(Refused, match="A loss of 100 % leaves nothing"):
        put(mill, "formula", "loss_percent", "100")


def test_what_may_be_chosen_is_listed_with_a_blank_where_there_may_be_none(mill: Mill) -> None:
    library = mill.library
    assert typed.choices(library, one(mill, "bin"), "ingredient_id") == ["", "Maize", "Soybean meal", "Lysine HCl"]
    assert typed.choices(library, one(mill, "mill"), "paper") == ["A4", "letter"]
    assert typed.choices(library, one(mill, "scale"), "hand_add") == ["yes", "no"]
    assert typed.choices(library, one(mill, "scale"), "step_kg") is None
    put(mill, "bin", "ingredient_id", "Maize")
    assert typed.shown_link(library, one(mill, "bin"), "ingredient_id") == "Maize"
    assert typed.choices(library, one(mill, "bin"), "lot_id") == [""]


def test_one_undo_takes_back_what_went_along(mill: Mill) -> None:
    put(mill, "scale", "step_l", "0.5")
    mill.undo()
    assert (one(mill, "scale").step_kg, one(mill, "scale").step_l) == (5, None)
