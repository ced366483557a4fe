"""Rework goes in at its stated share with its own composition, and what it brings is held against the whole."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Amounts, Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.plant import Scale
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.services.batch import make_batch
from tests.mills import TODAY, Maker

MAIZE, MEAL, RETURNS, OTHER = 1, 2, 3, 4


def mill(animal: Animal | None = Animal.PIG, **returns: Any) -> Maker:
    """Maize 60 and meal 40 % with 16 to 24 % protein; returns of 10 % protein and others of 20 %."""
    make = Maker()
    make.put(Scale(1, "Big", 1.0))
    make.put(Scale(2, "Bench", 0.001, hand_add=True))
    make.nutrient("Protein")
    feed = make.formula(animal=animal)
    for name, protein in (("Maize", 8.0), ("Meal", 46.0)):
        make.ingredient(name, 200.0, {"Protein": protein}, scale_id=1)
    make.ingredient("Returns", None, {"Protein": 10.0}, scale_id=1, **{"tags": (Tag.ONLY_WHEN_LISTED,), **returns})
    make.ingredient("Other", 10.0, {"Protein": 20.0}, scale_id=2, tags=(Tag.ONLY_WHEN_LISTED,))
    make.limit(feed, "ingredient", "Maize", 50.0, 60.0)
    make.limit(feed, "ingredient", "Meal", 30.0, 40.0)
    make.limit(feed, "nutrient", "Protein", 16.0, 24.0)
    return make


def batch_of(make: Maker, kg: float = 1000.0, **more: Any) -> Batch:
    return make_batch(make.library, 1, kg, TODAY, **more)


def lines(batch: Batch) -> dict[str, float]:
    assert batch.cause is None, batch.cause
    return {line.ingredient: line.target_kg for line in batch.lines}


def test_rework_has_its_share_and_the_rest_keeps_its_proportions() -> None:
    batch = batch_of(mill(), rework={RETURNS: 5.0, OTHER: 2.5})
    assert lines(batch) == {"Maize": 555.0, "Meal": 370.0, "Returns": 50.0, "Other": 25.0}
    assert {line.ingredient for line in batch.lines if line.rework} == {"Returns", "Other"}
    assert [line.share_kg for line in batch.lines if line.rework] == pytest.approx([50.0, 25.0])
    # 555 x 8 + 370 x 46 + 50 x 10 + 25 x 20 = 22,460 of 1,000 kg; maize and meal are shares of the whole.
    by_name = {limit.name: limit.value for limit in batch.limits}
    assert by_name == {"Maize": pytest.approx(55.5), "Meal": pytest.approx(37.0), "Protein": pytest.approx(22.46)}
    assert batch.broken == ()


def test_a_limit_that_rework_breaks_is_named() -> None:
    batch = batch_of(mill(), rework={RETURNS: 30.0})
    assert [batch.limits[index].name for index in batch.broken] == ["Maize", "Meal"]
    assert not batch.fit_to_mix


def test_rework_of_what_the_mix_holds_is_one_line_of_both() -> None:
    batch = batch_of(mill(), rework={MEAL: 10.0})
    # 360 of the mix in 90 % of it, and 100.
    assert lines(batch) == {"Maize": 540.0, "Meal": 460.0}
    assert {line.ingredient for line in batch.lines if line.rework} == {"Meal"}


def test_rework_is_weighed_in_whole_steps_within_its_tolerance() -> None:
    batch = batch_of(mill(), 987.0, rework={RETURNS: 7.3})
    returns = next(line for line in batch.lines if line.rework)
    assert returns.share_kg == pytest.approx(72.051)
    assert returns.target_kg == round(returns.target_kg)
    assert returns.tolerance_kg is not None
    assert abs(returns.target_kg - returns.share_kg) <= returns.tolerance_kg


@pytest.mark.parametrize(
    ("rework", "words"),
    [
        ({RETURNS: 0.0}, ["Rework goes in at a share above 0 %; 0 % is none."]),
        ({RETURNS: -1.0, OTHER: math.nan}, ["a share above 0 %; -1 %", "a share above 0 %"]),
        ({RETURNS: 60.0, OTHER: 40.0}, ["Rework of 100 % leaves nothing of the feed itself"]),
        ({77: 5.0}, ["Rework must be an ingredient of the mill"]),
    ],
)
def test_rework_that_is_no_share_is_refused_with_every_fault(rework: dict[int, float], words: list[str]) -> None:
    with pytest.raises(Refused) as refused:
        batch_of(mill(), rework=rework)
    said = [str(problem) for problem in refused.value.problems]
    assert len(said) == len(words)
    assert all(some in one for some, one in zip(words, said, strict=True))


@pytest.mark.parametrize(
    ("animal", "tag", "words"),
    [
        (Animal.HORSE, Tag.IONOPHORE, "which can kill horses"),
        (Animal.CATTLE, Tag.RUMINANT_PROTEIN, "prohibited in feed for cattle"),
    ],
)
def test_forbidden_rework_makes_no_batch(animal: Animal, tag: Tag, words: str) -> None:
    make = mill(animal, tags=(tag,))
    assert batch_of(make).cause is None
    batch = batch_of(make, rework={RETURNS: 1.0})
    assert batch.lines == ()
    assert words in (batch.cause or "")
    assert lines(batch_of(mill(Animal.PIG, tags=(tag,)), rework={RETURNS: 1.0}))["Returns"] == 10.0


def test_medicated_rework_is_said_first_and_loudly_where_the_mix_does_not_hold_it() -> None:
    make = mill(tags=(Tag.MEDICATED,), drug="tylosin")
    batch = batch_of(make, rework={RETURNS: 5.0})
    assert batch.cautions[1].startswith("MEDICATED REWORK: Returns brings Returns (tylosin) into Feed")
    listed = mill(tags=(Tag.MEDICATED,), drug="tylosin")
    listed.library.apply([Change(None, replace(listed.library.quotes_of(1)[0], id=50, ingredient_id=RETURNS))])
    listed.limit(listed.library.formula(1), "ingredient", "Returns", 1.0, 20.0)
    held = batch_of(listed, rework={RETURNS: 5.0})
    assert not any("MEDICATED REWORK" in one for one in held.cautions)
    assert any(one.startswith("Medicated: Returns") for one in held.cautions)


def test_rework_of_a_feed_that_was_made_with_a_drug_is_said_too() -> None:
    make = mill()
    drug = make.ingredient("Carrier", 900.0, tags=(Tag.MEDICATED,), drug="tylosin", scale_id=2)
    feed = make.formula("Medicated feed")
    make.limit(feed, "ingredient", "Carrier", 1.0, 1.0)
    make.limit(feed, "ingredient", "Maize", 99.0, 99.0)
    returns = make.library.ingredient(RETURNS)
    make.library.apply([Change(returns, replace(returns, made_by_formula_id=feed.id, opened=True))])
    batch = batch_of(make, rework={RETURNS: 5.0})
    assert lines(batch)["Returns"] == 50.0, "rework is there; it is never opened"
    assert any("MEDICATED REWORK: Returns brings Carrier (tylosin)" in one for one in batch.cautions)
    assert batch.to_make == (), "what comes back is not made first"
    assert drug.id not in {line.ingredient_id for line in batch.lines}


def test_what_is_unknown_of_rework_under_a_limit_is_a_caution() -> None:
    make = mill()
    make.library.apply([Change(make.library.value(RETURNS, 1), None)])
    assert any(
        "Protein of Returns is unknown and counts as 0" in one
        for one in batch_of(make, rework={RETURNS: 5.0}).cautions
    )
    assert not any("Returns" in one for one in batch_of(make).cautions)


def test_a_line_of_rework_can_be_fixed_like_any_other() -> None:
    batch = batch_of(mill(), rework={RETURNS: 5.0}, fixed={RETURNS: 51.0})
    assert lines(batch)["Returns"] == 51.0
    assert batch.total_kg == 1000.0


def test_a_ration_with_rework_feeds_the_same_kilograms_a_day() -> None:
    make = Maker()
    for name in ("Hay", "Barley"):
        make.ingredient(name, 100.0)
    make.ingredient("Returns", 10.0, tags=(Tag.ONLY_WHEN_LISTED,))
    feed = make.formula(amounts=Amounts.RATION)
    make.limit(feed, "ingredient", "Hay", 6.0, 6.0)
    make.limit(feed, "ingredient", "Barley", 4.0, 4.0)
    make.limit(feed, "nutrient", "Dry matter", basis="per day")
    batch = make_batch(make.library, 1, 1000.0, TODAY, rework={RETURNS: 10.0})
    assert lines(batch) == {"Hay": 540.0, "Barley": 360.0, "Returns": 100.0}
    assert [limit.value for limit in batch.limits[:2]] == pytest.approx([5.4, 3.6])


def test_rework_without_a_scale_is_a_question_with_a_proposal() -> None:
    make = mill()
    returns = make.library.ingredient(RETURNS)
    make.library.apply([Change(returns, replace(returns, scale_id=None))])
    assert "No scale weighs Returns. Choose one under Scale" in (batch_of(make, rework={RETURNS: 5.0}).cause or "")
    assert batch_of(make).cause is None
