"""Random small mills, sound and not: a batch, a cause in a sentence, or a refusal, and what a batch says adds up."""

from __future__ import annotations

import json
import random
from collections import Counter
from dataclasses import replace
from fractions import Fraction

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Admits, Animal, Formula
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale, Site
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.domain.yields import part_left
from blendapp.services.batch import make_batch
from blendapp.services.sheets import batch_from_plain, batch_to_plain
from tests.mills import TODAY, Maker

STEPS_KG = (5.0, 1.0, 0.1, 0.001, 0.5 * 0.45359237, 2.0)


def any_mill(chance: random.Random) -> tuple[Library, Formula]:
    """Up to five scales and meters at two sites, up to three formulas that make ingredients of each other."""
    make = Maker()
    make.nutrient("Protein")
    sites = [None]
    if chance.random() < 0.4:
        sites += [make.put(Site(key, f"Site {key}")).id for key in (1, 2)]
    scales = chance.randint(0, 5)
    for key in range(1, scales + 1):
        site_id, faulty = chance.choice(sites), chance.random() < 0.02
        if chance.random() < 0.3:
            step_l = 0.0 if faulty else chance.choice([0.05, 0.5, 0.3785411784])
            make.put(Scale(key, f"Meter {key}", None, step_l=step_l, site_id=site_id,
                           least_l=chance.choice([None, 2.0])))
        else:
            make.put(Scale(key, f"Scale {key}", 0.0 if faulty else chance.choice(STEPS_KG), chance.choice([None, 1.0]),
                           chance.choice([None, 500.0]), hand_add=chance.random() < 0.3, site_id=site_id))
    for key in range(1, chance.randint(1, 3)):
        make.put(Mixer(key, f"Mixer {key}", chance.choice([None, 100.0]), chance.choice([None, 1000.0]),
                       chance.choice(sites)))
    names = [f"I{key}" for key in range(chance.randint(3, 8))]
    for name in names:
        unscaled = not scales or chance.random() < 0.03
        make.ingredient(
            name, chance.uniform(50, 900), {"Protein": round(chance.uniform(0, 40), 2)},
            scale_id=None if unscaled else chance.randint(1, scales),
            density_kg_per_l=None if chance.random() < 0.03 else chance.choice([0.917, 1.3]),
            dry_matter_percent=chance.choice([None, 88.0, 95.0]),
            tags=tuple(tag for tag in Tag if chance.random() < 0.006),
        )
    feeds: list[Formula] = []
    used: list[set[str]] = []
    for key in range(chance.randint(1, 3)):
        feeds.append(make.formula(
            f"Feed {key}", admits=Admits.LISTED, animal=chance.choice(list(Animal)),
            loss_percent=chance.choice([None, 1.0]), product_dry_matter_percent=chance.choice([None, 88.0]),
        ))
        used.append(set(chance.sample(names, chance.randint(2, len(names)))))
        weights = {name: chance.uniform(0.01, 10) for name in sorted(used[-1])}
        for name, weight in weights.items():
            share = 100 * weight / sum(weights.values())
            low, high = share * chance.choice([0.5, 1, 1]), share * chance.choice([1, 1.5])
            make.limit(feeds[-1], "ingredient", name, low, high)
    for name in names:
        able = [key for key in range(len(feeds)) if not any(name in used[k] for k in range(key + 1))]
        if able or chance.random() < 0.02:  # now and then one that goes into itself
            ingredient = make.library.named("ingredient", name)
            assert ingredient is not None
            made_by = feeds[chance.choice(able or [0])].id
            make.library.apply([Change(
                ingredient, replace(ingredient, made_by_formula_id=made_by, opened=chance.random() < 0.6)
            )])
    return make.library.at_site(chance.choice(sites)), feeds[-1]


def adds_up(library: Library, feed: Formula, batch: Batch) -> None:
    assert batch_from_plain(json.loads(json.dumps(batch_to_plain(batch)))) == batch
    assert abs(sum(line.share_kg for line in batch.lines) - batch.batch_kg) < 1e-6
    assert len({line.ingredient_id for line in batch.lines}) == len(batch.lines)
    here = {scale.name: scale for scale in library.scales}
    dry = 0.0
    for line in batch.lines:
        ingredient = library.ingredient(line.ingredient_id)
        if line.scale:
            scale = here[line.scale]
            assert (line.step_l, line.hand_add) == (scale.step_l, scale.hand_add)
        if line.target_l is not None:
            own = library.records["scale"][ingredient.scale_id]
            assert scale == own or (own.by_volume and own not in library.scales), "another's meter"
            assert Fraction(str(line.target_l)) % Fraction(str(line.step_l)) == 0
            assert abs(line.target_kg - line.target_l * (ingredient.density_kg_per_l or 0.0)) < 1e-9
        steps = line.target_kg / line.step_kg
        assert abs(steps - round(steps)) < 1e-6
        dry += line.target_kg * (ingredient.dry_matter_percent or 0.0)
        assert not (ingredient.opened and not line.rework)
    unknown = any(library.ingredient(line.ingredient_id).dry_matter_percent is None for line in batch.lines
                  if line.target_kg)
    left = part_left(feed.loss_percent, None if unknown else dry / batch.total_kg, feed.product_dry_matter_percent)
    assert (batch.yield_kg is None) is bool(batch.yield_unknown)
    if left is not None:
        assert batch.yield_kg is not None
        assert abs(batch.yield_kg - left * batch.total_kg) < 1e-6
    for one in batch.to_make:
        made = library.named("ingredient", one.ingredient)
        assert made is not None
        assert made.made_by_formula_id == one.formula_id
        assert one.mass_kg > 0


def test_any_mill_has_a_batch_that_adds_up_or_a_sentence_that_says_why_not() -> None:
    ends: Counter[str] = Counter()
    for seed in range(200):
        chance = random.Random(seed)
        library, feed = any_mill(chance)
        ids = [one.id for one in library.ingredients]
        rework = {chance.choice(ids): chance.uniform(-0.5, 20)} if chance.random() < 0.4 else None
        fixed = {chance.choice(ids): round(chance.uniform(0, 200), 2)} if chance.random() < 0.15 else None
        kg = chance.choice([50.0, 500.0, 1000.0, 7300.0])
        try:
            batch = make_batch(library, feed.id, kg, TODAY, rework=rework, fixed=fixed, time_limit_s=0.05)
        except Refused as refused:
            ends["refused"] += 1
            unsaid = [problem for problem in refused.problems if not str(problem).strip()]
            ends["unsaid"] += len(unsaid)
            continue
        ends["cause" if batch.cause is not None else "batch"] += 1
        if batch.cause is None:
            adds_up(library, feed, batch)
        else:
            assert batch.lines == ()
            assert batch.cause.endswith((".", ")")), batch.cause
    assert not ends["unsaid"]
    assert ends["refused"] >= 10, ends
    assert ends["cause"] >= 40, ends
    assert ends["batch"] >= 60, ends
