"""What the ingredients that the mill makes itself are made of, through every level."""

from __future__ import annotations

import datetime
import math
from collections.abc import Collection, Iterable, Mapping

from blendapp.domain import yields
from blendapp.domain.batches import ToMake
from blendapp.domain.formulas import Formula
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.making import cycle_fault
from blendapp.domain.problems import Refused
from blendapp.domain.versions import approved_version, sound_snapshot
from blendapp.domain.wording import _
from blendapp.optimise.build.composition import Composition
from blendapp.services.formulate import FailedCertificate, formulate

# More levels than this are taken for a fault; a premix of a premix of a premix is three.
_MOST_LEVELS = 60


class CannotBeMade(ValueError):
    """An ingredient whose contents are not known, or that goes into itself; the text names it and the mend."""


class Makers:
    """What made ingredients are made of on one day, each worked out once.

    An ingredient is made of the approved version of its formula where there is a sound one, else of today's answer.
    """

    def __init__(self, library: Library, on: datetime.date, composition: Composition | None = None) -> None:
        self.library, self.on = library, on
        self.composition = composition or Composition(library)
        self._parts: dict[int, dict[int, float]] = {}

    def formula_of(self, ingredient_id: int) -> Formula | None:
        """The formula that makes an ingredient, None for one that is bought or gone."""
        ingredient: Ingredient | None = self.library.records["ingredient"].get(ingredient_id)
        formula_id = None if ingredient is None else ingredient.made_by_formula_id
        return None if formula_id is None else self.library.records["formula"].get(formula_id)

    def is_opened(self, ingredient_id: int) -> bool:
        return self.formula_of(ingredient_id) is not None and self.library.ingredient(ingredient_id).opened

    def parts(self, ingredient_id: int) -> Mapping[int, float]:
        """What a made ingredient is made of, as fractions of its mass, one level deep. Raises CannotBeMade."""
        if ingredient_id not in self._parts:
            self._parts[ingredient_id] = self._worked_out(ingredient_id)
        return self._parts[ingredient_id]

    def _worked_out(self, ingredient_id: int) -> dict[int, float]:
        formula, name = self.formula_of(ingredient_id), self.library.ingredient(ingredient_id).name
        assert formula is not None
        version = approved_version(self.library, formula.id)
        try:
            if version is not None:
                amounts = sound_snapshot(self.library, version).amounts
            else:
                result = formulate(self.library, formula.id, self.on, self.composition, prices=False)
                if not result.has_answer or not result.mix:
                    text = _("{ingredient} is made by {formula}, which has no answer: {cause}")
                    cause = result.cause or _("a mix of nothing")
                    raise CannotBeMade(text.format(ingredient=name, formula=formula.name, cause=cause))
                amounts = {i.ingredient_id: i.amount or 0.0 for i in result.mix}
        except (FailedCertificate, Refused) as failure:
            text = _("{ingredient} is made by {formula}, which has no answer: {cause}")
            raise CannotBeMade(text.format(ingredient=name, formula=formula.name, cause=failure)) from failure
        gone = [key for key in amounts if key not in self.library.records["ingredient"]]
        if gone:
            text = _(
                "{ingredient} is made by {formula}, whose approved version holds an ingredient that the mill no longer "
                "has; prepare and approve it anew."
            )
            raise CannotBeMade(text.format(ingredient=name, formula=formula.name))
        total = math.fsum(amounts.values())
        return {key: amount / total for key, amount in amounts.items() if amount > 0}

    def in_order(self, made: Iterable[int], *, lenient: bool = False) -> list[int]:
        """Made ingredients and those that they are made of, each once, what goes into another before it.

        Raises CannotBeMade for one that goes into itself, and for one without known contents unless lenient, where it
        counts as made of nothing.
        """
        done: dict[int, None] = {}
        for key in made:
            self._visit(key, (), done, lenient)
        return list(done)

    def _visit(self, key: int, path: tuple[int, ...], done: dict[int, None], lenient: bool) -> None:
        if key in done or self.formula_of(key) is None:
            return
        if key in path or len(path) > _MOST_LEVELS:
            raise CannotBeMade(self._cycle((*path[path.index(key) if key in path else 0:], key)))
        for part in self._parts_or_none(key, lenient):
            self._visit(part, (*path, key), done, lenient)
        done[key] = None

    def _parts_or_none(self, key: int, lenient: bool) -> Mapping[int, float]:
        try:
            return self.parts(key)
        except CannotBeMade:
            if lenient:
                return {}
            raise

    def _cycle(self, chain: tuple[int, ...]) -> str:
        text = _("“{name}” would go into itself ({chain}); take it out of one of these formulas.")
        names = [self.library.ingredient(key).name for key in reversed(chain)]
        return cycle_fault(self.library, chain[0]) or text.format(name=names[0], chain=" < ".join(names))

    def opened(self, ingredient_id: int) -> dict[int, float]:
        """What stands in place of an opened ingredient, as fractions of its mass: nothing that is itself opened.

        Raises CannotBeMade.
        """
        return self._opened(ingredient_id)[0]

    def opened_on_the_way(self, ingredient_id: int) -> dict[int, tuple[int, ...]]:
        """For everything that stands in its place, the opened ingredients through which it comes, outermost first."""
        return self._opened(ingredient_id)[1]

    def _opened(self, ingredient_id: int) -> tuple[dict[int, float], dict[int, tuple[int, ...]]]:
        order = [key for key in reversed(self.in_order([ingredient_id], lenient=True)) if self.is_opened(key)]
        mass = {ingredient_id: 1.0}
        through: dict[int, tuple[int, ...]] = {ingredient_id: ()}
        for key in order:  # an ingredient comes before all that it is made of
            if key not in mass:
                continue
            fraction, way = mass.pop(key), (*through.pop(key), key)
            for part, of_it in self.parts(key).items():
                mass[part] = mass.get(part, 0.0) + fraction * of_it
                through[part] = tuple(dict.fromkeys((*through.get(part, ()), *way)))
        return mass, through

    def inside(self, ingredient_ids: Iterable[int]) -> set[int]:
        """All that these ingredients are made of, through every level, as far as it is known; not they themselves."""
        found: set[int] = set()
        try:
            order = self.in_order(ingredient_ids, lenient=True)
        except CannotBeMade:
            return found
        for key in order:
            found.update(self._parts_or_none(key, True))
        return found

    def to_make(self, masses_kg: Mapping[int, float]) -> tuple[list[ToMake], list[str]]:
        """What must be made so that these masses are there: what goes into another first, summed by ingredient.

        masses_kg: of made ingredients that are not opened. What the making itself loses, or takes up as water, is
        made in addition. The second of the two: sentences on what is not known. Raises CannotBeMade for one that goes
        into itself.
        """
        order = self.in_order(masses_kg, lenient=True)
        needed: dict[int, float] = dict(masses_kg)
        notes = []
        for key in reversed(order):
            mass = needed.get(key, 0.0)
            if not mass:
                continue
            try:
                parts = self.parts(key)
            except CannotBeMade as unknown:
                notes.append(str(unknown))
                continue
            weighed = mass / (1.0 if self.is_opened(key) else self._part_left(key, parts))
            for part, fraction in parts.items():
                if self.formula_of(part) is not None:
                    needed[part] = needed.get(part, 0.0) + weighed * fraction
        made = [key for key in order if needed.get(key) and not (self.is_opened(key) and key not in masses_kg)]
        return [self._to_make(key, needed[key]) for key in made], notes

    def _part_left(self, key: int, parts: Mapping[int, float]) -> float:
        formula = self.formula_of(key)
        assert formula is not None
        dry = yields.dry_matter_percent((self.library.ingredient(part), share) for part, share in parts.items())
        left = yields.part_left(formula.loss_percent, dry, formula.product_dry_matter_percent)
        return left or yields.part_left(formula.loss_percent, None, None) or 1.0

    def _to_make(self, key: int, mass_kg: float) -> ToMake:
        formula = self.formula_of(key)
        assert formula is not None
        return ToMake(self.library.ingredient(key).name, formula.id, formula.name, mass_kg)

    def records(self, ingredient_ids: Collection[int]) -> list[Ingredient]:
        """These ingredients and all that they are made of, those that are gone left out."""
        every = sorted({*ingredient_ids, *self.inside(ingredient_ids)})
        found = self.library.records["ingredient"]
        return [found[key] for key in every if key in found]
