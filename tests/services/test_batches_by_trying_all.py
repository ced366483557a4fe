"""Small batches with a meter, an opened premix and rework against every batch there is, from what was entered alone."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Admits, Formula, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.plant import Scale
from blendapp.domain.records import Change
from blendapp.services.batch import make_batch
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker

COARSE, MIDDLE, PUMP = 1, 2, 3
SCALES = (
    Scale(COARSE, "Coarse", 25.0, 50.0, 900.0),
    Scale(MIDDLE, "Middle", 4.0, 4.0, 200.0, tolerance_percent=8.0),
    Scale(PUMP, "Pump", None, step_l=5.0, tolerance_percent=10.0),
)
NEAR = Fraction(1, 10**9)
Parts = dict[int, Fraction]


def small_mill(seed: int) -> tuple[Library, Formula, dict[int, float], float]:
    """Grain, salt, oil on a pump, and a premix of salt and carrier that is opened; rework of some seeds; the order."""
    random = np.random.default_rng(seed)
    make = Maker()
    for scale in SCALES:
        make.put(scale)
    for name in ("N0", "N1", "N2"):
        make.nutrient(name, "g/kg")

    def put(name: str, scale: int, **fields: float) -> int:
        content = {f"N{k}": float(v) for k, v in enumerate(np.round(random.gamma(2.0, 6.0, 3), 1))}
        return make.ingredient(name, float(np.round(random.uniform(100, 900))), content, scale_id=scale,
                               dry_matter_percent=float(random.integers(80, 99)), **fields).id

    grain, salt = put("Grain", COARSE), put("Salt", MIDDLE)
    oil, carrier = put("Oil", PUMP, density_kg_per_l=0.917), put("Carrier", MIDDLE)
    premix, returns = put("Premix", MIDDLE), put("Returns", MIDDLE)
    base = make.formula("Base", admits=Admits.LISTED)
    part = float(random.integers(20, 80))
    make.limit(base, "ingredient", "Salt", part, part)
    make.limit(base, "ingredient", "Carrier", 100 - part, 100 - part)
    closed = make.library.ingredient(premix)
    make.library.apply([Change(closed, replace(closed, made_by_formula_id=base.id, opened=True))])
    feed = make.formula("Feed", admits=Admits.LISTED)
    shares = dict(zip((grain, salt, oil, premix), random.dirichlet((8, 1.5, 2, 3)) * 100, strict=True))
    for key, share in shares.items():
        room = float(random.choice([0.0, 0.01, 0.1]))
        make.limit(feed, "ingredient", make.library.ingredient(key).name, share * (1 - room), share * (1 + room))
    for k in range(3):
        value = sum(share * make.library.values_of(key)[k + 1].amount for key, share in shares.items()) / 100
        if random.random() < 0.5:
            make.limit(feed, "nutrient", f"N{k}", None, float(value * 1.1))
    make.limit(feed, "group", ["Premix", "Salt"], None, float(shares[premix] + shares[salt]) * 1.03)
    make.limit(feed, "ratio", ["Salt"], None, float(shares[salt] / shares[premix]) * 1.05, per=["Premix"])
    make.limit(feed, "practical", "Premix", float(shares[premix] * 0.99))
    rework = {returns: float(random.integers(2, 12))} if random.random() < 0.6 else {}
    if random.random() < 0.3:
        rework = {carrier: 4.0}
    return make.library, feed, rework, float(random.choice([300.0, 487.0, 600.0]))


def shares_and_parts(
    library: Library, feed: Formula, rework: dict[int, float]
) -> tuple[dict[int, Fraction], dict[int, Parts]]:
    """Of the batch, the exact share of each line, and of each line the kg a kg that limits count as an ingredient."""
    amounts = {i.ingredient_id: Fraction(i.amount or 0.0) for i in formulate(library, feed.id, TODAY).mix}
    base = {i.ingredient_id: Fraction(i.amount or 0.0) for i in formulate(library, 1, TODAY).mix}
    total, inner = sum(amounts.values()), sum(base.values())
    left = 1 - sum((Fraction(percent) / 100 for percent in rework.values()), Fraction(0))
    mass: dict[int, Parts] = {}
    for key, amount in amounts.items():
        share = amount / total * left
        ingredient = library.ingredient(key)
        stands = {part: of / inner for part, of in base.items()} if ingredient.opened else {key: Fraction(1)}
        for part, of in stands.items():
            mass.setdefault(part, {})
            mass[part][key] = mass[part].get(key, Fraction(0)) + share * of
    for key, percent in rework.items():
        mass.setdefault(key, {})
        mass[key][key] = mass[key].get(key, Fraction(0)) + Fraction(percent) / 100
    shares = {key: sum(parts.values(), Fraction(0)) for key, parts in mass.items()}
    return shares, {key: {o: m / shares[key] for o, m in parts.items()} for key, parts in mass.items()}


def choices(library: Library, scale_name: str, share_kg: Fraction, key: int) -> list[Fraction]:
    """Every mass that the rule of numbers allows a line on a scale, from its words."""
    scale = next(one for one in SCALES if one.name == scale_name)
    if scale.step_l is not None:
        density = Fraction(str(library.ingredient(key).density_kg_per_l))
        step, least, greatest = Fraction(str(scale.step_l)) * density, None, None
    else:
        step, least, greatest = Fraction(str(scale.step_kg)), scale.least_kg, scale.greatest_kg
    allowed = max(step, Fraction(str(scale.tolerance_percent or 2.0)) / 100 * share_kg) + step * NEAR
    found = [Fraction(0)] if share_kg <= step * (1 + NEAR) else []
    for n in range(1, int((share_kg + allowed) / step) + 1):
        kg = n * step
        if abs(kg - share_kg) <= allowed and (least is None or kg >= least) and (greatest is None or kg <= greatest):
            found.append(kg)
    return found


def broken(library: Library, feed: Formula, parts: dict[int, Parts], kg: dict[int, Fraction]) -> set[int]:
    """The limits that do not hold at kilograms, each from what was entered."""
    total = sum(kg.values(), Fraction(0))
    counted: Parts = {}
    for key, mass in kg.items():
        for of, part in parts[key].items():
            counted[of] = counted.get(of, Fraction(0)) + mass * part

    def amount(subject_ids: tuple[int, ...]) -> Fraction:
        return sum((counted.get(key, Fraction(0)) for key in subject_ids), Fraction(0))

    found = set()
    for index, limit in enumerate(library.limits(feed.id)):
        ids = limit.subject.ids
        if limit.kind is LimitKind.NUTRIENT:
            content = {key: Fraction(str(library.values_of(key)[ids[0]].amount)) for key in kg}
            value = sum((mass * content[key] for key, mass in kg.items()), Fraction(0)) / total
        elif limit.kind is LimitKind.RATIO:
            assert limit.per is not None
            value = amount(ids) / amount(limit.per.ids)
        else:
            value = 100 * amount(ids) / total
        low = limit.minimum is not None and value < Fraction(limit.minimum) * (1 - 2 * NEAR)
        if low and not (limit.kind is LimitKind.PRACTICAL and value == 0):
            found.add(index)
        if limit.maximum is not None and value > Fraction(limit.maximum) * (1 + 2 * NEAR):
            found.add(index)
    return found


@pytest.mark.parametrize("seed", range(40))
def test_no_batch_is_better_than_the_one_that_is_made(seed: int) -> None:
    library, feed, rework, order_kg = small_mill(seed)
    batch: Batch = make_batch(library, feed.id, order_kg, TODAY, rework=rework, time_limit_s=20.0)
    if batch.cause is not None:
        assert "scale" in batch.cause, batch.cause
        return
    shares, parts = shares_and_parts(library, feed, rework)
    lines = {line.ingredient_id: line for line in batch.lines}
    assert set(lines) == set(shares)
    every = []
    for key, line in lines.items():
        share_kg = shares[key] * Fraction(order_kg)
        assert line.share_kg == pytest.approx(float(share_kg), rel=1e-9)
        every.append(choices(library, line.scale, share_kg, key))
        if line.target_l is not None:
            assert Fraction(str(line.target_l)) % 5 == 0
            assert line.target_kg == float(Fraction(str(line.target_l)) * Fraction("0.917"))
    price = {key: library.price_per_t(key, TODAY) or 0.0 for key in lines}
    best = None
    for kilograms in itertools.product(*every):
        kg = dict(zip(lines, kilograms, strict=True))
        error = abs(sum(kilograms, Fraction(0)) - Fraction(order_kg))
        if best is not None and error > best[0]:
            continue
        deviation = sum(
            float(abs(kg[key] - shares[key] * Fraction(order_kg))) / (line.tolerance_kg or 1.0)
            for key, line in lines.items()
        )
        cost = math.fsum(float(kg[key]) * price[key] / 1000 for key in lines)
        now = (error, len(broken(library, feed, parts, kg)), round(deviation, 7), cost)
        best = now if best is None else min(best, now)
    assert best is not None
    made = {key: Fraction(str(line.target_l)) * Fraction("0.917") if line.target_l else Fraction(str(line.target_kg))
            for key, line in lines.items()}
    assert set(batch.broken) == broken(library, feed, parts, made)
    assert abs(sum(made.values(), Fraction(0)) - Fraction(order_kg)) == best[0]
    assert len(batch.broken) == best[1]
    assert batch.deviation == pytest.approx(best[2], abs=2e-6)
    assert math.fsum(float(made[key]) * price[key] / 1000 for key in lines) == pytest.approx(best[3], rel=1e-6)


def test_most_of_the_small_mills_make_a_batch_with_a_dose_an_opened_premix_and_rework() -> None:
    made = [small_mill(seed) for seed in range(40)]
    batches = [make_batch(library, feed.id, kg, TODAY, rework=back) for library, feed, back, kg in made]
    sound = [batch for batch in batches if batch.cause is None]
    assert len(sound) >= 30
    assert sum(any(line.target_l for line in batch.lines) for batch in sound) >= 20
    assert sum(any(line.rework for line in batch.lines) for batch in sound) >= 15
    assert all(any(line.of_opened for line in batch.lines) for batch in sound)
