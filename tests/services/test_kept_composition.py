"""What the mill keeps between solves never differs from what a fresh look at the library gives."""

from __future__ import annotations

import datetime
import random
from pathlib import Path

import pytest

from blendapp.domain.ingredients import Basis
from blendapp.domain.problems import Refused
from blendapp.domain.records import KINDS, added
from blendapp.optimise.build.composition import Composition
from blendapp.services import edits
from blendapp.services.formulate import formulate
from blendapp.services.mill import Mill
from blendapp.storage import create
from tests.mills import TODAY, Maker


@pytest.fixture
def mill(tmp_path: Path):
    make = Maker()
    make.nutrient("Crude protein")
    make.nutrient("Lysine", "g/kg")
    for name, price, protein, lysine in (("Maize", 200, 9, 2.6), ("Soya", 420, 46, 29), ("Wheat", 210, 11, 3)):
        make.ingredient(
            name, price, {"Crude protein": protein, "Lysine": lysine}, dry_matter_percent=88, class_name="Cereal"
        )
    feed = make.formula()
    make.limit(feed, "nutrient", "Crude protein", 18, basis="dry matter")
    make.limit(feed, "nutrient", "Lysine", 7)
    make.limit(feed, "ingredient", "Wheat", None, 40)
    make.limit(feed, "group", ["Maize", "Wheat"], None, 85)
    create(tmp_path / "m.mill", [added(r) for kind in KINDS for r in make.library.all(kind)]).close()
    from blendapp.services.mill import open_mill

    opened = open_mill(tmp_path / "m.mill")
    yield opened
    opened.close()


def some_edit(mill: Mill, dice: random.Random, day: datetime.date) -> None:
    library = mill.library
    ingredient = dice.choice(library.ingredients)
    limit = dice.choice(library.limits(1))
    nutrient = dice.choice(library.nutrients)
    choices = [
        lambda: edits.set_price(mill, ingredient.id, round(dice.uniform(100, 600), 2), day),
        lambda: edits.set_price(mill, ingredient.id, None, day),
        lambda: edits.set_value(mill, ingredient.id, nutrient.id, round(dice.uniform(1, 40), 2)),
        lambda: edits.set_value(mill, ingredient.id, nutrient.id, None),
        lambda: edits.set_value(mill, ingredient.id, nutrient.id, 12.5, basis=dice.choice(list(Basis))),
        lambda: edits.set_bound(mill, limit.id, dice.choice(["minimum", "maximum"]), round(dice.uniform(0, 60), 1)),
        lambda: edits.change(mill, ingredient, dry_matter_percent=round(dice.uniform(60, 99), 1)),
        lambda: edits.change(mill, ingredient, name=edits.free_name(library, "ingredient", "Other")),
        lambda: edits.change(mill, nutrient, unit=dice.choice(["%", "g/kg", "mg/kg"])),
        lambda: edits.add_nutrient(mill, edits.free_name(library, "nutrient", "Further")),
        mill.undo,
        mill.redo,
    ]
    dice.choice(choices)()


@pytest.mark.parametrize("seed", range(6))
def test_after_any_edits_the_answer_is_that_of_a_fresh_look_at_the_library(mill: Mill, seed: int) -> None:
    dice = random.Random(seed)
    for _step in range(40):
        try:
            some_edit(mill, dice, TODAY)
        except Refused:
            continue
        kept = formulate(mill.library, 1, TODAY, mill.composition)
        assert kept == formulate(mill.library, 1, TODAY, Composition(mill.library))
