"""What a batch tells besides its masses: where things stand, how it is made, what it gives."""

from __future__ import annotations

import random
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.batches import Batch, Step
from blendapp.domain.formulas import Animal, MixingStep
from blendapp.domain.plant import Bin, Lot, Mixer, Scale, Site
from blendapp.domain.records import Change
from blendapp.services.batch import make_batch
from blendapp.services.order_split import nearest_orders, split_order
from tests.mills import TODAY, Maker


def mill(site_id: int | None = None, **formula: Any) -> Maker:
    make = Maker(sheet_mass="lb", paper="letter")
    for key, name in ((1, "North"), (2, "South")):
        make.put(Site(key, name))
    make.put(Scale(1, "Scale", 1.0))
    make.put(Mixer(1, "North mixer", 100.0, 1000.0, site_id=1))
    make.put(Mixer(2, "South mixer", 100.0, 500.0, site_id=2))
    for name in ("Maize", "Meal"):
        make.ingredient(name, 200.0, scale_id=1, dry_matter_percent=86.0)
    make.put(Lot(1, 1, "L-77"))
    make.put(Bin(1, "Bin 4", 1, 1, site_id=1))
    make.put(Bin(2, "Bin 5", 1))
    make.put(Bin(3, "Bin 4", 1, site_id=2))
    feed = make.formula(animal=Animal.PIG, stage="grower", **formula)
    for name, share in (("Maize", 60.0), ("Meal", 40.0)):
        make.limit(feed, "ingredient", name, share, share)
    make.put(MixingStep(1, None, 1, "Blow out", None, ""))
    make.put(MixingStep(2, feed.id, 2, "Mix", 4.0, "32 rpm"))
    make.put(MixingStep(3, feed.id, 1, "Fill", None, ""))
    library = make.library
    library.apply([Change(library.mill, replace(library.mill, site_id=site_id))])
    return make


def batch_of(make: Maker, kg: float = 500.0, **more: Any) -> Batch:
    batch = make_batch(make.library, 1, kg, TODAY, **more)
    assert batch.cause is None, batch.cause
    return batch


def bins(batch: Batch) -> dict[str, tuple[str, ...]]:
    return {line.ingredient: line.bins for line in batch.lines}


def test_a_line_names_the_bins_of_the_site_each_with_its_lot() -> None:
    assert bins(batch_of(mill(1))) == {"Maize": ("Bin 4, lot L-77", "Bin 5"), "Meal": ()}
    assert bins(batch_of(mill(2))) == {"Maize": ("Bin 5", "Bin 4"), "Meal": ()}
    assert bins(batch_of(mill()))["Maize"] == ("Bin 4, lot L-77", "Bin 5", "Bin 4")


def test_a_batch_says_where_and_in_what_it_is_mixed_and_how_its_sheet_is_written() -> None:
    batch = batch_of(mill(1))
    assert (batch.site, batch.mixer, batch.mixer_id) == ("North", "North mixer", 1)
    assert (batch.animal, batch.stage, batch.mass_unit, batch.paper) == ("pig", "grower", "lb", "letter")
    assert batch.steps == (Step("Fill"), Step("Mix", 4.0, "32 rpm"))
    anywhere = batch_of(mill(), 400.0)
    assert (anywhere.mixer, anywhere.site) == ("South mixer", "South"), "the site of the mixer that takes it"


def test_the_yield_is_what_is_left_after_loss_and_change_of_moisture() -> None:
    assert batch_of(mill()).yield_kg == 500.0
    assert batch_of(mill(loss_percent=1.0)).yield_kg == 495.0
    batch = batch_of(mill(loss_percent=1.0, product_dry_matter_percent=88.0))
    assert batch.yield_kg == pytest.approx(500 * 0.99 * 86 / 88)
    assert (batch.loss_percent, batch.product_dry_matter_percent, batch.yield_unknown) == (1.0, 88.0, "")


def test_a_yield_that_needs_an_unknown_dry_matter_is_none_and_says_which() -> None:
    make = mill(product_dry_matter_percent=88.0)
    meal = make.library.ingredient(2)
    make.library.apply([Change(meal, replace(meal, dry_matter_percent=None))])
    batch = batch_of(make)
    assert batch.yield_kg is None
    assert batch.yield_unknown == "The dry matter of Meal is not known; enter it, and the yield is worked out."


@pytest.mark.parametrize(
    ("order", "mixers", "orders"),
    [
        (3000.0, [(1600.0, 2000.0)], [2000.0, 3200.0]),
        (300.0, [(500.0, 2000.0)], [500.0]),
        (4100.0, [(1900.0, 2000.0), (1500.0, 1600.0)], [4000.0, 4500.0]),
        (400.0, [(500.0, None)], [500.0]),
    ],
)
def test_an_order_that_no_equal_split_fits_names_the_nearest_orders_that_do(
    order: float, mixers: list[tuple[float | None, float | None]], orders: list[float]
) -> None:
    made = [Mixer(n, f"Mixer {n}", least, greatest) for n, (least, greatest) in enumerate(mixers, 1)]
    assert split_order(made, order) is None
    assert nearest_orders(made, order) == orders
    assert all(split_order(made, one) for one in orders)
    make = Maker()
    for mixer in made:
        make.put(mixer)
    make.ingredient("Maize", 100.0)
    make.formula()
    batch = make_batch(make.library, 1, order, TODAY)
    assert (batch.cause or "").endswith(f" Order {' or '.join(f'{one:g}' for one in orders)} kg.")


@pytest.mark.parametrize("seed", range(20))
def test_no_order_nearer_than_those_named_has_an_equal_split(seed: int) -> None:
    chance = random.Random(seed)
    made = [
        Mixer(n, f"Mixer {n}", least := float(chance.randint(50, 900)), least + chance.randint(0, 150))
        for n in range(1, chance.randint(2, 4))
    ]
    order = float(chance.randint(20, 1500))
    if split_order(made, order) is not None:
        return
    found = nearest_orders(made, order)
    for one in range(1, 4000):
        if split_order(made, float(one)):
            assert not any(min(order, end) < one < max(order, end) for end in found), (order, found, one)
            assert one > order or len(found) == 2, (order, found, one)


def test_an_order_that_fits_no_mixer_here_names_one_of_another_site_that_takes_it() -> None:
    def cause(make: Maker) -> str:
        return make_batch(make.library, 1, 80.0, TODAY).cause or ""

    assert "It would fit" not in cause(mill(site_id=2)), "the mixer at North takes no 80 kg either"
    make = mill(site_id=1)
    make.put(Mixer(5, "Little mixer", 10.0, 90.0, site_id=2))
    assert cause(make).startswith("No equal batches of 80 kg fit a mixer: North mixer holds 100 to 1000 kg")
    assert cause(make).endswith("Order 100 kg. It would fit Little mixer at South.")
