"""Ingredients that the mill makes itself: no formula may use, directly or through others, what it makes."""

from __future__ import annotations

from blendapp.domain.formulas import Formula, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.wording import _


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
