"""Whole batches of an order, from kilograms alone."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.domain.batches import Batch
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.formulas import Amounts, Animal, LimitKind, Subject
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.optimise.build.batch import broken_by
from blendapp.services.batch import make_batch, usual_batch_kg
from blendapp.services.formulate import formulate
from blendapp.services.order_split import split_order
from tests.mills import TODAY, Maker
from tests.outside import plain_feed


def mill(shares: dict[str, float], steps: dict[str, float | None] | None = None, amounts: Amounts = Amounts.BLEND,
         **formula: Any) -> Maker:
    """A formula whose mix is given: each ingredient at its share in % (or kg per day), on a scale of its own step."""
    make = Maker()
    make.nutrient("Protein")
    for number, (name, step) in enumerate((steps or {}).items(), 1):
        if step is not None:
            make.put(Scale(number, f"Scale of {name}", step))
    numbers = {name: n for n, (name, step) in enumerate((steps or {}).items(), 1) if step is not None}
    for name in shares:
        make.ingredient(name, 100.0, {"Protein": 10.0 * len(name)}, scale_id=numbers.get(name))
    feed = make.formula(amounts=amounts, **formula)
    for name, share in shares.items():
        make.limit(feed, "ingredient", name, share, share)
    return make


def kilograms(batch: Batch) -> dict[str, float]:
    return {line.ingredient: line.target_kg for line in batch.lines}


def test_a_mill_without_scales_weighs_in_hundredths_of_a_kg() -> None:
    make = mill({"Maize": 66.667, "Wheat": 33.333})
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert batch.cause is None
    assert kilograms(batch) == {"Maize": 666.67, "Wheat": 333.33}
    assert {line.step_kg for line in batch.lines} == {0.01}
    assert {line.scale for line in batch.lines} == {""}
    assert (batch.batches, batch.batch_kg, batch.total_kg, batch.residue_kg) == (1, 1000, 1000, 0)


def test_nine_lines_in_steps_of_5_kg_make_the_whole_of_2000_kg() -> None:
    """Each line rounded by itself comes to 1,995 kg."""
    kg = dict(zip("ABCDEFGHI", (623, 467, 313, 217, 152, 93, 62, 42, 31), strict=True))
    shares = {name: mass / 20 for name, mass in kg.items()}
    assert sum(kg.values()) == 2000
    assert sum(5 * round(mass / 5) for mass in kg.values()) == 1995
    batch = make_batch(mill(shares, dict.fromkeys(shares, 5.0)).library, 1, 2000, TODAY)
    assert (batch.total_kg, batch.residue_kg) == (2000, 0)
    kept_in_hand(batch)


def kept_in_hand(batch: Batch, tolerance: float = 0.02) -> None:
    """Every line a multiple of its step within the step or its tolerance of its share, or absent where it may be."""
    for line in batch.lines:
        steps = line.target_kg / line.step_kg
        assert steps == pytest.approx(round(steps), abs=1e-6), line
        assert abs(line.target_kg - line.share_kg) <= max(line.step_kg, tolerance * line.share_kg) * (1 + 1e-9), line


@settings(max_examples=25, deadline=None)
@given(
    st.lists(st.tuples(st.integers(3, 400), st.sampled_from([5.0, 1.0, 0.5, 0.25, 0.05])), min_size=2, max_size=7),
    st.integers(200, 4000),
)
def test_a_batch_is_whole_steps_near_its_shares_and_off_its_total_by_less_than_a_step(
    lines: list[tuple[int, float]], order: int
) -> None:
    total = sum(share for share, _step in lines)
    shares = {f"I{n}": 100 * share / total for n, (share, _step) in enumerate(lines)}
    shares["I0"] = 100 - sum(share for name, share in shares.items() if name != "I0")
    library = mill(shares, {f"I{n}": step for n, (_share, step) in enumerate(lines)}).library
    for limit in library.limits(1):  # the mix is given by price alone, so that rounding breaks no limit of it
        library.apply([Change(limit, replace(limit, minimum=limit.minimum and limit.minimum * 0.5, maximum=100.0))])
    result = formulate(library, 1, TODAY)
    batch = make_batch(library, 1, float(order), TODAY, result=result)
    if batch.cause is not None:
        assert batch.lines == ()
        return
    kept_in_hand(batch)
    coarsest = max(line.step_kg for line in batch.lines)
    assert abs(batch.residue_kg) <= coarsest / 2 + 1e-9 or batch.unproven == "total"


@pytest.mark.parametrize(("kg", "words"), [  # of 450 kg a half is 225 kg, of which 5 kg are more than 2 %
    (1000.0, "No scale weighs Wheat. Choose one under Scale, for example Coarse in steps of 5 kg."),
    (450.0, "No scale weighs Wheat. Choose one under Scale, for example Middle in steps of 0.5 kg."),
    (30.0, "No scale weighs Wheat. Choose one under Scale, for example By hand in steps of 0.001 kg."),
    (0.1, "Enter one with a step of at most 0.001 kg that holds 0.05 kg, and choose it under Scale."),
])
def test_the_scale_proposed_is_the_coarsest_that_takes_the_share_within_its_tolerance(kg: float, words: str) -> None:
    make = mill({"Maize": 50.0, "Wheat": 50.0}, {"Maize": 0.001})
    make.put(Scale(2, "Coarse", 5.0, 20.0, 2000.0))
    make.put(Scale(3, "Middle", 0.5, 20.0, 300.0))
    make.put(Scale(4, "By hand", 0.001, 0.1, 15.0, hand_add=True))
    make.library.apply([Change(make.library.records["scale"][1], Scale(1, "Own", 0.001, 0.0, 0.01))])
    assert words in (make_batch(make.library, 1, kg, TODAY).cause or "")


@pytest.mark.parametrize(
    ("order", "mixers", "count"),
    [
        (7300, [(500, 2000)], 4),
        (2000, [(500, 2000)], 1),
        (2000.0000001, [(500, 2000)], 1),
        (2001, [(500, 2000)], 2),
        (400, [(500, 2000)], None),
        (3000, [(1600, 2000)], None),
        (3000, [(1600, 2000), (100, 1000)], 3),
        (900, [(None, None)], 1),
        (900, [(None, 300)], 3),
        (400, [(500, None)], None),
        (5000, [], 1),
    ],
)
def test_an_order_is_the_fewest_equal_batches_that_a_mixer_can_hold_and_fill(
    order: float, mixers: list[tuple[float | None, float | None]], count: int | None
) -> None:
    made = [Mixer(n, f"Mixer {n}", least, greatest) for n, (least, greatest) in enumerate(mixers, 1)]
    assert split_order(made, order) == count


def test_7300_kg_on_a_mixer_of_2000_are_four_batches_of_1825_kg_each() -> None:
    make = mill({"Maize": 60.0, "Wheat": 40.0})
    make.put(Mixer(1, "Mixer", 500.0, 2000.0))
    batch = make_batch(make.library, 1, 7300, TODAY)
    assert (batch.order_kg, batch.batches, batch.batch_kg) == (7300, 4, 1825)
    assert kilograms(batch) == {"Maize": 1095.0, "Wheat": 730.0}
    assert batch.total_kg == 1825


def test_an_order_that_no_mixer_can_make_says_what_the_mixers_hold() -> None:
    make = mill({"Maize": 60.0, "Wheat": 40.0})
    make.put(Mixer(1, "Old mixer", 500.0, 2000.0))
    batch = make_batch(make.library, 1, 300, TODAY)
    assert batch.lines == ()
    assert "Old mixer holds 500 to 2000 kg" in (batch.cause or "")


def test_a_line_without_a_scale_stops_the_sheet_with_a_proposal() -> None:
    make = mill({"Maize": 60.0, "Wheat": 38.0, "Salt": 2.0}, {"Maize": 5.0, "Wheat": None, "Salt": 0.1})
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert batch.lines == ()
    assert "No scale weighs Wheat." in (batch.cause or "")
    assert "Scale of Maize in steps of 5 kg" in (batch.cause or "")


def test_an_unused_ingredient_needs_no_scale() -> None:
    make = mill({"Maize": 100.0}, {"Maize": 5.0})
    make.ingredient("Wheat", 900.0)
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert batch.cause is None
    assert kilograms(batch) == {"Maize": 1000.0}


def lysine_mill(step: float) -> Library:
    make = Maker()
    make.nutrient("Lysine")
    make.put(Scale(1, "Big", 5.0 if step > 1 else 0.01))
    make.put(Scale(2, "Small", step))
    make.ingredient("Maize", 200, {"Lysine": 0.3}, scale_id=1)
    make.ingredient("Lysine HCl", 2000, {"Lysine": 78.0}, scale_id=2)
    feed = make.formula()
    make.limit(feed, "nutrient", "Lysine", 0.512, 0.515)
    make.limit(feed, "ingredient", "Maize", 99)
    return make.library


@pytest.mark.parametrize(("step", "broken"), [(2.0, (0,)), (0.01, ())])
def test_a_limit_that_rounding_breaks_is_named_and_the_batch_is_not_to_be_mixed(
    step: float, broken: tuple[int, ...]
) -> None:
    library = lysine_mill(step)
    batch = make_batch(library, 1, 1000, TODAY)
    assert batch.broken == broken
    assert batch.fit_to_mix is not bool(broken)
    if broken:
        value = batch.limits[0].value
        assert value is not None
        assert not 0.512 <= value <= 0.515
        assert batch.limits[0].binding is None


@pytest.mark.parametrize("amounts", Amounts)
@pytest.mark.parametrize("order", [100.0, 333.0, 2000.0])
def test_the_limits_of_a_batch_are_those_of_its_kilograms(amounts: Amounts, order: float) -> None:
    blend = amounts is Amounts.BLEND
    make = mill({"Maize": 12.4, "Wheat": 5.6, "Salt": 0.123} if not blend else {"Maize": 62.4, "Wheat": 36.3, "Salt":
                1.3}, {"Maize": 5.0, "Wheat": 1.0, "Salt": 0.05}, amounts)
    feed = make.library.formula(1)
    make.limit(feed, "nutrient", "Protein", 40.0, 60.0)
    make.limit(feed, "group", ["Maize", "Salt"], maximum=80.0)
    make.limit(feed, "ratio", ["Salt"], None, 0.5, per=["Wheat"])
    if not blend:
        make.limit(feed, "nutrient", "Protein", 5.0, None, basis="per day", unit="g/day")
    library = make.library
    batch = make_batch(library, 1, order, TODAY)
    assert batch.cause is None
    fed = {"Maize": 12.4, "Wheat": 5.6, "Salt": 0.123}
    scale = (1.0 if blend else sum(fed.values())) / batch.total_kg
    amounts_of = {line.ingredient_id: line.target_kg * scale for line in batch.lines}
    broken = []
    for index, (limit, one) in enumerate(zip(library.limits(1), batch.limits, strict=True)):
        expected = plain_feed.value(library, feed, limit, amounts_of)
        assert one.value == pytest.approx(expected, rel=1e-9, abs=1e-12)
        assert expected is not None
        low = limit.minimum is not None and expected < limit.minimum - 1e-9 * abs(limit.minimum)
        high = limit.maximum is not None and expected > limit.maximum + 1e-9 * abs(limit.maximum)
        if low or high:
            broken.append(index)
            off = broken_by(one)
            assert off is not None
            assert off < 0 if low else off > 0
    assert batch.broken == tuple(broken)


def test_a_bound_of_very_little_is_held_in_share_of_itself() -> None:
    make = Maker()
    make.nutrient("Vitamin B12", "%")
    make.put(Scale(1, "Big", 1.0))
    make.ingredient("Maize", 200, {"Vitamin B12": 0.0}, scale_id=1)
    make.ingredient("Premix", 900, {"Vitamin B12": 1e-8}, scale_id=1)
    feed = make.formula()
    make.limit(feed, "nutrient", "Vitamin B12", 1.04e-10, 1.06e-10)
    batch = make_batch(make.library, feed.id, 100, TODAY)
    assert batch.cause is None
    assert kilograms(batch)["Premix"] in (1.0, 2.0)
    assert batch.broken == (0,)


def test_a_ration_is_made_in_the_proportions_of_its_kilograms() -> None:
    make = mill({"Silage": 30.0, "Hay": 10.0}, amounts=Amounts.RATION)
    assert kilograms(make_batch(make.library, 1, 1000, TODAY)) == {"Silage": 750.0, "Hay": 250.0}


def test_a_ration_of_nothing_cannot_be_weighed_and_says_so() -> None:
    make = Maker()
    make.ingredient("Hay", 100.0)
    make.formula("Cow", amounts=Amounts.RATION)
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert batch.lines == ()
    assert "Cow is a mix of nothing" in (batch.cause or "")


def test_a_formula_without_an_answer_makes_no_batch_and_says_why() -> None:
    make = mill({"Maize": 60.0, "Wheat": 60.0})
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert batch.lines == ()
    assert batch.total_kg == 0
    assert "Feed has no answer" in (batch.cause or "")
    assert [x.value for x in batch.limits] == [None, None]


@pytest.mark.parametrize("order", [0.0, -5.0, math.inf, math.nan])
def test_an_order_that_is_no_mass_is_refused(order: float) -> None:
    make = mill({"Maize": 100.0})
    with pytest.raises(Refused, match="above 0 kg"):
        make_batch(make.library, 1, order, TODAY)


def test_lines_stand_by_scale_the_coarsest_first_the_heaviest_first_and_hand_adds_last() -> None:
    make = Maker()
    make.put(Scale(1, "Bench", 0.01, hand_add=True))
    make.put(Scale(2, "Small", 0.5))
    make.put(Scale(3, "Big", 5.0))
    for name, share, scale in (("Salt", 1, 1), ("Lime", 8, 2), ("Maize", 30, 3), ("Wheat", 50, 3), ("Oil", 11, 2)):
        make.ingredient(name, 100, scale_id=scale)
        if name == "Salt":
            feed = make.formula()
        make.limit(feed, "ingredient", name, share, share)
    batch = make_batch(make.library, 1, 1000, TODAY)
    assert [line.ingredient for line in batch.lines] == ["Wheat", "Maize", "Oil", "Lime", "Salt"]
    assert [line.hand_add for line in batch.lines] == [False, False, False, False, True]


def test_a_medicated_line_carries_what_was_entered_and_the_batch_its_cautions() -> None:
    make = mill({"Maize": 99.0}, animal=Animal.PIG)
    make.ingredient("Medicine", 900.0, tags=(Tag.MEDICATED,), drug="tylosin", drug_level="100 g/t",
                    drug_species="pigs", withdrawal="0 days")
    make.limit(make.library.formula(1), "ingredient", "Medicine", 1.0, 1.0)
    batch = make_batch(make.library, 1, 1000, TODAY)
    line = next(line for line in batch.lines if line.ingredient == "Medicine")
    assert (line.drug, line.drug_level, line.drug_species, line.withdrawal) == ("tylosin", "100 g/t", "pigs", "0 days")
    assert batch.cautions[0] == GENERAL_CAUTION
    assert any(text.startswith("Medicated: Medicine") for text in batch.cautions)


def test_rounding_that_passes_what_is_forbidden_makes_no_batch() -> None:
    make = Maker()
    make.nutrient("Protein", key="crude protein")
    make.put(Scale(1, "Big", 1.0))
    make.ingredient("Maize", 200, {"Protein": 8}, scale_id=1)
    make.ingredient("Urea", 400, {"Protein": 281.0}, scale_id=1, tags=(Tag.NON_PROTEIN_NITROGEN,))
    feed = make.formula(animal=Animal.PIG)
    make.limit(feed, "ingredient", "Urea", 0.44, 0.44)
    batch = make_batch(make.library, 1, 1150, TODAY)
    assert batch.cause is None, "5.06 kg of 1,150 are 5 kg: 1.22 %"
    batch = make_batch(make.library, 1, 130, TODAY)
    assert batch.lines == ()
    assert "at most 1.25 %" in (batch.cause or ""), "0.57 kg of 130 are 1 kg: 2.16 %"


def test_the_usual_batch_is_the_formulas_own_else_the_greatest_mixers_else_a_tonne() -> None:
    make = mill({"Maize": 100.0})
    assert usual_batch_kg(make.library, 1) == 1000
    make.put(Mixer(1, "Small", None, 500.0))
    make.put(Mixer(2, "Big", None, 2000.0))
    assert usual_batch_kg(make.library, 1) == 2000
    own = make.formula("Own", batch_kg=750.0)
    assert usual_batch_kg(make.library, own.id) == 750


def test_a_class_limit_of_a_batch_counts_the_class() -> None:
    make = Maker()
    make.ingredient("Maize", 200, class_name="Cereals")
    make.ingredient("Meal", 100)
    feed = make.formula()
    from blendapp.domain.formulas import Limit

    make.put(Limit(1, feed.id, LimitKind.GROUP, Subject.of_class("Cereals"), minimum=33.333, maximum=33.334))
    batch = make_batch(make.library, feed.id, 10, TODAY)
    assert kilograms(batch) == {"Maize": 3.33, "Meal": 6.67}
    assert batch.limits[0].value == pytest.approx(33.3)
    assert batch.limits[0].binding is None
    assert batch.broken == (0,)
