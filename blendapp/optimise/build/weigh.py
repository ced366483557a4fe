"""A mix and a mill's scales become an order in whole steps, and the whole batch becomes lines of a sheet again."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.plant import Scale
from blendapp.domain.results import LimitResult, NutrientResult
from blendapp.domain.wording import _
from blendapp.optimise.build import no_batch
from blendapp.optimise.build.batch import broken_by, weighed
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.program import Row
from blendapp.optimise.steps.problem import LeastIfUsed, Line, Load, Order, exact
from blendapp.optimise.steps.search import NoBatch, WholeBatch, whole_batch

# The step of every line in a mill that has entered no scales.
UNSCALED_STEP_KG = 0.01
USUAL_TOLERANCE = 0.02
CLOSE_TOLERANCE = 0.01  # of hand-adds and medicated lines
# A share below this part of the batch is the dust of solving.
_DUST = 1e-9


@dataclass(frozen=True)
class WeighedLine:
    """scale: None in a mill without scales. tolerance_kg: how far target_kg may lie from share_kg. target_l: of a line
    that a liquid meter doses, a multiple of its step_l; target_kg is that times the density."""

    ingredient: Ingredient
    scale: Scale | None
    step_kg: float
    share_kg: float
    target_kg: float
    tolerance_kg: float
    fixed: bool
    target_l: float | None = None


@dataclass(frozen=True)
class Weighing:
    """A whole batch held against its formula.

    broken: indices of the limits that do not hold, from the kilograms. notes: sentences on lines left out and on fixed
    lines outside their tolerance. unproven: the first aim of "total", "limits", "deviation", "cost" not proven best,
    "" if all are; gap: by how much it could at most be better, None if all are proven.
    """

    lines: tuple[WeighedLine, ...]
    limits: tuple[LimitResult, ...]
    nutrients: tuple[NutrientResult, ...]
    broken: tuple[int, ...]
    notes: tuple[str, ...]
    unproven: str
    gap: float | None


class FixedRefused(ValueError):
    """Fixed lines that cannot be; sentences: one a fault."""

    def __init__(self, sentences: Sequence[str]) -> None:
        self.sentences = list(sentences)
        super().__init__(" ".join(sentences))


class NotWeighable(ValueError):
    """No batch in whole steps exists; the text says why and what would mend it."""


def weigh(
    library: Library,
    built: FormulaProgram,
    amounts: Mapping[int, float],
    batch_kg: float,
    *,
    fixed: Mapping[int, float] | None = None,
    least_kg: float | None = None,
    greatest_kg: float | None = None,
    time_limit_s: float = 1.5,
) -> Weighing:
    """The best whole batch of a mix.

    built: the program of the formula, with the contents of the batch where that is more than its mix. amounts: of what
    is weighed by ingredient identifier, fractions or kg per day, in the order in which lines are wanted. fixed: kg by
    ingredient identifier. least_kg, greatest_kg: what the mixer holds. Raises FixedRefused, NotWeighable.
    """
    total = math.fsum(amounts.values())
    shares = {key: amount / total * batch_kg for key, amount in amounts.items() if amount > _DUST * total}
    asked = fixed or {}
    ingredients = [library.ingredient(key) for key in shares]
    lacking = no_batch.without_density(library, ingredients)
    if lacking:
        raise NotWeighable(" ".join(lacking))
    faults = no_batch.not_fixable(library, built.formula, asked, shares, _opened(built))
    fixed = {
        key: _as_weighed(library, key, mass) for key, mass in asked.items() if key in shares and math.isfinite(mass)
    }
    scales = [scales_for(library, ingredient, shares[ingredient.id]) for ingredient in ingredients]
    order = order_of(built, ingredients, scales, shares, batch_kg, total, fixed, (least_kg, greatest_kg))
    found = whole_batch(order, time_limit_s)
    if isinstance(found, NoBatch):
        sentences = no_batch.sentences(order, found, ingredients, scales)
        of_fixed = [text for reason, text in sentences if reason.why.startswith("fixed")]
        if faults or of_fixed:
            raise FixedRefused(faults + of_fixed)
        # A scale whose step is at fault is so for every line that might stand on it.
        raise NotWeighable(" ".join(dict.fromkeys(text for _reason, text in sentences)))
    if faults:
        raise FixedRefused(faults)
    return _result(library, built, ingredients, scales, found, total)


def _opened(built: FormulaProgram) -> set[int]:
    """Identifiers of the ingredients in whose place others are weighed."""
    if built.counted is None:
        return set()
    others = built.counted - np.diag(np.diag(built.counted))
    return {ingredient.id for ingredient, row in zip(built.ingredients, others, strict=True) if row.any()}


def tolerance_of(scale: Scale | None, ingredient: Ingredient) -> float:
    """The fraction of its share by which a line may differ."""
    if scale is not None and scale.tolerance_percent is not None:
        return scale.tolerance_percent / 100
    close = ingredient.medicated or (scale is not None and scale.hand_add)
    return CLOSE_TOLERANCE if close else USUAL_TOLERANCE


def scales_for(library: Library, ingredient: Ingredient, share_kg: float | None = None) -> list[Scale | None]:
    """The scales that may weigh an ingredient where the mill works, its own first, then the coarsest.

    Hand-adds come last, but first for what is a hand-add itself. A liquid meter doses only what is assigned to it, or
    to a meter elsewhere. Where its own scale is of another site, those most like that come first, see _like.
    [None] in a mill without scales.
    """
    here = library.scales
    if not here:
        return [None]
    own: Scale | None = None if ingredient.scale_id is None else library.records["scale"].get(ingredient.scale_id)
    if own is not None and own not in here:
        dosed = own.by_volume and (ingredient.density_kg_per_l or 0) > 0
        usable = [scale for scale in here if dosed or not scale.by_volume]
        return [*sorted(usable, key=lambda scale: _like(scale, own, ingredient, share_kg))]
    by_hand = own is not None and own.hand_add
    others = [scale for scale in here if not scale.by_volume and (own is None or scale.id != own.id)]
    others.sort(key=lambda scale: (scale.hand_add != by_hand, -(scale.step_kg or 0.0), scale.id))
    return [own, *others] if own is not None else [*others]


def _like(
    scale: Scale, own: Scale, ingredient: Ingredient, share_kg: float | None
) -> tuple[bool, int, bool, float, int]:
    """How well a scale stands in for one of another site, the least first.

    What can take the share, then what is of the same kind (meter, weighing, by hand), and else weighing before by hand.
    Of those the one whose step is nearest by ratio; but what is coarser than the own scale comes after all others
    unless its step is within the tolerance of the share, since what that scale keeps must still be kept.
    """
    span, of_own = scale.span(ingredient.density_kg_per_l), own.span(ingredient.density_kg_per_l)
    step = 0.0 if span is None else span.step_kg
    own_step = 0.0 if of_own is None else of_own.step_kg
    takes = span is None or share_kg is None or (
        max(step, span.least_kg or 0.0) <= share_kg and (span.greatest_kg is None or share_kg <= span.greatest_kg)
    )
    kind = 0 if _kind(scale) == _kind(own) else 1 + scale.hand_add
    known = step > 0 and own_step > 0
    ratio = abs(math.log(step / own_step)) if known else -step
    within = share_kg is not None and step <= tolerance_of(scale, ingredient) * share_kg
    return not takes, kind, not within and not (known and step <= own_step), ratio, scale.id


def _kind(scale: Scale) -> tuple[bool, bool]:
    return scale.by_volume, scale.hand_add


# How far, in kg, a fixed mass may lie from whole steps that are no whole grams: it is read from a sheet in grams.
_READ_KG = 0.0005


def _as_weighed(library: Library, ingredient_id: int, mass_kg: float) -> float:
    """A fixed mass, brought to the whole steps that it was read from where these are litres or pounds."""
    ingredient = library.ingredient(ingredient_id)
    own = next(iter(scales_for(library, ingredient, mass_kg)), None)
    span = None if own is None else own.span(ingredient.density_kg_per_l)
    if span is None or not span.step_kg > 2 * _READ_KG:
        return mass_kg
    step = exact(span.step_kg)
    if step % Fraction(1, 1000) == 0:
        return mass_kg
    shown = float(round(exact(mass_kg) / step) * step)
    return shown if abs(shown - mass_kg) <= _READ_KG * (1 + 1e-9) else mass_kg


def order_of(
    built: FormulaProgram, ingredients: Sequence[Ingredient], scales: Sequence[Sequence[Scale | None]],
    shares: Mapping[int, float], batch_kg: float, total: float, fixed: Mapping[int, float],
    ends: tuple[float | None, float | None] = (None, None),
) -> Order:
    """A batch as numbers alone: one line an ingredient, on the scales that may weigh it, and the limits of its program.

    shares: exact kg by ingredient identifier. total: what the batch stands for in the amounts of a ration. ends:
    between which totals it must come.
    """
    column = {ingredient.id: j for j, ingredient in enumerate(built.ingredients)}
    columns = [column[ingredient.id] for ingredient in ingredients]
    place = {j: at for at, j in enumerate(columns)}
    lines = tuple(
        Line(
            shares[ingredient.id],
            tuple(_load(scale, ingredient) for scale in tried),
            float(np.nan_to_num(built.price_per_t[j])) / 1000,
            fixed.get(ingredient.id),
            ingredient.medicated,
        )
        for ingredient, tried, j in zip(ingredients, scales, columns, strict=True)
    )
    rows = [
        Row(row.numerator[columns], row.minimum, row.maximum, None if row.divisor is None else row.divisor[columns],
            row.limit)
        for row in built.program.rows
        if row.limit is not None
    ]
    for bound in built.program.bounds:
        unit = np.zeros(len(columns))
        if bound.column in place:
            unit[place[bound.column]] = 1.0
        rows.append(Row(unit, bound.minimum, bound.maximum, None, bound.limit))
    least = []
    for index, (limit, factor) in enumerate(zip(built.limits, built.factors, strict=True)):
        subject = column.get(limit.subject.ids[0], -1) if limit.kind is LimitKind.PRACTICAL else -1
        if subject < 0 or not limit.minimum:
            continue
        counts = np.eye(1, len(column), subject)[0] if built.counted is None else built.counted[subject]
        parts = counts[columns]
        holding = np.flatnonzero(parts)
        if len(holding) == 1:
            at = int(holding[0])
            least.append(LeastIfUsed(at, limit.minimum * factor / float(parts[at]), index))
        elif len(holding):  # an opened ingredient is used: no batch leaves all of its lines out
            rows.append(Row(parts, limit.minimum * factor, None, None, index))
    amount = 1.0 if built.formula.amounts is Amounts.BLEND else total
    return Order(batch_kg, lines, tuple(rows), tuple(least), amount, *ends)


def _load(scale: Scale | None, ingredient: Ingredient) -> Load:
    tolerance = tolerance_of(scale, ingredient)
    if scale is None:
        return Load(UNSCALED_STEP_KG, tolerance=tolerance)
    span = scale.span(ingredient.density_kg_per_l)
    if span is None:  # a scale without a step, which is a fault as one with a step of 0 is
        return Load(0.0, tolerance=tolerance)
    return Load(span.step_kg, span.least_kg, span.greatest_kg, tolerance)


def _litres(scale: Scale | None, steps: int) -> float | None:
    return None if scale is None or scale.step_l is None else float(exact(scale.step_l) * steps)


def _result(
    library: Library, built: FormulaProgram, ingredients: Sequence[Ingredient],
    scales: Sequence[Sequence[Scale | None]], found: WholeBatch, total: float,
) -> Weighing:
    lines = tuple(
        WeighedLine(
            ingredient, tried[p.load], float(p.step), float(p.share), float(kg), float(p.allowed), p.fixed,
            _litres(tried[p.load], n),
        )
        for ingredient, tried, p, n, kg in zip(
            ingredients, scales, found.placed, found.steps, found.kilograms, strict=True
        )
    )
    kilograms = {line.ingredient.id: line.target_kg for line in lines}
    limits, nutrients = weighed(library, built, kilograms, total, found.broken)
    counts = (one.index for one in limits if one.kind is LimitKind.COUNT and broken_by(one) is not None)
    first = next((stage for stage in found.stages if not stage.proven), None)
    return Weighing(
        lines, limits, nutrients, tuple(sorted({*found.broken, *counts})),
        (*_notes(lines), *_stand_ins(library, lines)),
        "" if first is None else first.aim, None if first is None else first.gap,
    )


def _stand_ins(library: Library, lines: Sequence[WeighedLine]) -> list[str]:
    """Which ingredients are weighed on which scale in place of their own, which is of another site."""
    found: dict[tuple[str, str], list[str]] = {}
    for line in lines:
        own: Scale | None = library.records["scale"].get(line.ingredient.scale_id or 0)
        if own is not None and line.scale is not None and line.target_kg and own not in library.scales:
            found.setdefault((line.scale.name, own.name), []).append(line.ingredient.name)
    text = _("On {scale} in place of {own}, which is not at this site: {ingredients}.")
    return [text.format(scale=scale, own=own, ingredients=", ".join(names)) for (scale, own), names in found.items()]


def _notes(lines: Sequence[WeighedLine]) -> list[str]:
    """What the lines alone do not say plainly enough."""
    short = notation().write_short
    found = []
    for line in lines:
        name, share = line.ingredient.name, short(line.share_kg)
        off = abs(line.target_kg - line.share_kg)
        if line.fixed and off > line.tolerance_kg * (1 + 1e-9):
            text = _("{ingredient} is fixed at {kg} kg; its share is {share} kg and its tolerance {tolerance} kg.")
            found.append(text.format(
                ingredient=name, kg=short(line.target_kg), share=share, tolerance=short(line.tolerance_kg)
            ))
        elif not line.target_kg:
            text = _("{ingredient} is left out: its share of {share} kg is less than a step of {step} kg.")
            if line.fixed:
                text = _("{ingredient} is left out: it is fixed at 0 kg; its share is {share} kg.")
            found.append(text.format(ingredient=name, share=share, step=short(line.step_kg)))
    return found
