"""Liquids that a meter doses in steps of litres, and scales whose step is at fault."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from typing import Any

import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.library import Library
from blendapp.domain.plant import Scale, Site
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.services.batch import make_batch
from blendapp.services.sheets import batch_from_plain, batch_to_plain
from tests.mills import TODAY, Maker

BIG, PUMP, HAND = 1, 2, 3
OIL = 3


def mill(density: float | None = 0.917, step_l: float | None = 0.5, **pump: Any) -> Library:
    """Maize 70, meal 27, oil 3 %: oil on a pump that doses half litres of 0.4585 kg."""
    make = Maker()
    make.put(Scale(BIG, "Big scale", 5.0, 10.0, 2000.0))
    make.put(Scale(PUMP, "Oil pump", None, step_l=step_l, **pump))
    make.put(Scale(HAND, "Bench", 0.001, hand_add=True))
    feed = make.formula()
    for name, share, scale in (("Maize", 70.0, BIG), ("Meal", 27.0, BIG), ("Oil", 3.0, PUMP)):
        make.ingredient(
            name, 300.0, scale_id=scale, dry_matter_percent=88.0, density_kg_per_l=density if name == "Oil" else None
        )
        make.limit(feed, "ingredient", name, share * 0.9, share * 1.1)
    return make.library


def batch_of(library: Library, kg: float = 1000.0, **more: Any) -> Batch:
    return make_batch(library, 1, kg, TODAY, **more)


def changed(library: Library, scale_id: int, **fields: Any) -> Library:
    scale = library.records["scale"][scale_id]
    library.apply([Change(scale, replace(scale, **fields))])
    return library


def test_a_pump_doses_whole_steps_of_litres_and_the_kilograms_are_litres_times_density() -> None:
    for kg in (200.0, 1000.0, 1825.0, 2000.0):
        batch = batch_of(mill(), kg)
        assert batch.cause is None
        oil = next(line for line in batch.lines if line.ingredient == "Oil")
        assert (oil.scale, oil.step_l, oil.hand_add) == ("Oil pump", 0.5, False)
        assert oil.target_l is not None
        assert Fraction(oil.target_l) % Fraction(1, 2) == 0
        assert oil.target_kg == float(Fraction(str(oil.target_l)) * Fraction("0.917"))
        assert oil.step_kg == 0.4585
        assert oil.tolerance_kg is not None
        assert abs(oil.target_kg - oil.share_kg) <= oil.tolerance_kg
        assert batch_from_plain(batch_to_plain(batch)) == batch
        assert all(line.target_l is None and line.step_l is None for line in batch.lines if line is not oil)


def test_a_meter_is_never_tried_for_what_is_not_assigned_to_it() -> None:
    library = mill()
    salt = replace(library.ingredient(2), scale_id=BIG, density_kg_per_l=1.2)
    library.apply([Change(library.ingredient(2), salt)])
    batch = batch_of(library, 10.0)  # 2.7 kg of meal are too little for the big scale; the bench weighs them
    assert {line.ingredient: line.scale for line in batch.lines}["Meal"] == "Bench"


def test_a_dose_too_small_for_the_pump_goes_to_a_scale() -> None:
    batch = batch_of(mill(least_l=5.0), 100.0)  # 3 kg are 3.27 l
    oil = next(line for line in batch.lines if line.ingredient == "Oil")
    assert (oil.scale, oil.target_l) == ("Bench", None)


def test_a_dose_stays_between_the_least_and_greatest_litres_of_the_pump() -> None:
    library = mill(least_l=5.0, greatest_l=33.0)
    oil = next(line for line in batch_of(library).lines if line.ingredient == "Oil")
    assert oil.target_l is not None
    assert 5.0 <= oil.target_l <= 33.0
    too_much = batch_of(library, 1500.0)  # more than 40 kg; the pump doses 30
    assert next(line for line in too_much.lines if line.ingredient == "Oil").scale == "Big scale"


def test_a_pump_without_the_density_of_its_liquid_is_a_cause_with_the_mend() -> None:
    batch = batch_of(mill(density=None))
    assert batch.lines == ()
    assert batch.cause == (
        "Oil pump doses Oil in litres; enter Density kg/l of Oil, or give it a scale in kg."
    )


@pytest.mark.parametrize(
    ("scale_id", "fields", "words"),
    [
        (BIG, {"step_kg": 0.0}, "The scale Big scale has a step of 0 kg; enter a step above 0."),
        (HAND, {"step_kg": 0.0}, "The scale Bench has a step of 0 kg; enter a step above 0."),
        (PUMP, {"step_l": 0.0}, "The meter Oil pump has a step of 0 l; enter a step above 0."),
        (BIG, {"step_kg": None}, "The scale Big scale has no step; enter Step kg, or Step l for a liquid meter."),
        (BIG, {"step_kg": -5.0}, "The scale Big scale has a step of -5 kg; enter a step above 0."),
    ],
)
def test_a_scale_with_a_step_of_0_is_named_once(scale_id: int, fields: dict[str, Any], words: str) -> None:
    assert batch_of(changed(mill(), scale_id, **fields)).cause == words


def test_a_proposal_names_no_meter_and_no_scale_without_a_step() -> None:
    library = changed(mill(), HAND, step_kg=0.0)
    library.apply([Change(library.ingredient(2), replace(library.ingredient(2), scale_id=None))])
    assert batch_of(library, 1100.0).cause == (
        "No scale weighs Meal. Choose one under Scale, for example Big scale in steps of 5 kg."
    )
    only = changed(library, BIG, step_kg=0.0)
    assert batch_of(only).cause == (
        "No scale weighs Meal, and none here takes its share of 243 kg within its tolerance. Enter one with a step of "
        "at most 4.8 kg that holds 243 kg, and choose it under Scale."
    )


def test_where_only_pumps_stand_what_they_do_not_dose_is_a_question() -> None:
    library = mill()
    library.apply([Change(None, Site(1, "North")), Change(None, Site(2, "South"))])
    for scale_id, site_id in ((BIG, 2), (HAND, 2), (PUMP, 1)):
        changed(library, scale_id, site_id=site_id)
    cause = batch_of(library.at_site(1)).cause or ""
    for name, kg, step in (("Maize", "730", "14"), ("Meal", "243", "4.8")):
        assert f"No scale weighs {name}, and none here takes its share of {kg} kg within its tolerance." in cause
        assert f"a step of at most {step} kg that holds {kg} kg" in cause
    assert "Oil" not in cause


def test_a_mass_read_from_the_sheet_in_grams_fixes_whole_steps_of_litres() -> None:
    fine = mill(density=0.9173, step_l=0.05)  # steps of 0.045865 kg
    oil = next(line for line in batch_of(fine).lines if line.ingredient == "Oil")
    fixed = batch_of(fine, fixed={OIL: round(oil.target_kg, 3)})
    assert next(line for line in fixed.lines if line.ingredient == "Oil").target_kg == oil.target_kg
    with pytest.raises(Refused, match=r"Oil is fixed at 30\.02 kg, no multiple of a scale's step"):
        batch_of(changed(fine, HAND, step_kg=0.5), fixed={OIL: 30.02})


def test_a_mass_read_in_grams_fixes_whole_half_pounds_and_a_scale_in_kilograms_is_taken_at_its_word() -> None:
    library = changed(mill(), BIG, step_kg=0.5 * 0.45359237, least_kg=None)
    maize = next(line for line in batch_of(library).lines if line.ingredient == "Maize")
    fixed = batch_of(library, fixed={1: round(maize.target_kg, 3)})
    assert next(line for line in fixed.lines if line.ingredient == "Maize").target_kg == maize.target_kg
    in_kg = changed(mill(), HAND, step_kg=5.0)
    with pytest.raises(Refused, match=r"Maize is fixed at 700\.0004 kg, no multiple"):
        batch_of(in_kg, fixed={1: 700.0004})


def test_a_dose_that_no_scale_takes_is_said_in_litres() -> None:
    library = changed(mill(greatest_l=30.0), HAND, greatest_kg=2.0)
    changed(library, BIG, least_kg=200.0)
    assert batch_of(library, 1500.0).cause == (
        "Oil: no scale can weigh 40.5 kg within its tolerance (Oil pump: steps of 0.5 l (0.4585 kg) from 0 to 30 l; "
        "Big scale: steps of 5 kg from 200 to 2000 kg; Bench: steps of 0.001 kg from 0 to 2 kg). Enter a scale that "
        "can."
    )


def test_scales_and_mixers_of_another_site_do_not_count() -> None:
    library = mill()
    library.apply([Change(None, Site(1, "North")), Change(None, Site(2, "South"))])
    for scale in list(library.scales):
        changed(library, scale.id, site_id=2)
    library.apply([Change(None, Scale(4, "North scale", 1.0, site_id=1))])
    south, north = batch_of(library.at_site(2)), batch_of(library.at_site(1))
    assert {line.scale for line in south.lines} == {"Big scale", "Oil pump"}
    assert {line.scale for line in north.lines} == {"North scale"}
    assert (south.site, north.site) == ("South", "North")
    library.apply([Change(library.records["scale"][4], None)])
    assert batch_of(library.at_site(1)).cause == "No scale stands at North; enter one there, or one of no site."
