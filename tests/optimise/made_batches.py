"""Batches made from a seed through the road that a mill's take: meters, opened premixes, rework, scales of a mill."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from blendapp.domain import units
from blendapp.domain.formulas import Admits, Amounts, Formula
from blendapp.domain.library import Library
from blendapp.domain.plant import Scale
from blendapp.domain.records import Change
from blendapp.domain.results import IngredientResult, Result, Status
from blendapp.optimise.build.formula import FormulaProgram, build
from blendapp.optimise.build.weigh import order_of, scales_for
from blendapp.optimise.steps.problem import Order
from blendapp.services.batch_mix import BatchMix, batch_mix
from blendapp.services.makers import Makers
from tests.mills import TODAY, Maker

BIG, MIDDLE, SMALL, HAND, PUMP, FINE_PUMP = 1, 2, 3, 4, 5, 6
SCALES = (
    Scale(BIG, "Big", 5.0, 20.0, 2000.0),
    Scale(MIDDLE, "Middle", 1.0, 5.0, 300.0),
    Scale(SMALL, "Small", 0.1, 0.5, 60.0),
    Scale(HAND, "Hand", 0.001, 0.005, 6.0, hand_add=True),
    Scale(PUMP, "Pump", None, step_l=0.5, least_l=1.0, greatest_l=400.0),
    Scale(FINE_PUMP, "Fine pump", None, step_l=0.05),
)
MASSES = (500.0, 1000.0, 1825.0, 2000.0, 3000.0)


@dataclass(frozen=True)
class MadeBatch:
    library: Library
    feed: Formula
    mix: dict[int, float]
    rework: dict[int, float]
    batch_kg: float


def made(seed: int, lines: int = 25, tight: int = 8) -> MadeBatch:
    """A feed of about as many lines once its premix is opened and rework is in, two of them liquids on meters.

    Of its nutrient limits, `tight` stand at the very value of what is weighed in exact shares.
    """
    random = np.random.default_rng(seed)
    make = Maker()
    for scale in SCALES:
        make.put(scale)
    nutrients = [make.nutrient(f"N{k}", unit) for k, unit in enumerate(("%", "g/kg", "mg/kg", "MJ/kg", "%", "g/kg"))]

    def ingredient(name: str, scale_id: int, density: float | None = None) -> int:
        content = np.round(random.gamma(1.5, 8.0, len(nutrients)), 2)
        return make.ingredient(
            name, float(np.round(random.uniform(100, 3000), 2)),
            {n.name: float(v) for n, v in zip(nutrients, content, strict=True)}, scale_id=scale_id,
            density_kg_per_l=density, dry_matter_percent=float(np.round(random.uniform(80, 98), 1)),
        ).id

    premix_parts = max(3, lines // 3)
    coarse = max(3, lines // 3)
    middling = max(1, lines - coarse - premix_parts - 1)  # one more line is rework, two parts are lines of the feed
    mix: dict[int, float] = {}
    for k in range(coarse):
        mix[ingredient(f"Grain {k}", BIG)] = random.uniform(3.0, 30.0)
    for k in range(middling):
        mix[ingredient(f"Middling {k}", MIDDLE)] = random.uniform(0.4, 3.0)
    thick = float(np.round(random.uniform(1, 1.4), 3))
    for name, scale, density in (("Oil", PUMP, 0.917), ("Molasses", FINE_PUMP, thick)):
        mix[ingredient(name, scale, density)] = random.uniform(0.5, 4.0)
    salts = [ingredient(f"Salt {k}", SMALL) for k in range(2)]
    for salt in salts:
        mix[salt] = random.uniform(0.2, 0.6)
    parts = [*salts, *(ingredient(f"Trace {k}", HAND) for k in range(premix_parts - 2))]
    weights = np.round(np.concatenate((random.uniform(20, 40, 2), 10 ** random.uniform(-0.5, 1.2, len(parts) - 2))), 3)
    carrier = make.formula("Premix formula", admits=Admits.LISTED)
    for part, weight in zip(parts, 100 * weights / weights.sum(), strict=True):
        make.limit(carrier, "ingredient", make.library.ingredient(part).name, weight, weight)
    premix = ingredient("Premix", SMALL)
    make.library.apply([Change(
        make.library.ingredient(premix),
        replace(make.library.ingredient(premix), made_by_formula_id=carrier.id, opened=True),
    )])
    mix[premix] = random.uniform(0.5, 1.5)
    whole = sum(mix.values())
    mix = {key: amount / whole for key, amount in mix.items()}
    returns = ingredient("Returns", MIDDLE)
    rework = {returns: float(np.round(random.uniform(1.0, 6.0), 1))} if random.random() < 0.7 else {}
    feed = make.formula("Feed")
    found = MadeBatch(make.library, feed, mix, rework, float(random.choice(MASSES)))
    _limits(make, found, random, tight)
    return found


def _limits(make: Maker, found: MadeBatch, random: np.random.Generator, tight: int) -> None:
    """Limits of every kind around what is weighed in exact shares, counted as limits count it."""
    library, feed = make.library, found.feed
    together = weighed_mix(found)
    built = build(library, feed, TODAY, contents=together.contents)
    x = np.array([together.contents.amounts.get(i.id, 0.0) for i in built.ingredients])
    counted = built.as_counted(x)
    at = {i.id: column for column, i in enumerate(built.ingredients)}
    value = x @ built.composition
    for k, nutrient in enumerate(library.nutrients):
        shown = float(value[k]) / units.concentration(nutrient.unit).factor
        room = 0.0 if k < tight else float(random.uniform(0.001, 0.02))
        if random.random() < 0.5:
            make.limit(feed, "nutrient", nutrient.name, shown * (1 - room), shown * 1.05)
        else:
            make.limit(feed, "nutrient", nutrient.name, None, shown * (1 + room))
    for place, key in enumerate(found.mix):
        share = 100 * float(counted[at[key]])
        name = library.ingredient(key).name
        room = 0.0 if place < tight - 6 else float(random.uniform(0.005, 0.05))
        if place % 3 == 0:
            make.limit(feed, "ingredient", name, share * (1 - room), share * (1 + room))
        elif place % 3 == 1:
            make.limit(feed, "ingredient", name, None, share * (1 + room))
    names = [library.ingredient(key).name for key in found.mix]
    ids = list(found.mix)
    first, last = sum(counted[at[key]] for key in ids[:3]), sum(counted[at[key]] for key in ids[-3:])
    make.limit(feed, "group", names[-3:], float(100 * last * 0.99))
    make.limit(feed, "ratio", names[-3:], None, float(last / first * 1.01), per=names[:3])
    make.limit(feed, "practical", "Premix", float(100 * counted[at[ids[-1]]] * 0.97))
    make.limit(feed, "practical", "Salt 0", float(100 * counted[at[ids[-3]]] * 0.9))
    make.limit(feed, "count", names[-4:], None, 4.0)


def weighed_mix(found: MadeBatch) -> BatchMix:
    return batch_mix(Makers(found.library, TODAY), found.mix, found.rework)


def program(found: MadeBatch) -> tuple[FormulaProgram, BatchMix]:
    together = weighed_mix(found)
    return build(found.library, found.feed, TODAY, contents=together.contents), together


def order(found: MadeBatch) -> Order:
    """The batch as numbers alone, as the program itself turns it into them."""
    built, together = program(found)
    amounts = together.contents.amounts
    total = sum(amounts.values())
    ingredients = [found.library.ingredient(key) for key in amounts]
    shares = {key: amount / total * found.batch_kg for key, amount in amounts.items()}
    scales = [scales_for(found.library, one) for one in ingredients]
    return order_of(built, ingredients, scales, shares, found.batch_kg, total, {})


def answer(found: MadeBatch) -> Result:
    """The mix as an answer of the formula, without a solve."""
    parts = tuple(
        IngredientResult(key, found.library.ingredient(key).name, 0.0, amount) for key, amount in found.mix.items()
    )
    return Result(
        found.feed.id, found.feed.name, Amounts.BLEND, Status.OPTIMAL, "USD", TODAY, parts, (), (), (), (), (), cost=0.0
    )


def scale_of(found: MadeBatch, line: int, load: int) -> Scale:
    """The scale behind a load of a line of its order."""
    ids = list(weighed_mix(found).contents.amounts)
    scale = scales_for(found.library, found.library.ingredient(ids[line]))[load]
    assert scale is not None
    return scale
