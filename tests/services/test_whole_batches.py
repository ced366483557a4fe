"""Batches of a mill: scales that can weigh each line, tolerances, fixed lines, limits from the kilograms."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from blendapp.domain.batches import Batch, proof_words
from blendapp.domain.formulas import Amounts, Formula, LimitKind
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from blendapp.services.batch import make_batch
from blendapp.services.sheets import batch_from_plain, batch_to_plain
from tests.mills import TODAY, Maker

BIG, SMALL, HAND = 1, 2, 3
SCALES = (
    Scale(BIG, "Big scale", 5.0, 20.0, 2000.0),
    Scale(SMALL, "Small scale", 0.5, 1.0, 100.0, tolerance_percent=3.0),
    Scale(HAND, "Hand-add", 0.001, 0.01, 5.0, hand_add=True),
)


def mill(
    shares: Mapping[str, float], on: Mapping[str, int | None], scales: tuple[Scale, ...] = SCALES,
    mixers: tuple[Mixer, ...] = (), tags: Mapping[str, tuple[Tag, ...]] | None = None, **formula: Any,
) -> tuple[Library, Formula]:
    """A formula whose mix is given: each ingredient at its share in % (blend) or kg per day (ration)."""
    make = Maker()
    for scale in scales:
        make.put(scale)
    for mixer in mixers:
        make.put(mixer)
    feed = make.formula(**formula)
    for name, share in shares.items():
        make.ingredient(name, 100.0, scale_id=on.get(name), tags=(tags or {}).get(name, ()))
        make.limit(feed, "ingredient", name, share, share)
    return make.library, feed


def batch_of(made: tuple[Library, Formula], kg: float, **more: Any) -> Batch:
    library, feed = made
    return make_batch(library, feed.id, kg, TODAY, **more)


def lines(batch: Batch) -> dict[str, float]:
    assert batch.cause is None, batch.cause
    return {line.ingredient: line.target_kg for line in batch.lines}


def key_of(library: Library, name: str) -> int:
    found = library.named("ingredient", name)
    assert found is not None
    return int(found.id)


def test_7300_kg_in_a_mixer_of_2000_kg_are_four_batches_of_1825_kg() -> None:
    made = mill(
        {"Maize": 62.3, "Wheat": 30.2, "Meal": 7.5}, {"Maize": BIG, "Wheat": BIG, "Meal": BIG},
        mixers=(Mixer(1, "Mixer", 500.0, 2000.0),),
    )
    batch = batch_of(made, 7300.0)
    assert (batch.batches, batch.batch_kg, batch.total_kg, batch.residue_kg) == (4, 1825.0, 1825.0, 0.0)
    assert all(kg % 5 == 0 for kg in lines(batch).values())
    assert batch.proven


def test_nine_lines_of_2000_kg_in_5_kg_steps_come_to_2000_kg_and_not_to_1995() -> None:
    shares = (800.6, 400.6, 300.5, 200.5, 120.6, 80.6, 50.5, 30.6, 15.5)
    names = [f"Meal {k}" for k in range(9)]
    made = mill(
        {name: share / 20 for name, share in zip(names, shares, strict=True)}, dict.fromkeys(names, BIG),
        scales=(Scale(BIG, "Big scale", 5.0, 10.0),),
    )
    batch = batch_of(made, 2000.0)
    assert sum(round(share / 5) * 5 for share in shares) == 1995
    assert batch.total_kg == 2000.0
    assert lines(batch)["Meal 0"] == 805.0
    # Nine shares fixed to the gram cannot all be kept in 5 kg steps: every limit that breaks is named.
    assert len(batch.broken) == 9
    assert not batch.fit_to_mix


def test_a_line_too_small_for_its_scale_goes_to_the_coarsest_that_can_weigh_it_and_to_hand_adds_last() -> None:
    on = {"Maize": BIG, "Meal": BIG, "Salt": BIG, "Premix": BIG, "Trace": HAND}
    batch = batch_of(mill({"Maize": 90.0, "Meal": 9.2, "Salt": 0.5, "Premix": 0.04, "Trace": 0.26}, on), 1000.0)
    scales = {line.ingredient: line.scale for line in batch.lines}
    assert scales == {
        "Maize": "Big scale", "Meal": "Big scale", "Salt": "Small scale", "Premix": "Hand-add", "Trace": "Hand-add"
    }
    assert [line.hand_add for line in batch.lines] == [False, False, False, True, True]


def test_a_line_that_no_scale_can_weigh_is_a_question_whose_proposal_holds() -> None:
    made = mill({"Maize": 99.9995, "Trace": 0.0005}, {"Maize": BIG, "Trace": HAND}, mixers=())
    batch = batch_of(made, 1000.0)
    assert batch.lines == ()
    assert batch.cause is not None
    assert batch.cause.startswith("Trace: 0.005 kg is too little for every scale (Hand-add: steps of 0.001 kg from")
    assert "at least 2000 kg" in batch.cause
    assert lines(batch_of(made, 2000.0)) == {"Maize": 2000.0, "Trace": 0.01}


def test_a_share_above_every_scale_proposes_smaller_batches() -> None:
    made = mill({"Maize": 90.0, "Meal": 10.0}, {"Maize": BIG, "Meal": BIG})
    batch = batch_of(made, 4000.0)
    assert batch.cause is not None
    assert "Maize: 3600 kg is too much for every scale" in batch.cause
    assert "at most 2222.2 kg" in batch.cause


def test_tolerance_is_the_scales_own_else_1_percent_by_hand_and_medicated_else_2() -> None:
    shares = {"Maize": 60.0, "Meal": 30.0, "Drugged": 5.0, "Fine": 4.8, "Trace": 0.2}
    on = {"Maize": BIG, "Meal": BIG, "Drugged": BIG, "Fine": SMALL, "Trace": HAND}
    batch = batch_of(mill(shares, on, tags={"Drugged": (Tag.MEDICATED,)}), 2000.0)
    found = {line.ingredient: line.tolerance_kg for line in batch.lines}
    assert found == {
        "Maize": pytest.approx(24.0), "Meal": pytest.approx(12.0), "Drugged": 5.0, "Fine": pytest.approx(2.88),
        "Trace": pytest.approx(0.04),
    }
    alone = batch_of(mill({"Maize": 60.0, "Drugged": 40.0}, on, tags={"Drugged": (Tag.MEDICATED,)}), 2000.0)
    assert {line.ingredient: line.tolerance_kg for line in alone.lines}["Drugged"] == pytest.approx(8.0)


def test_a_mill_without_scales_weighs_every_line_to_10_g() -> None:
    batch = batch_of(mill({"Maize": 66.6667, "Meal": 33.3333}, {}, scales=()), 1000.0)
    assert lines(batch) == {"Maize": 666.67, "Meal": 333.33}
    assert all(line.step_kg == 0.01 and line.scale == "" for line in batch.lines)
    assert batch.residue_kg == 0.0


def test_a_tiny_line_that_is_left_out_is_said_and_a_medicated_one_is_a_question() -> None:
    only = (Scale(BIG, "Big scale", 5.0),)
    shares = {"Maize": 99.9, "Trace": 0.1}
    batch = batch_of(mill(shares, {"Maize": BIG, "Trace": BIG}, scales=only), 1000.0)
    assert lines(batch) == {"Maize": 1000.0, "Trace": 0.0}
    assert any("Trace is left out: its share of 1 kg is less than a step of 5 kg." in one for one in batch.cautions)
    tagged = {"Trace": (Tag.MEDICATED,)}
    asked = batch_of(mill(shares, {"Maize": BIG, "Trace": BIG}, scales=only, tags=tagged), 1000.0)
    assert asked.cause is not None
    assert "Trace: 1 kg is too little" in asked.cause


def test_the_total_stays_within_the_mixer_though_a_nearer_one_lies_above() -> None:
    shares, on = {"Maize": 60.0, "Meal": 40.0}, {"Maize": BIG, "Meal": BIG}
    full = mill(shares, on, mixers=(Mixer(1, "Mixer", 100.0, 998.0),))
    assert batch_of(full, 998.0).total_kg == 995.0
    assert batch_of(mill(shares, on), 998.0).total_kg == 1000.0
    narrow = batch_of(mill(shares, on, mixers=(Mixer(1, "Mixer", 996.0, 999.0),)), 998.0)
    assert narrow.cause is not None
    assert "No total between 996 and 999 kg" in narrow.cause


FOUR = {"Maize": 60.0, "Wheat": 25.5, "Meal": 14.2, "Salt": 0.3}
FOUR_ON = {"Maize": BIG, "Wheat": BIG, "Meal": BIG, "Salt": SMALL}


def test_the_rest_of_a_batch_is_made_around_a_line_that_a_person_fixed() -> None:
    made = mill(FOUR, FOUR_ON)
    free = batch_of(made, 1000.0)
    fixed = batch_of(made, 1000.0, fixed={key_of(made[0], "Wheat"): 265.0})
    assert lines(free)["Wheat"] == 255.0
    assert lines(fixed)["Wheat"] == 265.0
    assert {line.ingredient for line in fixed.lines if line.fixed} == {"Wheat"}
    assert abs(fixed.residue_kg) == abs(free.residue_kg)
    assert any("Wheat is fixed at 265 kg; its share is 255 kg" in one for one in fixed.cautions)
    assert fixed.deviation > free.deviation


def test_fixed_lines_that_cannot_be_are_refused_all_at_once_each_with_its_mend() -> None:
    made = mill({**FOUR, "Salt": 0.28, "Drugged": 0.02}, {**FOUR_ON, "Drugged": HAND}, tags={
        "Drugged": (Tag.MEDICATED,)
    })
    library = made[0]
    key = {name: key_of(library, name) for name in (*FOUR, "Drugged")}
    other = key["Maize"] + 50
    library.apply([added(replace(library.ingredient(key["Maize"]), id=other, name="Oats"))])
    with pytest.raises(Refused) as refused:
        batch_of(made, 1000.0, fixed={
            key["Maize"]: 601.2345, key["Salt"]: 0.0005, key["Meal"]: 3000.0, key["Drugged"]: 0.3,
            other: 5.0, key["Wheat"]: math.inf,
        })
    said = [str(problem) for problem in refused.value.problems]
    assert len(said) == 6
    for words in (
        "Wheat is fixed at a mass without end; enter kilograms.",
        "Oats is not in the mix of Feed",
        "Maize is fixed at 601.2345 kg, no multiple of a scale's step; fix 600 or 605 kg.",
        "Salt is fixed at 0.0005 kg, no multiple of a scale's step; fix 0 or 0.5 kg.",
        "Meal is fixed at 3000 kg, which no scale weighs",
        "Drugged is medicated and cannot be fixed at 0.3 kg; its share is 0.2 kg",
    ):
        assert any(words in one for one in said), (words, said)


def test_a_fixed_line_that_keeps_the_batch_from_its_total_is_refused() -> None:
    made = mill({"Maize": 60.0, "Meal": 40.0}, {"Maize": BIG, "Meal": BIG})
    maize = key_of(made[0], "Maize")
    assert lines(batch_of(made, 1000.0, fixed={maize: 605.0})) == {"Maize": 605.0, "Meal": 395.0}
    with pytest.raises(Refused, match="With Maize fixed, the other lines bring the batch to 1045 kg at the nearest"):
        batch_of(made, 1000.0, fixed={maize: 650.0})


def test_fixed_lines_that_leave_no_more_than_rounding_does_are_made_and_the_residue_shown() -> None:
    """The free line weighs 5 kg steps, so that any mass beside the fixed one is missed by up to 2.5 kg."""
    made = mill({"Maize": 96.0, "Salt": 4.0}, {"Maize": BIG, "Salt": SMALL}, mixers=())
    salt = key_of(made[0], "Salt")
    assert batch_of(made, 1000.0).residue_kg == 0.0
    for fixed, residue in ((42.5, 2.5), (41.0, 1.0), (39.0, -1.0), (45.0, 0.0)):
        batch = batch_of(made, 1000.0, fixed={salt: fixed})
        assert abs(batch.residue_kg) == abs(residue)
        assert lines(batch)["Salt"] == fixed


def test_fixed_lines_beside_which_the_others_are_at_the_end_of_their_tolerances_are_refused() -> None:
    """Maize gives and takes 15 kg at most (2 % of 960 kg, in 5 kg steps)."""
    made = mill({"Maize": 96.0, "Salt": 4.0}, {"Maize": BIG, "Salt": SMALL}, mixers=())
    salt = key_of(made[0], "Salt")
    assert batch_of(made, 1000.0, fixed={salt: 57.5}).residue_kg == 2.5
    with pytest.raises(Refused, match="With Salt fixed, the other lines bring the batch to 1003 kg at the nearest"):
        batch_of(made, 1000.0, fixed={salt: 58.0})


def test_a_fixed_line_that_leaves_no_total_that_the_mixer_holds_is_refused_by_name() -> None:
    made = mill({"Maize": 60.0, "Meal": 40.0}, {"Maize": BIG, "Meal": BIG}, mixers=(Mixer(1, "Mixer", 500.0, 2000.0),))
    with pytest.raises(Refused, match="With Maize fixed, the other lines bring the batch to 2035 kg at the nearest"):
        batch_of(made, 1000.0, fixed={key_of(made[0], "Maize"): 1640.0})


def test_a_fixed_line_beside_a_full_mixer_may_leave_a_step_less() -> None:
    made = mill({"Maize": 96.0, "Salt": 4.0}, {"Maize": BIG, "Salt": SMALL}, mixers=(Mixer(1, "Mixer", 500.0, 1000.0),))
    salt = key_of(made[0], "Salt")
    assert batch_of(made, 1000.0, fixed={salt: 41.0}).residue_kg == -4.0


def test_a_ration_is_made_in_the_proportions_of_its_kilograms() -> None:
    made = mill(
        {"Hay": 6.0, "Barley": 3.5, "Minerals": 0.1}, {"Hay": BIG, "Barley": BIG, "Minerals": SMALL},
        amounts=Amounts.RATION,
    )
    batch = batch_of(made, 960.0)
    assert lines(batch) == {"Hay": 600.0, "Barley": 350.0, "Minerals": 10.0}
    assert batch.broken == ()
    assert [limit.value for limit in batch.limits] == [6.0, 3.5, 0.1]


def made_up(seed: int) -> tuple[Library, Formula]:
    """A dozen ingredients under limits of every kind around a hidden mix, on three scales."""
    random = np.random.default_rng(seed)
    make = Maker()
    for scale in SCALES:
        make.put(scale)
    nutrients = [make.nutrient(f"N{k}", unit) for k, unit in enumerate(("%", "g/kg", "mg/kg", "MJ/kg"))]
    names = [f"I{k}" for k in range(12)]
    hidden = np.concatenate((random.uniform(8, 40, 5), random.uniform(0.5, 4, 4), random.uniform(0.02, 0.3, 3)))
    hidden *= 100 / hidden.sum()
    content = np.round(random.gamma(2.0, 6.0, (12, 4)), 2)
    feed = make.formula()
    for name, share, values in zip(names, hidden, content, strict=True):
        make.ingredient(
            name, float(np.round(random.uniform(100, 900), 1)),
            {n.name: float(v) for n, v in zip(nutrients, values, strict=True)},
            scale_id=BIG if share > 5 else (SMALL if share > 0.4 else HAND), dry_matter_percent=88.0,
        )
        make.limit(feed, "ingredient", name, float(share * 0.9), float(share * 1.1))
    value = hidden @ content / 100
    for k, nutrient in enumerate(nutrients):
        make.limit(feed, "nutrient", nutrient.name, float(value[k] * 0.99), float(value[k] * 1.02))
    make.limit(feed, "ratio", "N0", float(value[0] / value[3] * 0.99), per="N3")
    make.limit(feed, "group", names[:3], None, float(hidden[:3].sum() * 1.01))
    make.limit(feed, "practical", names[6], float(hidden[6] * 0.95))
    return make.library, feed


def outside(library: Library, feed: Formula, batch: Batch) -> set[int]:
    """The limits that do not hold, from the kilograms, composition as entered and limits as displayed."""
    kg = {line.ingredient_id: Fraction(line.target_kg) for line in batch.lines}
    total = sum(kg.values())

    def mean(nutrient_id: int) -> Fraction:
        return sum(
            (m * Fraction(library.values_of(i)[nutrient_id].amount) for i, m in kg.items() if m), Fraction(0)
        ) / total

    found = set()
    for index, limit in enumerate(library.limits(feed.id)):
        ids = limit.subject.ids
        if limit.kind is LimitKind.NUTRIENT:
            value = mean(ids[0])
        elif limit.kind is LimitKind.RATIO:
            assert limit.per is not None
            value = mean(ids[0]) / mean(limit.per.ids[0])
        else:
            value = 100 * sum((kg.get(i, Fraction(0)) for i in ids), Fraction(0)) / total
        near = Fraction(1, 10**9)
        if limit.minimum is not None and value < Fraction(limit.minimum) * (1 - near):
            if not (limit.kind is LimitKind.PRACTICAL and value == 0):
                found.add(index)
        elif limit.maximum is not None and value > Fraction(limit.maximum) * (1 + near):
            found.add(index)
    return found


@pytest.mark.parametrize("seed", range(12))
def test_limits_named_as_broken_are_those_that_the_kilograms_break(seed: int) -> None:
    library, feed = made_up(seed)
    batch = batch_of((library, feed), 500.0 + 250.0 * (seed % 5))
    assert set(batch.broken) == outside(library, feed, batch)
    for line in batch.lines:
        steps = line.target_kg / line.step_kg
        assert steps == pytest.approx(round(steps), abs=1e-9)
        assert line.tolerance_kg is not None
        assert abs(line.target_kg - line.share_kg) <= line.tolerance_kg * (1 + 1e-9)
    assert batch.total_kg == pytest.approx(math.fsum(line.target_kg for line in batch.lines))
    for index in batch.broken:
        one = batch.limits[index]
        assert one.binding is None
        assert one.value is not None
        low, high = one.minimum or -math.inf, math.inf if one.maximum is None else one.maximum
        assert one.value < low or one.value > high


def test_a_sheet_printed_before_tolerances_were_kept_reads_back() -> None:
    batch = batch_of(mill(FOUR, FOUR_ON), 1000.0)
    plain = json.loads(json.dumps(batch_to_plain(batch)))
    assert batch_from_plain(plain) == batch
    for name in ("unproven", "gap"):
        del plain[name]
    for line in plain["lines"]:
        del line["tolerance_kg"], line["fixed"]
    old = batch_from_plain(plain)
    assert old.lines[0].tolerance_kg is None
    assert old.total_kg == batch.total_kg


def test_a_limit_in_another_unit_is_held_at_its_exact_bound() -> None:
    make = Maker()
    make.put(SCALES[0])
    make.nutrient("Sodium", "g/kg")
    for name, sodium in (("Maize", 0.4), ("Meal", 2.4)):
        make.ingredient(name, 100.0, {"Sodium": sodium}, scale_id=BIG)
    feed = make.formula()
    make.limit(feed, "ingredient", "Meal")
    make.limit(feed, "ingredient", "Maize", 1200.0, 1200.0, unit="lb/short ton")
    make.limit(feed, "nutrient", "Sodium", 0.12, 0.12, unit="%")
    library = make.library
    limits = library.limits(feed.id)
    assert [limit.unit for limit in limits] == ["", "lb/short ton", "%"]
    batch = make_batch(library, feed.id, 1000.0, TODAY)
    assert lines(batch) == {"Maize": 600.0, "Meal": 400.0}
    assert batch.broken == ()
    assert batch.limits[1].binding is not None
    assert batch.limits[2].binding is not None


def test_a_batch_found_when_time_was_up_says_how_much_better_one_could_be() -> None:
    library, feed = made_up(3)
    batch = make_batch(library, feed.id, 1000.0, TODAY, time_limit_s=0.0)
    assert not batch.proven
    assert batch.gap is not None
    assert proof_words(batch) == "Time was up before it was proven best: " + {
        "limits": f"up to {round(batch.gap)} fewer limits may be broken.",
        "deviation": "its lines may keep closer to their shares.",
    }[batch.unproven]
    assert proof_words(make_batch(library, feed.id, 1000.0, TODAY, time_limit_s=30.0)) == ""
