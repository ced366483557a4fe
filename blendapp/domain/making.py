"""Ingredients that the mill makes itself: no formula may use what it makes, and what a mix holds is its parts' sum."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from blendapp.domain.formulas import Formula, LimitKind
from blendapp.domain.ingredients import Ingredient, Tag
from blendapp.domain.library import Library
from blendapp.domain.wording import _, plural


def used_ids(library: Library, formula: Formula) -> set[int]:
    """Identifiers of the ingredients that a formula may use; one that it limits to at most 0 is not used."""
    shut = {
        ingredient_id
        for limit in library.limits(formula.id)
        if limit.kind is LimitKind.INGREDIENT and limit.maximum is not None and limit.maximum <= 0
        for ingredient_id in limit.subject.ids
    }
    return {ingredient.id for ingredient in library.admitted(formula)} - shut


def cycle(library: Library, ingredient_id: int) -> list[str]:
    """The shortest chain of ingredients from one that the mill makes back to itself, by name; empty without one.

    Each name in the chain is made by a formula that uses the next; the first and the last are the same.
    """
    came_from: dict[int, int] = {}
    edge = [ingredient_id]
    while edge:
        following: list[int] = []
        for made in edge:
            ingredient = library.records["ingredient"].get(made)
            formula_id = None if ingredient is None else ingredient.made_by_formula_id
            formula = None if formula_id is None else library.records["formula"].get(formula_id)
            if formula is None:
                continue
            for used in sorted(used_ids(library, formula)):
                if used == ingredient_id:
                    return _chain(library, came_from, ingredient_id, made)
                made_itself = library.ingredient(used).made_by_formula_id is not None
                if made_itself and used not in came_from:
                    came_from[used] = made
                    following.append(used)
        edge = following
    return []


def _chain(library: Library, came_from: dict[int, int], start: int, last: int) -> list[str]:
    back = [start, last] if last != start else [start]
    while back[-1] != start:
        back.append(came_from[back[-1]])
    if len(back) == 1:
        back.append(start)
    return [library.ingredient(key).name for key in reversed(back)]


def cycle_fault(library: Library, ingredient_id: int) -> str | None:
    """The sentence that refuses an ingredient which goes into itself, or None."""
    chain = cycle(library, ingredient_id)
    if not chain:
        return None
    text = _(
        "“{name}” would go into itself ({chain}); in one of these formulas give it a maximum of 0, or admit listed "
        "ingredients only."
    )
    return text.format(name=chain[0], chain=" < ".join(chain))


def given_by_formula(names: Sequence[str]) -> str:
    """What to say of made ingredients that lack a price or values; "" for none."""
    if not names:
        return ""
    text = plural(
        "The formula that makes {names} can give its price and composition: in the window, “Take composition and price "
        "from its formula”.",
        "The formulas that make {names} can give their prices and compositions: in the window, “Take composition and "
        "price from its formula”.", len(names))
    return text.format(names=", ".join(names))


def parts(library: Library, ingredient_id: int) -> list[Ingredient]:
    """Everything that a made ingredient may hold, through other made ones too, in the order of identifiers."""
    found: set[int] = set()
    edge = [ingredient_id]
    while edge:
        ingredient = library.records["ingredient"].get(edge.pop())
        formula = None if ingredient is None else library.records["formula"].get(ingredient.made_by_formula_id or 0)
        if formula is not None:
            new = used_ids(library, formula) - found
            found |= new
            edge += new
    return [library.ingredient(key) for key in sorted(found)]


def held(library: Library, ingredient: Ingredient) -> Ingredient:
    """An ingredient with the tags of everything that it may be made of, for rules about what a feed holds."""
    if ingredient.made_by_formula_id is None:
        return ingredient
    inside = [tag for part in parts(library, ingredient.id) for tag in part.tags if tag is not Tag.ONLY_WHEN_LISTED]
    return replace(ingredient, tags=tuple(dict.fromkeys([*ingredient.tags, *inside])))


@dataclass(frozen=True)
class Mixture:
    """What a mix holds. dry_matter_percent: None where a part's is unknown. as_fed: by nutrient identifier, in the
    nutrient's own unit; missing: the parts without a value, by nutrient identifier, for those that are unknown."""

    dry_matter_percent: float | None
    as_fed: dict[int, float]
    missing: dict[int, tuple[str, ...]]


def mixture(library: Library, amounts: Mapping[int, float]) -> Mixture:
    """What a mix of these amounts (by ingredient identifier, in any one unit of mass) holds.

    A nutrient of which one part has no value is unknown, never the sum of the others; one that no part has is left out.
    """
    whole = sum(amounts.values())
    shares = [(library.ingredient(key), amount / whole) for key, amount in amounts.items() if amount > 0]
    dry = [i.dry_matter_percent for i, _share in shares]
    as_fed: dict[int, float] = {}
    missing: dict[int, tuple[str, ...]] = {}
    for nutrient in library.nutrients:
        found: list[float] = []
        lacking: list[str] = []
        for ingredient, share in shares:
            value = library.value(ingredient.id, nutrient.id)
            amount = None if value is None else value.as_fed(nutrient.unit, ingredient.dry_matter_percent)
            if amount is None:
                lacking.append(ingredient.name)
            else:
                found.append(share * amount)
        if not lacking:
            as_fed[nutrient.id] = sum(found)
        elif found:
            missing[nutrient.id] = tuple(lacking)
    known = [d for d in dry if d is not None]
    mean = sum(share * d for (_i, share), d in zip(shares, known, strict=True)) if len(known) == len(shares) else None
    return Mixture(mean, as_fed, missing)
