"""What the feed before leaves in a mixer, and which of it must not get into the next feed: rules as data.

Equipment that made a medicated feed is cleaned out so that no unsafe residue gets into the next one: physically, by a
flush, or by the sequence of feeds (21 CFR 225.65 and 225.165).
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass

from blendapp.domain.fields import N_
from blendapp.domain.formulas import Animal, Formula
from blendapp.domain.ingredients import Ingredient, Tag
from blendapp.domain.names import fold
from blendapp.domain.wording import _


@dataclass(frozen=True)
class Rule:
    """A material with a tag must not be carried into feed for some animals. source: its citation."""

    tag: Tag
    harms: Callable[[Animal | None], bool]
    text: str
    source: str


def _unsaid(animal: Animal | None) -> bool:
    """Whether a feed may be for any animal, as far as its formula says."""
    return animal in (None, Animal.OTHER)


RULES = (
    Rule(
        Tag.IONOPHORE, lambda animal: animal is Animal.HORSE or _unsaid(animal),
        N_("{ingredient} (ionophore) can kill horses"),
        "monensin LD50 in horses 1.38 mg/kg body weight, review of monensin toxicosis in horses",
    ),
    Rule(
        Tag.RUMINANT_PROTEIN, lambda animal: _unsaid(animal) or bool(animal and animal.ruminant),
        N_("{ingredient} (ruminant protein) is prohibited in feed for ruminants"),
        "21 CFR 589.2000",
    ),
    Rule(
        Tag.ADDED_COPPER, lambda animal: animal is Animal.SHEEP,
        N_("{ingredient} (added copper) can poison sheep"),
        "Duncan 1997, In Practice 19(9):503",
    ),
)


def harmful(formula: Formula, before: Iterable[Ingredient], now: Iterable[Ingredient]) -> list[str]:
    """Why what the feed before held must not be left in the mixer, one clause a material.

    before, now: all that the two feeds hold, what made ingredients are made of too. A drug is no matter where the feed
    holds the same ingredient, or one of the same drug, itself.
    """
    now = list(now)
    held: Collection[int] = {ingredient.id for ingredient in now}
    drugs = {fold(i.drug) for i in now if i.drug.strip()}
    found = []
    for ingredient in before:
        for rule in RULES:
            if rule.tag in ingredient.tags and rule.harms(formula.animal):
                found.append(_(rule.text).format(ingredient=ingredient.name))
        if ingredient.medicated and ingredient.id not in held and fold(ingredient.drug) not in drugs:
            text = _("{ingredient} (drug: {drug}) is not in this feed")
            found.append(text.format(ingredient=ingredient.name, drug=ingredient.drug.strip() or _("not entered")))
    return list(dict.fromkeys(found))
