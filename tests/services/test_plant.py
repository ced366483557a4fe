"""Sites, suppliers, scales, meters, mixers, bins and lots as a person adds and removes them."""

from __future__ import annotations

import datetime
from collections.abc import Callable

import pytest

from blendapp.domain.library import Library
from blendapp.domain.mills import ListAbout, MillInfo, PriceList, PrintedBatch
from blendapp.domain.plant import LotValue
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from blendapp.services import edits, plant
from blendapp.services.mill import Mill
from tests.mills import TODAY, three_ingredients

Opened = Callable[[Library], Mill]
NOW = datetime.datetime(2026, 3, 2, 12, tzinfo=datetime.UTC)


@pytest.fixture
def mill(opened: Opened) -> Mill:
    return opened(three_ingredients()[0])


def only(mill: Mill, kind: str) -> int:
    (found,) = mill.library.records[kind].values()
    return int(found.id)


def test_each_thing_of_the_plant_is_added_in_one_undo(mill: Mill) -> None:
    plant.add_site(mill, " North ")
    site = only(mill, "site")
    plant.add_supplier(mill, "Vela Grain", "calls on Mondays")
    plant.add_scale(mill, "Big", 5, site)
    plant.add_meter(mill, "Fat pump", 0.5, site)
    plant.add_mixer(mill, "M1", site)
    plant.add_lot(mill, 1, "L7", received=TODAY, mass_kg=28_000, supplier_id=only(mill, "supplier"))
    plant.add_bin(mill, "Bin 1", lot_id=only(mill, "lot"), site_id=site)
    big, pump = mill.library.all("scale")
    assert (big.step_kg, big.step_l, big.site_id) == (5, None, site)
    assert (pump.step_kg, pump.step_l, pump.by_volume) == (None, 0.5, True)
    (bin_,) = mill.library.all("bin")
    assert (bin_.ingredient_id, bin_.lot_id, bin_.site_id) == (1, only(mill, "lot"), site)
    assert mill.library.records["site"][site].name == "North"
    for _step in range(7):
        mill.undo()
    assert not any(mill.library.records[kind] for kind in ("site", "supplier", "scale", "mixer", "lot", "bin"))


def test_a_scale_with_a_step_of_0_is_refused(mill: Mill) -> None:
    with pytest.raises(Refused, match="Step kg must be above 0 kg"):
        plant.add_scale(mill, "Big", 0)
    with pytest.raises(Refused, match="Step l must be above 0 l"):
        plant.add_meter(mill, "Pump", 0)


def test_a_name_is_taken_once_a_bin_once_on_each_site(mill: Mill) -> None:
    plant.add_site(mill, "North")
    with pytest.raises(Refused, match="“north” is taken"):
        plant.add_site(mill, "north")
    plant.add_bin(mill, "1")
    plant.add_bin(mill, "1", site_id=only(mill, "site"))
    with pytest.raises(Refused, match="“1” is taken"):
        plant.add_bin(mill, "1")


def test_a_lot_of_another_ingredient_does_not_go_into_a_bin(mill: Mill) -> None:
    plant.add_lot(mill, 1, "L7")
    with pytest.raises(Refused, match="another ingredient"):
        plant.add_bin(mill, "1", ingredient_id=2, lot_id=only(mill, "lot"))


def test_two_lots_of_one_ingredient_have_two_names(mill: Mill) -> None:
    plant.add_lot(mill, 1, "L7")
    plant.add_lot(mill, 2, "L7")
    with pytest.raises(Refused, match="Maize has a lot “l7” already"):
        plant.add_lot(mill, 1, "l7 ")
    with pytest.raises(Refused, match="A name is needed"):
        plant.add_lot(mill, 1, " ")


def test_a_site_is_not_removed_under_what_stands_there(mill: Mill) -> None:
    plant.add_site(mill, "North")
    site = only(mill, "site")
    plant.add_scale(mill, "Big", 5, site)
    plant.add_mixer(mill, "M{1}", site)
    plant.add_bin(mill, "Bin 1", site_id=site)
    edits.set_mill(mill, site_id=site)
    mill.apply("price", [added(Quote(mill.new_id("quote"), 2, 400.0, site_id=site))])
    with pytest.raises(Refused) as refused:
        plant.remove(mill, "site", site)
    said = [problem.text for problem in refused.value.problems]
    assert said == [
        "The mill works at North; choose another site for the mill, or none, first.",
        "At North stand Big, M{1}, Bin 1; move them to another site, or remove them, first.",
        "Prices of Soybean meal are on record with North and stay; it can be renamed, not removed.",
    ]
    assert site in mill.library.records["site"]


def test_a_list_that_was_for_a_site_or_of_a_supplier_keeps_them(mill: Mill) -> None:
    plant.add_site(mill, "North")
    plant.add_supplier(mill, "Vela")
    mill.record("list", [added(PriceList(
        1, "week9.xlsx", "", NOW, 1, 1, only(mill, "supplier"), about=ListAbout.PRICES, site_id=only(mill, "site")))])
    for kind in ("site", "supplier"):
        with pytest.raises(Refused, match=r"The lists week9\.xlsx are on record"):
            plant.remove(mill, kind, only(mill, kind))


def test_a_supplier_is_not_removed_from_under_ingredients_and_lots(mill: Mill) -> None:
    plant.add_supplier(mill, "Vela")
    vela = only(mill, "supplier")
    for ingredient in mill.library.ingredients:
        edits.change(mill, ingredient, supplier_id=vela)
    plant.add_lot(mill, 1, "L7", supplier_id=vela)
    with pytest.raises(Refused) as refused:
        plant.remove(mill, "supplier", vela)
    assert [problem.text for problem in refused.value.problems] == [
        "From Vela are bought Maize, Soybean meal, Lysine HCl; give those another supplier, or none, first.",
        "From Vela came the lots L7; give those another supplier, or none, first.",
    ]
    for ingredient in mill.library.ingredients:
        edits.change(mill, ingredient, supplier_id=None)
    edits.change(mill, mill.library.all("lot")[0], supplier_id=None)
    plant.remove(mill, "supplier", vela)
    assert not mill.library.records["supplier"]


def test_a_long_list_of_what_stands_in_the_way_is_counted(mill: Mill) -> None:
    plant.add_site(mill, "North")
    for number in range(8):
        plant.add_bin(mill, f"B{number}", site_id=only(mill, "site"))
    with pytest.raises(Refused, match="B0, B1, B2, B3, B4 and 3 more"):
        plant.remove(mill, "site", only(mill, "site"))


def test_a_scale_that_weighs_and_a_mixer_that_mixed_stay(mill: Mill) -> None:
    plant.add_scale(mill, "Big", 5)
    plant.add_mixer(mill, "M1")
    edits.change(mill, mill.library.ingredient(1), scale_id=only(mill, "scale"))
    with pytest.raises(Refused, match="Big still weighs Maize; give those another scale first"):
        plant.remove(mill, "scale", only(mill, "scale"))
    mill.record("print", [added(PrintedBatch(1, 17, 1, "1", 1000, NOW, mixer_id=only(mill, "mixer")))])
    with pytest.raises(Refused, match="The printed batches 17 were mixed in M1"):
        plant.remove(mill, "mixer", only(mill, "mixer"))


def test_a_lot_leaves_with_its_analyses_once_no_bin_holds_it(mill: Mill) -> None:
    plant.add_lot(mill, 1, "L7")
    lot = only(mill, "lot")
    mill.apply("analysis", [added(LotValue(mill.new_id("lot_value"), lot, 1, 9.1, "%"))])
    plant.add_bin(mill, "1", lot_id=lot)
    with pytest.raises(Refused, match="Lot L7 stands in 1"):
        plant.remove(mill, "lot", lot)
    plant.remove(mill, "bin", only(mill, "bin"))
    plant.remove(mill, "lot", lot)
    assert not mill.library.records["lot"]
    assert not mill.library.records["lot_value"]
    mill.undo()
    assert only(mill, "lot_value")


def test_another_site_of_the_mill_brings_other_prices_into_the_next_answer(mill: Mill) -> None:
    from blendapp.services.formulate import formulate

    plant.add_site(mill, "North")
    site = only(mill, "site")
    mill.apply("price", [added(Quote(mill.new_id("quote"), 1, 300.0, site_id=site))])
    formula = mill.library.formulas[0]
    before = formulate(mill.library, formula.id, TODAY, mill.composition).cost
    edit = edits.set_mill(mill, site_id=site)
    after = formulate(mill.library, formula.id, TODAY, mill.composition).cost
    assert edit.touches("mill")
    assert before == pytest.approx(255.0)  # 75 % at 200 and 25 % at 420
    assert after == pytest.approx(330.0)  # the same mix, 75 % at 300


def test_another_supplier_of_an_ingredient_brings_that_suppliers_price(mill: Mill) -> None:
    from blendapp.services.kept_answers import prices_of

    for name in ("Vela", "Moor"):
        plant.add_supplier(mill, name)
    vela, moor = (one.id for one in mill.library.all("supplier"))
    mill.apply("prices", [added(Quote(mill.new_id("quote"), 3, 900.0, supplier_id=vela)),
                          added(Quote(mill.new_id("quote"), 3, 800.0, supplier_id=moor))])
    found = []
    for supplier in (None, vela, moor):
        edits.change(mill, mill.library.ingredient(3), supplier_id=supplier)
        found.append(prices_of(mill.library, TODAY)[3])
    # None: the last recorded; a supplier's own quote, and the 1500 of no supplier, come before the other supplier's.
    assert found == [800.0, 900.0, 800.0]


def test_a_price_typed_where_the_mill_works_at_a_site_is_in_force_there(mill: Mill) -> None:
    plant.add_site(mill, "North")
    site = only(mill, "site")
    mill.apply("price", [added(Quote(mill.new_id("quote"), 1, 300.0, site_id=site))])
    edits.set_mill(mill, site_id=site)
    edits.set_price(mill, 1, 310.0, TODAY)
    edits.set_price(mill, 2, 430.0, TODAY)
    assert mill.library.price_per_t(1, TODAY) == 310.0
    assert mill.library.price_per_t(2, TODAY) == 430.0
    edits.set_mill(mill, site_id=None)
    assert mill.library.price_per_t(1, TODAY) == 200.0
    assert mill.library.price_per_t(2, TODAY) == 430.0


def test_the_settings_of_sheets_are_the_mills(mill: Mill) -> None:
    edits.set_mill(mill, sheet_mass="lb", paper="letter")
    assert (mill.library.mill.sheet_mass, mill.library.mill.paper) == ("lb", "letter")
    with pytest.raises(Refused, match="use one of A4, letter"):
        edits.set_mill(mill, paper="A3")
    assert mill.library.mill != MillInfo()
