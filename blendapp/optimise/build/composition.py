"""What is worked out once of a library and kept between solves: composition as arrays, limits as they are displayed."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from blendapp.domain import limit_units
from blendapp.domain.formulas import Formula, Limit, LimitKind, write_basis
from blendapp.domain.ingredients import Basis, Ingredient
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.optimise.program import Array

if TYPE_CHECKING:
    from blendapp.optimise.build.formula import FormulaProgram


@dataclass(frozen=True)
class Shown:
    """A limit with what is displayed of it. factor: displayed bound times factor is the bound in a program."""

    limit: Limit
    name: str
    per: str | None
    basis: str | None
    unit: str
    factor: float


class Composition:
    """Composition values per kg as fed, in base units (units.Unit); unknown is NaN.

    columns: nutrient identifier to column. A row is worked out when first asked for, and so is what a limit displays.
    built: the last program of each formula by identifier, of which new prices change only the cost.
    """

    def __init__(self, library: Library) -> None:
        self.columns = {nutrient.id: at for at, nutrient in enumerate(library.nutrients)}
        self._rows: dict[int, Array] = {}
        self._shown: dict[int, Shown] = {}
        self.built: dict[int, FormulaProgram] = {}

    def shown(self, library: Library, formula: Formula, limit: Limit) -> Shown:
        """What is displayed of a limit. Raises ValueError for a unit that does not fit."""
        kept = self._shown.get(limit.id)
        if kept is None or kept.limit is not limit:
            basis = write_basis(limit.basis, limit.at_dry_matter_percent) if limit.kind is LimitKind.NUTRIENT else None
            kept = self._shown[limit.id] = Shown(
                limit,
                library.subject_name(limit.subject),
                None if limit.per is None else library.subject_name(limit.per),
                basis,
                limit_units.shown_unit(library, limit, formula.amounts),
                limit_units.factor(library, limit, formula.amounts),
            )
        return kept

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
            if change.kind in ("nutrient", "ingredient", "formula", "value"):
                self.built.clear()
            if change.kind in ("nutrient", "ingredient", "formula"):
                self._shown.clear()
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
        twin._shown = dict(self._shown)
        twin.built = dict(self.built)
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
