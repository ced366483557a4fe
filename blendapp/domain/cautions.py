"""Cautions that travel with every result onto screen and paper: rules as data, each with its source.

A forbidding rule leaves a formula without an answer; a warning rule adds a sentence. Local law comes first.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.domain import units
from blendapp.domain.fields import N_
from blendapp.domain.formulas import Animal, Formula
from blendapp.domain.ingredients import Ingredient, Tag
from blendapp.domain.library import Library
from blendapp.domain.results import UnknownValue
from blendapp.domain.wording import _

GENERAL_CAUTION = N_(
    "A qualified nutritionist must review any ration before it is fed. Local law and licensed practice come first."
)


@dataclass(frozen=True)
class Rule:
    """One rule of law or practice. limit: its figure, in `unit`, where it has one; source: its citation."""

    key: str
    text: str
    source: str
    limit: float | None = None
    unit: str = ""


IONOPHORE_HORSE = Rule(
    "ionophore in horse feed",
    N_("{ingredient} holds an ionophore, which can kill horses; it must not be in a feed for horses."),
    "monensin LD50 in horses 1.38 mg/kg body weight, review of monensin toxicosis in horses",
)
RUMINANT_PROTEIN = Rule(
    "ruminant protein in ruminant feed",
    N_("{ingredient} holds ruminant protein, which is prohibited in feed for {animal}."),
    "21 CFR 589.2000",
)
NPN_NON_RUMINANT = Rule(
    "non-protein nitrogen in feed for non-ruminants",
    N_(
        "{ingredient} brings {value} % crude protein from non-protein nitrogen; feed for {animal} may hold at most "
        "{limit} %. Limit or leave out {ingredient}."
    ),
    "West Virginia 61-5-12.2",
    1.25,
    "%",
)
NPN_UNKNOWN = Rule(
    "non-protein nitrogen of unknown strength",
    N_(
        "{ingredient} holds non-protein nitrogen in a feed for {animal}, and its crude protein is unknown, so that "
        "{limit} % cannot be kept. Enter it (for the nutrient with the key crude protein), or leave {ingredient} out."
    ),
    "West Virginia 61-5-12.2",
    1.25,
    "%",
)
COPPER_SHEEP = Rule(
    "added copper in sheep feed",
    N_("{ingredient} adds copper to a feed for sheep. Sheep are poisoned by little copper: check the whole of it."),
    "Duncan 1997, In Practice 19(9):503: sheep 15 ppm in the diet; (EU) 2018/1039: 15 mg/kg",
    15.0,
    "mg/kg",
)
SELENIUM = Rule(
    "added selenium",
    N_("Added selenium is {value} mg/kg; more than {limit} mg/kg is not allowed in complete feed."),
    "21 CFR 573.920",
    0.3,
    "mg/kg",
)
SELENIUM_UNKNOWN = Rule(
    "added selenium of unknown strength",
    N_("{ingredient} adds selenium in an amount that is not known here; at most {limit} mg/kg is allowed."),
    "21 CFR 573.920",
    0.3,
    "mg/kg",
)
RULES: tuple[Rule, ...] = (
    IONOPHORE_HORSE, RUMINANT_PROTEIN, NPN_NON_RUMINANT, NPN_UNKNOWN, COPPER_SHEEP, SELENIUM, SELENIUM_UNKNOWN,
)

# Amounts: ingredient identifier and its share of the mix as fed (fraction), or kg as fed per day of a ration.
Mix = Sequence[tuple[int, float]]


# A feed is for more than one of them.
_ANIMALS = {
    Animal.PIG: N_("pigs"), Animal.GOAT: N_("goats"), Animal.HORSE: N_("horses"), Animal.OTHER: N_("other animals"),
}


def animals(animal: Animal) -> str:
    """A kind of animal as a sentence names more than one of it."""
    return _(_ANIMALS.get(animal, animal.value))


def general_caution() -> str:
    return _(GENERAL_CAUTION)


def _said(rule: Rule, **places: str) -> str:
    limit = "" if rule.limit is None else f"{rule.limit:g}"
    return _("{caution} ({source})").format(caution=_(rule.text).format(limit=limit, **places), source=rule.source)


def forbidden_by_admission(formula: Formula, admitted: Sequence[Ingredient]) -> str | None:
    """Why a formula may not have an answer because of what it admits, in one sentence an ingredient, or None."""
    found: list[str] = []
    for ingredient in admitted:
        if formula.animal is Animal.HORSE and Tag.IONOPHORE in ingredient.tags:
            found.append(_said(IONOPHORE_HORSE, ingredient=ingredient.name))
        if formula.animal is not None and formula.animal.ruminant and Tag.RUMINANT_PROTEIN in ingredient.tags:
            found.append(_said(RUMINANT_PROTEIN, ingredient=ingredient.name, animal=animals(formula.animal)))
    return " ".join(found) or None


def forbidden_in_mix(formula: Formula, library: Library, mix: Mix) -> str | None:
    """Why a mix may not be fed: crude protein from non-protein nitrogen in feed for non-ruminants, or None."""
    if formula.animal is None or formula.animal.ruminant is not False:
        return None
    total = sum(amount for _id, amount in mix)
    brought, names = 0.0, []
    for ingredient_id, amount in mix:
        ingredient = library.ingredient(ingredient_id)
        if Tag.NON_PROTEIN_NITROGEN not in ingredient.tags or amount <= 0:
            continue
        protein = npn_crude_protein_percent(library, ingredient)
        if protein is None:
            return _said(NPN_UNKNOWN, ingredient=ingredient.name, animal=animals(formula.animal))
        brought += protein * amount / total
        names.append(ingredient.name)
    limit = NPN_NON_RUMINANT.limit or 0.0
    if brought <= limit * (1 + 1e-9):
        return None
    return _said(NPN_NON_RUMINANT, ingredient=", ".join(names), value=f"{brought:.2f}", animal=animals(formula.animal))


def npn_crude_protein_percent(library: Library, ingredient: Ingredient) -> float | None:
    """Crude protein from non-protein nitrogen of an ingredient so tagged, % as fed.

    The nutrient with the key npn crude protein says it; without one all crude protein counts.
    """
    for key in ("npn crude protein", "crude protein"):
        for nutrient in library.nutrients:
            if nutrient.key != key:
                continue
            value = library.value(ingredient.id, nutrient.id)
            known = None if value is None else value.as_fed("%", ingredient.dry_matter_percent)
            if known is not None:
                return known
    return None


def warnings(formula: Formula, library: Library, mix: Mix, unknown: Sequence[UnknownValue]) -> list[str]:
    """The cautions of a mix, the general one first. mix: empty where there is no answer."""
    found = [general_caution()]
    used = [(library.ingredient(key), amount) for key, amount in mix if amount > 0]
    if formula.animal is None:
        found.append(_("The formula names no animal, so that cautions for one kind of animal could not be checked."))
    if formula.animal in (None, Animal.OTHER):
        found += _sensitive(used)
    if formula.animal is Animal.SHEEP:
        copper = _bringing(library, used, Tag.ADDED_COPPER, "added copper")
        found += [_said(COPPER_SHEEP, ingredient=ingredient.name) for ingredient in copper]
    found += _selenium(library, used)
    found += _medicated(used)
    found += [_unsafe(library, u) for u in unknown if u.unsafe]
    return found


def _unsafe(library: Library, unknown: UnknownValue) -> str:
    """What is missing: the value itself, or the dry matter without which one on dry matter says nothing as fed."""
    text = _("{nutrient} of {ingredient} is unknown and counts as 0 under a limit that this may break; enter it.")
    nutrient = library.named("nutrient", unknown.nutrient)
    ingredient = library.named("ingredient", unknown.ingredient)
    if nutrient is not None and ingredient is not None and library.value(ingredient.id, nutrient.id) is not None:
        text = _(
            "{nutrient} of {ingredient} is known only in its dry matter, which is unknown, and counts as 0 under a "
            "limit that this may break; enter the dry matter."
        )
    return text.format(nutrient=unknown.nutrient, ingredient=unknown.ingredient)


def _sensitive(used: Sequence[tuple[Ingredient, float]]) -> list[str]:
    sentence = _("{ingredient} ({tag}) is prohibited for some animals; make sure that this feed is for none of them.")
    tags = (Tag.IONOPHORE, Tag.RUMINANT_PROTEIN, Tag.NON_PROTEIN_NITROGEN)
    return [
        sentence.format(ingredient=ingredient.name, tag=_(tag))
        for ingredient, _amount in used
        for tag in tags
        if tag in ingredient.tags
    ]


def _bringing(
    library: Library, used: Sequence[tuple[Ingredient, float]], tag: Tag, key: str
) -> list[Ingredient]:
    """The ingredients of a mix that carry a tag or have more than 0 of the nutrient with a key."""
    keyed = [n.id for n in library.nutrients if n.key == key]
    return [
        ingredient
        for ingredient, _amount in used
        if tag in ingredient.tags
        or any((v := library.value(ingredient.id, n)) is not None and v.amount > 0 for n in keyed)
    ]


def _selenium(library: Library, used: Sequence[tuple[Ingredient, float]]) -> list[str]:
    total = sum(amount for _i, amount in used)
    keyed = [n for n in library.nutrients if n.key == "added selenium"]
    brought, found = 0.0, []
    for ingredient, amount in used:
        known = None
        for nutrient in keyed:
            value = library.value(ingredient.id, nutrient.id)
            if value is not None and units.concentration(value.unit).family is units.Family.MASS:
                known = value.as_fed("mg/kg", ingredient.dry_matter_percent)
        if known is not None:
            brought += known * amount / total
        elif Tag.ADDED_SELENIUM in ingredient.tags:
            found.append(_said(SELENIUM_UNKNOWN, ingredient=ingredient.name))
    limit = SELENIUM.limit or 0.0
    if brought > limit * (1 + 1e-9):
        found.insert(0, _said(SELENIUM, value=f"{brought:.3g}"))
    return found


def _medicated(used: Sequence[tuple[Ingredient, float]]) -> list[str]:
    sentence = _("Medicated: {ingredient}. Drug: {drug}; level: {level}; for: {species}; withdrawal: {withdrawal}.")
    missing = _("not entered")
    return [
        sentence.format(
            ingredient=i.name, drug=i.drug or missing, level=i.drug_level or missing,
            species=i.drug_species or missing, withdrawal=i.withdrawal or missing,
        )
        for i, _amount in used
        if Tag.MEDICATED in i.tags
    ]
