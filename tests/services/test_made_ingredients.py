"""Ingredients that the mill makes itself: made first, or opened into what they are made of, through every level."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Animal, Formula
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from blendapp.services import edits
from blendapp.services.approved import approved_batch
from blendapp.services.batch import make_batch
from blendapp.services.mill import Mill
from blendapp.services.sheets import batch_from_plain, batch_to_plain
from tests.mills import TODAY, Maker
from tests.services.approving import approve, staffed

FINE = 1
Mixes = Mapping[str, Mapping[str, float]]


class Feeds(Maker):
    """Feeds whose mixes are given in %; what a formula makes has its name."""

    def __init__(self, mixes: Mixes, *, step_kg: float = 0.001, **mill: Any) -> None:
        super().__init__(**mill)
        self.put(Scale(FINE, "Scale", step_kg))
        self.nutrient("Lysine")
        names = list(dict.fromkeys([*(name for mix in mixes.values() for name in mix), *mixes]))
        self.feeds: dict[str, Formula] = {}
        for place, name in enumerate(names):
            self.ingredient(name, 100.0 + place, {"Lysine": float(place)}, scale_id=FINE, tags=(Tag.ONLY_WHEN_LISTED,))
        for name, mix in mixes.items():
            self.feeds[name] = self.formula(f"{name} formula")
            for part, share in mix.items():
                self.limit(self.feeds[name], "ingredient", part, share, share)
            self.set(name, made_by_formula_id=self.feeds[name].id)

    def key(self, name: str) -> int:
        return int(self.library.named("ingredient", name).id)

    def set(self, name: str, **fields: Any) -> None:
        old = self.library.named("ingredient", name)
        self.library.apply([Change(old, replace(old, **fields))])

    def batch(self, name: str, kg: float = 1000.0, **more: Any) -> Batch:
        return make_batch(self.library, self.feeds[name].id, kg, TODAY, **more)


def lines(batch: Batch) -> dict[str, float]:
    assert batch.cause is None, batch.cause
    return {line.ingredient: line.target_kg for line in batch.lines}


TWO = {
    "Premix": {"Salt": 40.0, "Carrier": 60.0},
    "Feed": {"Maize": 89.0, "Salt": 1.0, "Premix": 10.0},
}
THREE = {
    "Base": {"Iodine": 1.0, "Salt": 99.0},
    "Premix": {"Base": 20.0, "Carrier": 80.0},
    "Feed": {"Maize": 90.0, "Premix": 10.0},
}


def test_an_ingredient_that_a_formula_makes_stays_a_line_and_is_made_first() -> None:
    batch = Feeds(TWO).batch("Feed")
    assert lines(batch) == {"Maize": 890.0, "Premix": 100.0, "Salt": 10.0}
    (first,) = batch.to_make
    assert (first.ingredient, first.formula, first.mass_kg) == ("Premix", "Premix formula", 100.0)
    assert batch.broken == ()


def test_what_must_be_made_counts_for_the_whole_order_and_through_every_level_the_innermost_first() -> None:
    made = Feeds(THREE)
    made.put(Mixer(1, "Mixer", 500.0, 2000.0))
    batch = made.batch("Feed", 6000.0)
    assert batch.batches == 3
    assert [(one.ingredient, one.mass_kg) for one in batch.to_make] == [("Base", 120.0), ("Premix", 600.0)]


def test_an_ingredient_needed_by_two_made_ones_is_made_once_in_the_sum_of_both() -> None:
    batch = Feeds({
        "Base": {"Salt": 100.0},
        "Left": {"Base": 50.0, "Carrier": 50.0},
        "Right": {"Base": 10.0, "Left": 20.0, "Carrier": 70.0},
        "Feed": {"Maize": 80.0, "Left": 10.0, "Right": 8.0, "Base": 2.0},
    }).batch("Feed")
    # Right 80; Left 100 + 16 of Right; Base 20 + 8 of Right + 58 of Left.
    assert {one.ingredient: pytest.approx(one.mass_kg) for one in batch.to_make} == {
        "Right": 80.0, "Left": 116.0, "Base": 86.0
    }
    assert [one.ingredient for one in batch.to_make] == ["Base", "Left", "Right"]


def test_what_the_making_of_a_premix_loses_is_made_in_addition() -> None:
    made = Feeds(THREE)
    feed = made.feeds["Premix"]
    made.library.apply([Change(feed, replace(feed, loss_percent=20.0))])
    batch = made.batch("Feed")
    # 100 kg of premix are what is left of 125 kg, of which 25 are base.
    assert {one.ingredient: one.mass_kg for one in batch.to_make} == {"Base": 25.0, "Premix": 100.0}


def test_an_opened_ingredient_is_replaced_by_what_it_is_made_of_one_line_an_ingredient() -> None:
    made = Feeds(TWO)
    made.set("Premix", opened=True)
    batch = made.batch("Feed")
    assert lines(batch) == {"Maize": 890.0, "Carrier": 60.0, "Salt": 50.0}
    assert {line.ingredient: line.of_opened for line in batch.lines} == {
        "Maize": (), "Carrier": ("Premix",), "Salt": ("Premix",)
    }
    assert batch.to_make == ()
    assert batch.broken == ()
    assert batch_from_plain(batch_to_plain(batch)) == batch


def test_limits_on_ingredients_count_as_if_nothing_were_opened_and_the_sheet_says_so() -> None:
    made = Feeds(TWO)
    feed = made.feeds["Feed"]
    made.limit(feed, "group", ["Premix", "Salt"], None, 11.0)
    made.limit(feed, "practical", "Premix", 9.0)
    made.limit(feed, "count", ["Premix", "Salt", "Maize"], None, 3.0)
    made.limit(feed, "ratio", ["Premix"], 0.1, None, per=["Maize"])
    made.set("Premix", opened=True)
    batch = made.batch("Feed")
    values = {(limit.kind.value, limit.name): limit.value for limit in batch.limits}
    assert values["ingredient", "Salt"] == pytest.approx(1.0)
    assert values["ingredient", "Premix"] == pytest.approx(10.0)
    assert values["group", "Premix + Salt"] == pytest.approx(11.0)
    assert values["practical", "Premix"] == pytest.approx(10.0)
    assert values["count", "Premix + Salt + Maize"] == 3
    assert values["ratio", "Premix"] == pytest.approx(10 / 89)
    assert batch.broken == ()
    assert (
        "The limit on Salt counts 10 kg of its 50 kg; the rest stands in place of Premix." in batch.cautions
    )


def test_nutrients_come_from_what_is_weighed_and_not_from_the_made_ingredient() -> None:
    made = Feeds(TWO)
    feed = made.feeds["Feed"]
    made.limit(feed, "nutrient", "Lysine", None, 5.0)
    closed = made.batch("Feed")
    made.set("Premix", opened=True)
    opened = made.batch("Feed")
    lysine = {
        name: made.library.values_of(made.key(name))[1].amount for name in ("Maize", "Salt", "Premix", "Carrier")
    }
    assert closed.limits[-1].value == pytest.approx(
        0.89 * lysine["Maize"] + 0.01 * lysine["Salt"] + 0.1 * lysine["Premix"]
    )
    assert opened.limits[-1].value == pytest.approx(
        0.89 * lysine["Maize"] + 0.05 * lysine["Salt"] + 0.06 * lysine["Carrier"]
    )
    assert opened.nutrients[0].value == pytest.approx(opened.limits[-1].value)


def test_a_premix_of_a_premix_is_opened_through_every_level() -> None:
    made = Feeds(THREE)
    made.set("Premix", opened=True)
    half = made.batch("Feed")
    assert lines(half) == {"Maize": 900.0, "Carrier": 80.0, "Base": 20.0}
    assert [(one.ingredient, one.mass_kg) for one in half.to_make] == [("Base", 20.0)]
    made.set("Base", opened=True)
    batch = made.batch("Feed")
    assert lines(batch) == {"Maize": 900.0, "Carrier": 80.0, "Salt": 19.8, "Iodine": 0.2}
    assert {line.ingredient: line.of_opened for line in batch.lines}["Iodine"] == ("Premix", "Base")
    assert batch.to_make == ()
    only_inner = Feeds(THREE)
    only_inner.set("Base", opened=True)
    assert [one.ingredient for one in only_inner.batch("Feed").to_make] == ["Premix"]


def test_an_opened_ingredient_without_an_answer_is_a_cause_that_names_it() -> None:
    made = Feeds(TWO)
    made.limit(made.feeds["Premix"], "ingredient", "Salt", 50.0)
    assert lines(made.batch("Feed"))["Premix"] == 100.0
    assert any("Premix is made by Premix formula, which has no answer" in one for one in made.batch("Feed").cautions)
    made.set("Premix", opened=True)
    batch = made.batch("Feed")
    assert batch.lines == ()
    assert (batch.cause or "").startswith("Premix is made by Premix formula, which has no answer: ")


@pytest.mark.parametrize("opened", [False, True])
def test_a_cycle_is_a_cause_and_never_an_endless_descent(opened: bool) -> None:
    made = Feeds({
        "Egg": {"Hen": 10.0, "Maize": 90.0}, "Hen": {"Egg": 10.0, "Maize": 90.0}, "Feed": {"Egg": 5.0, "Maize": 95.0}
    })
    for name in ("Egg", "Hen"):
        made.set(name, opened=opened)
    batch = made.batch("Feed")
    assert batch.lines == ()
    assert "would go into itself (Egg < Hen < Egg)" in (batch.cause or "")
    itself = made.batch("Hen")
    assert "would go into itself" in (itself.cause or "")


def test_a_line_of_an_opened_ingredient_is_fixed_and_not_the_ingredient_itself() -> None:
    made = Feeds(TWO)
    made.set("Premix", opened=True)
    assert lines(made.batch("Feed", fixed={made.key("Salt"): 50.01}))["Salt"] == 50.01
    with pytest.raises(Refused, match="Premix is opened into what it is made of; fix those lines instead"):
        made.batch("Feed", fixed={made.key("Premix"): 100.0})


def test_what_is_unknown_of_the_parts_is_a_caution_and_what_is_unknown_of_the_opened_one_is_none() -> None:
    made = Feeds(TWO)
    made.limit(made.feeds["Feed"], "nutrient", "Lysine", None, 50.0)
    for name in ("Carrier", "Premix"):
        made.library.apply([Change(made.library.value(made.key(name), 1), None)])
    closed = made.batch("Feed")
    assert any("Lysine of Premix is unknown" in one for one in closed.cautions)
    made.set("Premix", opened=True)
    opened = made.batch("Feed")
    assert any("Lysine of Carrier is unknown and counts as 0" in one for one in opened.cautions)
    assert not any("Lysine of Premix" in one for one in opened.cautions)


@pytest.mark.parametrize("opened", [False, True])
def test_what_a_made_ingredient_holds_is_forbidden_as_if_it_were_a_line(opened: bool) -> None:
    made = Feeds(TWO)
    made.set("Carrier", tags=(Tag.IONOPHORE, Tag.ONLY_WHEN_LISTED))
    made.set("Premix", opened=opened)
    assert made.batch("Feed").cause is None
    feed = made.feeds["Feed"]
    made.library.apply([Change(feed, replace(feed, animal=Animal.HORSE))])
    batch = made.batch("Feed")
    assert batch.lines == ()
    assert "holds an ionophore, which can kill horses" in (batch.cause or "")


def test_a_drug_inside_a_made_ingredient_is_told_of() -> None:
    made = Feeds(TWO)
    made.set("Carrier", tags=(Tag.MEDICATED,), drug="tylosin", withdrawal="2 days")
    assert any(
        text.startswith("Medicated: Premix holds Carrier. Drug: tylosin") and "withdrawal: 2 days" in text
        for text in made.batch("Feed").cautions
    )


def test_the_parts_of_an_opened_ingredient_need_no_admission_and_no_price() -> None:
    made = Feeds(TWO)
    made.set("Premix", opened=True)
    for quote in made.library.quotes_of(made.key("Carrier")):
        made.library.apply([Change(quote, None)])
    assert "no answer" in (made.batch("Feed").cause or "")  # the premix itself needs the price
    made.put(Quote(99, made.key("Carrier"), 80.0, "t", valid_from=TODAY))
    batch = made.batch("Feed")
    assert made.key("Carrier") not in {one.id for one in made.library.admitted(made.feeds["Feed"])}
    assert lines(batch)["Carrier"] == 60.0


@pytest.mark.usefixtures("quick_hashing")
def test_an_opened_ingredient_is_made_as_approved_whatever_its_formula_has_become(
    opened: Callable[[Library], Mill]
) -> None:
    made = Feeds(TWO)
    made.set("Premix", opened=True)
    mill = opened(made.library)
    staffed(mill)
    approve(mill, made.feeds["Premix"].id)
    before = make_batch(mill.library, made.feeds["Feed"].id, 1000.0, TODAY)
    for limit in mill.library.limits(made.feeds["Premix"].id):
        name = mill.library.ingredient(limit.subject.ids[0]).name
        for side in ("minimum", "maximum"):
            edits.set_bound(mill, limit.id, side, None)
        edits.set_bound(mill, limit.id, "minimum", {"Salt": 30.0, "Carrier": 70.0}[name])
    after = make_batch(mill.library, made.feeds["Feed"].id, 1000.0, TODAY)
    assert lines(after) == lines(before) == {"Maize": 890.0, "Carrier": 60.0, "Salt": 50.0}


@pytest.mark.usefixtures("quick_hashing")
def test_an_approved_batch_opens_its_premix_and_takes_rework(opened: Callable[[Library], Mill]) -> None:
    made = Feeds(TWO)
    made.ingredient("Returns", 50.0, {"Lysine": 1.0}, scale_id=FINE)
    mill = opened(made.library)
    staffed(mill)
    approve(mill, made.feeds["Feed"].id)
    feed = made.feeds["Feed"].id
    edits.change(mill, mill.library.ingredient(made.key("Premix")), opened=True)
    edits.set_price(mill, made.key("Maize"), 5000.0, TODAY)
    batch = approved_batch(mill.library, feed, 1000.0, TODAY, rework={made.key("Returns"): 10.0})
    assert lines(batch) == {"Maize": 801.0, "Returns": 100.0, "Carrier": 54.0, "Salt": 45.0}
    assert (batch.version, batch.draft) == ("version 1", False)
    assert [line.ingredient for line in batch.lines if line.rework] == ["Returns"]
