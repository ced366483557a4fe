"""Why no batch in whole steps exists, in sentences that name lines and scales and say what would mend it."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence

from blendapp.domain.formulas import Formula
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.plant import Scale
from blendapp.domain.wording import _
from blendapp.optimise.steps.problem import Line, Load, Order, Reason
from blendapp.optimise.steps.search import NoBatch


def not_fixable(
    library: Library, formula: Formula, fixed: Mapping[int, float], shares: Mapping[int, float],
    opened: Collection[int] = (),
) -> list[str]:
    """One sentence for each fixed ingredient that is no line of the batch, and for each mass that is no number.

    opened: identifiers of the ingredients in whose place others are weighed.
    """
    found = []
    for key, mass in fixed.items():
        name = library.ingredient(key).name
        if key not in shares and key in opened:
            text = _("{ingredient} is opened into what it is made of; fix those lines instead.")
            found.append(text.format(ingredient=name))
        elif key not in shares:
            text = _("{ingredient} is not in the mix of {formula}; only lines of the batch can be fixed.")
            found.append(text.format(ingredient=name, formula=formula.name))
        elif not math.isfinite(mass):
            text = _("{ingredient} is fixed at a mass without end; enter kilograms.")
            found.append(text.format(ingredient=name))
    return found


def without_density(library: Library, ingredients: Sequence[Ingredient]) -> list[str]:
    """One sentence for each ingredient that a liquid meter doses and whose density is not known."""
    text = _("{meter} doses {ingredient} in litres; enter Density kg/l of {ingredient}, or give it a scale in kg.")
    found = []
    for ingredient in ingredients:
        own: Scale | None = None if ingredient.scale_id is None else library.records["scale"].get(ingredient.scale_id)
        if own is not None and own.by_volume and own in library.scales and not (ingredient.density_kg_per_l or 0) > 0:
            found.append(text.format(meter=own.name, ingredient=ingredient.name))
    return found


def sentences(
    order: Order, found: NoBatch, ingredients: Sequence[Ingredient], scales: Sequence[Sequence[Scale | None]]
) -> list[tuple[Reason, str]]:
    """One sentence a reason."""
    return [
        (reason, _whole(order, reason, ingredients) if reason.line is None else
         _line(order, reason, ingredients[reason.line], scales[reason.line]))
        for reason in found.reasons
    ]


def _whole(order: Order, reason: Reason, ingredients: Sequence[Ingredient]) -> str:
    kg = notation().write_short
    if reason.why == "none":
        return _("The mix holds nothing to weigh.")
    if reason.why == "fixed total":
        names = [i.name for i, line in zip(ingredients, order.lines, strict=True) if line.fixed_kg is not None]
        text = _(
            "With {ingredients} fixed, the other lines bring the batch to {total} kg at the nearest, not to {batch} "
            "kg; fix nearer masses, or fewer lines."
        )
        if reason.total_kg is None:
            text = _("With {ingredients} fixed, the other lines do not bring the batch to {batch} kg; fix nearer "
                     "masses, or fewer lines.")
            return text.format(ingredients=", ".join(names), batch=kg(order.batch_kg))
        return text.format(
            ingredients=", ".join(names), total=kg(float(reason.total_kg)), batch=kg(order.batch_kg)
        )
    text = _(
        "No total between {least} and {greatest} kg, which the mixer holds, can be weighed in the steps of the scales; "
        "order another mass, or enter a finer scale."
    )
    greatest = kg(order.greatest_total_kg) if order.greatest_total_kg is not None else _("any")
    return text.format(least=kg(order.least_total_kg or 0.0), greatest=greatest)


def _line(order: Order, reason: Reason, ingredient: Ingredient, scales: Sequence[Scale | None]) -> str:
    line = order.lines[reason.line or 0]
    if reason.why == "step":
        wrong = next(
            scale for scale, load in zip(scales, line.loads, strict=True) if scale is not None and not load.step_kg > 0
        )
        if wrong.step_l is not None:
            text = _("The meter {scale} has a step of {step} l; enter a step above 0.")
        elif wrong.step_kg is not None:
            text = _("The scale {scale} has a step of {step} kg; enter a step above 0.")
        else:
            return _("The scale {scale} has no step; enter Step kg, or Step l for a liquid meter.").format(
                scale=wrong.name
            )
        return text.format(scale=wrong.name, step=notation().write_short(wrong.step_l or wrong.step_kg or 0.0))
    if reason.why.startswith("fixed"):
        return _fixed(reason, line, ingredient, scales)
    return _unweighable(order, reason, line, ingredient, scales)


def _unweighable(
    order: Order, reason: Reason, line: Line, ingredient: Ingredient, scales: Sequence[Scale | None]
) -> str:
    kg = notation().write_short
    share = line.share_kg
    if reason.why == "small":
        needed = min(max(load.step_kg, load.least_kg or 0.0) for load in line.loads)
        text = _(
            "{ingredient}: {share} kg is too little for every scale ({scales}). Enter a scale that weighs it, or make "
            "batches of at least {batch} kg."
        )
        return text.format(
            ingredient=ingredient.name, share=kg(share), scales=_spans(scales, line.loads),
            batch=kg(order.batch_kg * needed / share, 1),
        )
    if reason.why == "large":
        most = max(load.greatest_kg or 0.0 for load in line.loads)
        text = _(
            "{ingredient}: {share} kg is too much for every scale ({scales}). Enter a scale that holds it, or make "
            "batches of at most {batch} kg."
        )
        return text.format(
            ingredient=ingredient.name, share=kg(share), scales=_spans(scales, line.loads),
            batch=kg(order.batch_kg * most / share, 1),
        )
    text = _("{ingredient}: no scale can weigh {share} kg within its tolerance ({scales}). Enter a scale that can.")
    return text.format(ingredient=ingredient.name, share=kg(share), scales=_spans(scales, line.loads))


def _fixed(reason: Reason, line: Line, ingredient: Ingredient, scales: Sequence[Scale | None]) -> str:
    kg = notation().write_short
    load, mass = line.loads[0], line.fixed_kg or 0.0
    if reason.why == "fixed step":
        lower = max(mass // load.step_kg, 0.0) * load.step_kg
        text = _("{ingredient} is fixed at {mass} kg, no multiple of a scale's step; fix {lower} or {upper} kg.")
        return text.format(
            ingredient=ingredient.name, mass=kg(mass), lower=kg(lower), upper=kg(lower + load.step_kg)
        )
    if reason.why == "fixed load":
        text = _("{ingredient} is fixed at {mass} kg, which no scale weighs ({scales}); fix another mass.")
        return text.format(ingredient=ingredient.name, mass=kg(mass), scales=_spans(scales, line.loads))
    off = max(load.step_kg, load.tolerance * line.share_kg)
    text = _(
        "{ingredient} is medicated and cannot be fixed at {mass} kg; its share is {share} kg, its tolerance {off} kg."
    )
    return text.format(ingredient=ingredient.name, mass=kg(mass), share=kg(line.share_kg), off=kg(off))


def _spans(scales: Sequence[Scale | None], loads: Sequence[Load]) -> str:
    """Every scale with what it weighs."""
    short = notation().write_short
    found = []
    for scale, load in zip(scales, loads, strict=True):
        if scale is not None and scale.step_l is not None:
            text = _("{scale}: steps of {step} l ({step_kg} kg) from {least} to {greatest} l")
            if scale.greatest_l is None:
                text = _("{scale}: steps of {step} l ({step_kg} kg) from {least} l")
            found.append(text.format(
                scale=scale.name, step=short(scale.step_l), step_kg=short(load.step_kg),
                least=short(scale.least_l or 0.0), greatest=short(scale.greatest_l),
            ))
            continue
        name = _("without a scale") if scale is None else scale.name
        if load.greatest_kg is None:
            text = _("{scale}: steps of {step} kg from {least} kg")
        else:
            text = _("{scale}: steps of {step} kg from {least} to {greatest} kg")
        found.append(text.format(
            scale=name, step=short(load.step_kg), least=short(load.least_kg or 0.0), greatest=short(load.greatest_kg)
        ))
    return "; ".join(found)
