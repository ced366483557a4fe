"""The question that an ingredient without a scale is, with the scale that would do as its proposal."""

from __future__ import annotations

import math
from collections.abc import Mapping

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.plant import Scale
from blendapp.domain.wording import _
from blendapp.optimise.build.weigh import scales_for, tolerance_of


def without_scale(library: Library, amounts: Mapping[int, float], batch_kg: float) -> str | None:
    """The question where an ingredient has no scale, with a proposal; None where each has one, or the mill has none.

    amounts: of all that is weighed, by ingredient identifier.
    """
    every = library.records["scale"]
    if not every:
        return None
    if not library.scales:
        site = library.records["site"].get(library.mill.site_id or 0)
        text = _("No scale stands at {site}; enter one there, or one of no site.")
        return text.format(site="" if site is None else site.name)
    total = math.fsum(amounts.values())
    found: dict[int, tuple[Scale, list[str]]] = {}
    said = []
    for key, amount in amounts.items():
        ingredient = library.ingredient(key)
        if ingredient.scale_id in every and scales_for(library, ingredient):
            continue
        share_kg = amount / total * batch_kg
        scale = fitting_scale(library, ingredient, share_kg)
        if scale is None:
            said.append(_needed(ingredient, share_kg))
        else:
            found.setdefault(scale.id, (scale, []))[1].append(ingredient.name)
    text = _("No scale weighs {ingredients}. Choose one under Scale, for example {scale} in steps of {step} kg.")
    for scale, names in found.values():
        step = notation().write_short(scale.step_kg)
        said.append(text.format(ingredients=", ".join(names), scale=scale.name, step=step))
    return " ".join(said) or None


def fitting_scale(library: Library, ingredient: Ingredient, share_kg: float) -> Scale | None:
    """The coarsest scale of the site that takes a share with a step within its tolerance; by hand only where no other
    does."""
    fitting = [scale for scale in library.scales if _fits(scale, ingredient, share_kg)]
    return max(fitting, key=lambda scale: (not scale.hand_add, scale.step_kg or 0.0, -scale.id), default=None)


def _fits(scale: Scale, ingredient: Ingredient, share_kg: float) -> bool:
    step = scale.step_kg or 0.0
    if scale.by_volume or not 0 < step <= tolerance_of(scale, ingredient) * share_kg:
        return False
    return (scale.least_kg or 0.0) <= share_kg and (scale.greatest_kg is None or share_kg <= scale.greatest_kg)


def _needed(ingredient: Ingredient, share_kg: float) -> str:
    short = notation().write_short
    text = _("No scale weighs {ingredient}, and none here takes its share of {share} kg within its tolerance. Enter "
             "one with a step of at most {step} kg that holds {share} kg, and choose it under Scale.")
    # Rounded down, so that what is said is enough.
    step = tolerance_of(None, ingredient) * share_kg
    digits = 1 - math.floor(math.log10(step))
    step = math.floor(step * 10**digits) / 10**digits
    return text.format(ingredient=ingredient.name, share=short(share_kg), step=short(step))
