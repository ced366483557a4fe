"""What stands against a batch as it is weighed, and what is to be said of it: rules held against all that it holds."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from blendapp.domain import cautions
from blendapp.domain.formulas import Formula, LimitKind
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.results import UnknownValue
from blendapp.domain.wording import _
from blendapp.optimise.build.formula import FormulaProgram, unknown_values
from blendapp.services.batch_mix import BatchMix
from blendapp.services.makers import Makers


def forbidden(formula: Formula, library: Library, makers: Makers, weighed: Mapping[int, float]) -> str | None:
    """Why a batch may not be fed, or None. weighed: kg by ingredient identifier; what made ones hold counts too."""
    used = {key: kg for key, kg in weighed.items() if kg > 0}
    held = {one.id: one for one in makers.records(used)}
    held.update((key, library.ingredient(key)) for key in used)
    return cautions.forbidden_by_admission(formula, list(held.values())) or cautions.forbidden_in_mix(
        formula, library, list(used.items())
    )


def warnings(
    library: Library, built: FormulaProgram, makers: Makers, mix: BatchMix, weighed: Mapping[int, float],
    unknown: Sequence[UnknownValue],
) -> list[str]:
    """The cautions of a batch, the general one first, medicated rework right after it.

    built: the program of the batch. unknown: those of the answer; what an opened ingredient lacks is of no matter, and
    what the ingredients in its place and rework lack is said in addition.
    """
    formula = built.formula
    if not mix.is_plain:
        admitted = {i.id for i in library.admitted(formula)} - set(mix.rework)
        fresh = {library.ingredient(key).name for key in mix.contents.amounts if key not in admitted}
        shut = {library.ingredient(key).name for key in mix.opened}
        known = {(one.ingredient, one.nutrient) for one in unknown}
        unknown = [one for one in unknown if one.ingredient not in shut] + [
            one for one in unknown_values(library, built)
            if one.ingredient in fresh and (one.ingredient, one.nutrient) not in known
        ]
    general, *rest = cautions.warnings(formula, library, list(weighed.items()), unknown)
    return [
        general, *_medicated_rework(formula, makers, mix, weighed), *rest, *_medicated_inside(makers, weighed),
        *_counted_in_part(library, formula, mix, weighed),
    ]


def _medicated_rework(formula: Formula, makers: Makers, mix: BatchMix, weighed: Mapping[int, float]) -> list[str]:
    text = _(
        "MEDICATED REWORK: {rework} brings {drugs} into {formula}, which does not hold it otherwise. Leave it out, or "
        "keep to its species and its withdrawal."
    )
    own = {i.id for i in makers.records([key for key in weighed if mix.rework.get(key, 0.0) < 1 - 1e-9])}
    found = []
    for key in mix.rework:
        drugs = [one for one in makers.records([key]) if one.medicated and one.id not in own]
        if drugs and weighed.get(key):
            found.append(text.format(
                rework=makers.library.ingredient(key).name, drugs=", ".join(map(_drug, drugs)), formula=formula.name
            ))
    return found


def _drug(ingredient: Ingredient) -> str:
    drug = ingredient.drug.strip()
    return f"{ingredient.name} ({drug})" if drug else ingredient.name


def _medicated_inside(makers: Makers, weighed: Mapping[int, float]) -> list[str]:
    """Drugs that a made ingredient brings, which no line of the batch names."""
    text = _("Medicated: {ingredient} holds {inside}. Drug: {drug}; level: {level}; for: {species}; withdrawal: "
             "{withdrawal}.")
    missing = _("not entered")
    return [
        text.format(
            ingredient=makers.library.ingredient(key).name, inside=one.name, drug=one.drug or missing,
            level=one.drug_level or missing, species=one.drug_species or missing, withdrawal=one.withdrawal or missing,
        )
        for key, kg in weighed.items() if kg > 0 and makers.formula_of(key) is not None
        for one in makers.records([key]) if one.medicated and one.id not in weighed
    ]


def _counted_in_part(library: Library, formula: Formula, mix: BatchMix, weighed: Mapping[int, float]) -> list[str]:
    """A limit on an ingredient counts what the formula itself holds of it, as where nothing is opened; that is said."""
    kg = notation().write_short
    text = _("The limit on {ingredient} counts {part} kg of its {whole} kg; the rest stands in place of {opened}.")
    found = []
    for limit in library.limits(formula.id):
        key = limit.subject.ids[0] if limit.kind is LimitKind.INGREDIENT else 0
        parts = mix.contents.counted_as.get(key)
        if parts is None or not weighed.get(key) or (limit.minimum is None and limit.maximum is None):
            continue
        found.append(text.format(
            ingredient=library.ingredient(key).name, part=kg(parts.get(key, 0.0) * weighed[key], 3),
            whole=kg(weighed[key], 3), opened=", ".join(mix.of_opened.get(key, ())),
        ))
    return found
