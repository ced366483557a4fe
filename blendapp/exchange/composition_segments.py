"""The rows of one table of analyses, and what is decided once for each of its columns."""

from __future__ import annotations

from dataclasses import dataclass, field

from blendapp.domain import checks, units
from blendapp.domain.ingredients import Basis, Ingredient
from blendapp.domain.library import Library
from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.nutrients import Nutrient
from blendapp.exchange.composition_columns import AnalysisTable, ValueColumn
from blendapp.exchange.composition_notes import TableNotes
from blendapp.exchange.list_numbers import DateOrder, DecimalSign


@dataclass(frozen=True)
class Plain:
    """A column that says all of its amounts: unit, factor to it, basis, and between which amounts nothing is odd."""

    nutrient: Nutrient
    unit: str
    factor: float
    basis: Basis
    least: float
    greatest: float


@dataclass(frozen=True)
class Segment:
    """From the rows above its headings to the headings of the next table: rows first to last - 1, from 0."""

    table: AnalysisTable
    first: int
    last: int
    signs: dict[int, DecimalSign | None]
    day_order: DateOrder | None
    notes: TableNotes
    _plain: dict[int, Plain | None] = field(default_factory=dict)
    _old: dict[tuple[int, int, str, Basis], float | None] = field(default_factory=dict)

    def plain(self, column: ValueColumn) -> Plain | None:
        """The column read once for all rows; None where rows must be looked at one by one."""
        if column.index not in self._plain:
            self._plain[column.index] = self._plain_of(column)
        return self._plain[column.index]

    def _plain_of(self, column: ValueColumn) -> Plain | None:
        nutrient, words = column.match.nutrient, column.words
        basis = words.basis or self.notes.basis
        by_row = self.table.first(ColumnRole.BASIS) is not None or words.stated
        if nutrient is None or basis is None or by_row or not words.unit or len(self.table.twins_of(column)) > 1:
            return None
        if units.concentration(words.unit).family is not units.concentration(nutrient.unit).family:
            return None
        return Plain(nutrient, words.unit, words.factor, basis, *checks.quiet_range(nutrient, words.unit))

    def old(
        self, library: Library, ingredient: Ingredient, nutrient: Nutrient, unit: str, basis: Basis
    ) -> float | None:
        """The value in use, in a unit and on a basis; None where it is unknown."""
        key = (ingredient.id, nutrient.id, unit, basis)
        if key not in self._old:
            self._old[key] = _in_use(library, ingredient, nutrient, unit, basis)
        return self._old[key]


def _in_use(
    library: Library, ingredient: Ingredient, nutrient: Nutrient, unit: str, basis: Basis
) -> float | None:
    value = library.value(ingredient.id, nutrient.id)
    if value is None:
        return None
    amount = units.convert(value.amount, value.unit, unit)
    if value.basis is basis:
        return amount
    fraction = ingredient.dry_matter_fraction
    if not fraction:
        return None
    return amount * fraction if basis is Basis.AS_FED else amount / fraction
