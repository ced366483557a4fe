"""The composition of a library as one array, kept between solves and refreshed where it was edited."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import numpy as np

from blendapp.domain.ingredients import Basis, Ingredient
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.optimise.program import Array


class Composition:
    """Composition values per kg as fed, in base units (units.Unit); unknown is NaN.

    columns: nutrient identifier to column. A row is worked out when first asked for.
    """

    def __init__(self, library: Library) -> None:
        self.columns = {nutrient.id: at for at, nutrient in enumerate(library.nutrients)}
        self._rows: dict[int, Array] = {}

    def matrix(self, library: Library, ingredients: Sequence[Ingredient]) -> Array:
        """Shape (ingredients, nutrients)."""
        if not ingredients:
            return np.empty((0, len(self.columns)))
        rows = self._rows
        return np.array([
            rows[i.id] if i.id in rows else rows.setdefault(i.id, self._row(library, i)) for i in ingredients
        ])

    def refresh(self, library: Library, changes: Iterable[Change]) -> None:
        """Forget what edits have made stale. Call it after the library took them."""
        for change in changes:
            if change.kind == "nutrient":
                self.columns = {nutrient.id: at for at, nutrient in enumerate(library.nutrients)}
                self._rows.clear()
            for record in (change.before, change.after):
                if record is None:
                    continue
                if change.kind == "ingredient":
                    self._rows.pop(record.id, None)
                elif change.kind == "value":
                    self._rows.pop(record.ingredient_id, None)

    def copy(self) -> Composition:
        """One that a worker may use while this one is refreshed; rows are shared and never written to."""
        twin = Composition.__new__(Composition)
        twin.columns = dict(self.columns)
        twin._rows = dict(self._rows)
        return twin

    def _row(self, library: Library, ingredient: Ingredient) -> Array:
        row = np.full(len(self.columns), np.nan)
        dry = ingredient.dry_matter_fraction
        for nutrient_id, value in library.values_of(ingredient.id).items():
            canonical = value.canonical
            if value.basis is Basis.DRY_MATTER:
                canonical = np.nan if dry is None else canonical * dry
            row[self.columns[nutrient_id]] = canonical
        return row
