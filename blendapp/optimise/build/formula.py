"""A formula and a library become a labelled program; the only way from feed to rows and columns."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from blendapp.domain import units
from blendapp.domain.formulas import Amounts, Formula, Limit, LimitBasis, LimitKind, Subject, SubjectKind
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.nutrients import DRY_MATTER, MOISTURE
from blendapp.domain.results import UnknownValue
from blendapp.optimise.build.composition import Composition, Shown
from blendapp.optimise.build.contents import Contents
from blendapp.optimise.program import Array, Bound, Count, Program, Row


@dataclass(frozen=True)
class FormulaProgram:
    """A program with what is needed to turn its solution back into a domain result.

    ingredients: one per column; price_per_t: shape (n,), NaN for an ingredient without a price (only in a program
    built with the unpriced ones). shown: what is displayed of each limit. factors: for each limit, displayed bound
    times factor is the bound in the program. composition: shape (n, nutrients), as fed in base units, NaN unknown;
    dry: shape (n,), NaN unknown. counted: see contents.Contents.matrix; None but in the program of a batch.
    """

    program: Program
    formula: Formula
    ingredients: tuple[Ingredient, ...]
    price_per_t: Array
    limits: tuple[Limit, ...]
    shown: tuple[Shown, ...]
    factors: tuple[float, ...]
    composition: Array
    dry: Array
    columns: dict[int, int]
    unpriced: tuple[Ingredient, ...]
    counted: Array | None = None

    def as_counted(self, x: Array) -> Array:
        """The amounts as limits on ingredients count them. x: shape (n,), as weighed."""
        return x if self.counted is None else self.counted @ x


def build(
    library: Library,
    formula: Formula,
    on: datetime.date,
    composition: Composition | None = None,
    site_id: int | None = None,
    with_unpriced: bool = False,
    contents: Contents | None = None,
) -> FormulaProgram:
    """The program of a formula at the prices of a day: cost in money per tonne of a blend, or per day of a ration.

    Columns are the admitted ingredients in the order of identifiers, those without a price left out unless
    with_unpriced, where they cost nothing. contents: what a batch of it holds; each of its ingredients has a column
    too, admitted or not, priced or not.
    """
    composition = composition or Composition(library)
    admitted = library.admitted(formula)
    also = set() if contents is None else contents.ids
    lacking = also - {i.id for i in admitted}
    if lacking:
        admitted = sorted([*admitted, *map(library.ingredient, lacking)], key=lambda ingredient: ingredient.id)
    prices = [library.price_per_t(i.id, on, site_id) for i in admitted]
    unpriced = tuple(i for i, price in zip(admitted, prices, strict=True) if price is None)
    taken = [(i, p) for i, p in zip(admitted, prices, strict=True) if with_unpriced or p is not None or i.id in also]
    ingredients = tuple(i for i, _price in taken)
    price_per_t = np.array([np.nan if p is None else p for _i, p in taken], dtype=float)
    blend = formula.amounts is Amounts.BLEND
    cost = np.nan_to_num(price_per_t) * (1.0 if blend else 1e-3)
    limits = tuple(library.limits(formula.id))
    kept = None if contents is not None else composition.built.get(formula.id)
    if kept is not None and kept.formula == formula and kept.ingredients == ingredients and kept.limits == limits:
        return replace(kept, program=replace(kept.program, cost=cost), price_per_t=price_per_t, unpriced=unpriced)
    dry = np.array([np.nan if (d := i.dry_matter_fraction) is None else d for i in ingredients], dtype=float)
    matrix = composition.matrix(library, ingredients)
    shown = tuple(composition.shown(library, formula, limit) for limit in limits)
    factors = tuple(one.factor for one in shown)
    counted = None if contents is None else contents.matrix(ingredients)
    maker = _Maker(library, formula, ingredients, np.nan_to_num(matrix), dry, composition.columns, counted)
    maker.take(limits, factors)
    n = len(ingredients)
    balance = [Row(np.ones(n), 1.0, 1.0)] if blend else []
    program = Program(
        cost=cost,
        lower=np.zeros(n),
        upper=np.ones(n) if blend else np.full(n, np.inf),
        rows=(*balance, *maker.rows),
        bounds=tuple(maker.bounds),
        least_if_used=maker.least if maker.least.any() else None,
        least_limit=maker.least_limit if maker.least.any() else None,
        counts=tuple(maker.counts),
        names=tuple(i.name for i in ingredients),
    )
    built = FormulaProgram(
        program, formula, ingredients, price_per_t, limits, shown, factors, matrix, dry, composition.columns, unpriced,
        counted,
    )
    if contents is None:
        composition.built[formula.id] = built
    return built


class _Maker:
    """Turns limits into rows, bounds, least amounts and counts of one program."""

    def __init__(
        self, library: Library, formula: Formula, ingredients: Sequence[Ingredient], matrix: Array, dry: Array,
        columns: dict[int, int], counted: Array | None = None,
    ) -> None:
        self.library, self.blend = library, formula.amounts is Amounts.BLEND
        self.matrix, self.columns, self.counted = matrix, columns, counted
        self.dry, self.moisture = np.nan_to_num(dry), np.nan_to_num(1 - dry)
        self.at = {ingredient.id: position for position, ingredient in enumerate(ingredients)}
        self.ones = np.ones(len(ingredients))
        self.rows: list[Row] = []
        self.bounds: list[Bound] = []
        self.counts: list[Count] = []
        self.least = np.zeros(len(ingredients))
        self.least_limit = np.full(len(ingredients), -1, dtype=np.int64)

    def take(self, limits: Sequence[Limit], factors: Sequence[float]) -> None:
        makers: dict[LimitKind, Callable[[int, Limit, float], None]] = {
            LimitKind.NUTRIENT: self._nutrient,
            LimitKind.INGREDIENT: self._inclusion,
            LimitKind.GROUP: self._inclusion,
            LimitKind.RATIO: self._ratio,
            LimitKind.PRACTICAL: self._practical,
            LimitKind.COUNT: self._count,
        }
        for index, (limit, factor) in enumerate(zip(limits, factors, strict=True)):
            makers[limit.kind](index, limit, factor)

    def _nutrient(self, index: int, limit: Limit, factor: float) -> None:
        numerator, divisor = self._vector(limit.subject), None
        if limit.basis is LimitBasis.AS_FED:
            divisor = None if self.blend else self.ones
        elif limit.basis is LimitBasis.DRY_MATTER:
            divisor = self.dry
        elif limit.basis is LimitBasis.AT_DRY_MATTER:
            numerator = numerator * ((limit.at_dry_matter_percent or 100.0) / 100)
            divisor = self.dry
        self._row(index, limit, factor, numerator, divisor)

    def _inclusion(self, index: int, limit: Limit, factor: float) -> None:
        if limit.unit == units.SHARE_OF_DRY_MATTER:
            self._row(index, limit, factor, self._vector(limit.subject) * self.dry, self.dry)
        elif limit.kind is LimitKind.INGREDIENT and self._is_column(limit.subject.ids[0]):
            column = self.at[limit.subject.ids[0]]
            self.bounds.append(Bound(column, _times(limit.minimum, factor), _times(limit.maximum, factor), index))
        else:
            self._row(index, limit, factor, self._vector(limit.subject), None)

    def _is_column(self, ingredient_id: int) -> bool:
        """Whether the amount of an ingredient, as limits count it, is that of one column."""
        if ingredient_id not in self.at:
            return False
        column = self.at[ingredient_id]
        return self.counted is None or bool((self.counted[column] == np.eye(1, len(self.ones), column)[0]).all())

    def _ratio(self, index: int, limit: Limit, factor: float) -> None:
        assert limit.per is not None
        self._row(index, limit, factor, self._vector(limit.subject), self._vector(limit.per))

    def _practical(self, index: int, limit: Limit, factor: float) -> None:
        column = self.at.get(limit.subject.ids[0])
        least = _times(limit.minimum, factor) or 0.0
        if column is not None and least > self.least[column]:
            self.least[column], self.least_limit[column] = least, index

    def _count(self, index: int, limit: Limit, factor: float) -> None:
        columns = tuple(self.at[i.id] for i in self.library.members(limit.subject) if i.id in self.at)
        self.counts.append(Count(columns, int(limit.maximum or 0), index))

    def _row(self, index: int, limit: Limit, factor: float, numerator: Array, divisor: Array | None) -> None:
        self.rows.append(Row(numerator, _times(limit.minimum, factor), _times(limit.maximum, factor), divisor, index))

    def _vector(self, subject: Subject) -> Array:
        """Per kg of each ingredient as fed: a nutrient in its base unit, or the part that counts as of a group."""
        if subject.kind is SubjectKind.NUTRIENT:
            return self.matrix[:, self.columns[subject.ids[0]]]
        if subject.kind is SubjectKind.DRY_MATTER:
            return self.dry
        if subject.kind is SubjectKind.MOISTURE:
            return self.moisture
        vector = np.zeros_like(self.ones)
        for member in self.library.members(subject):
            if member.id in self.at:
                vector[self.at[member.id]] = 1.0
        return vector if self.counted is None else vector @ self.counted


def _times(bound: float | None, factor: float) -> float | None:
    return None if bound is None else bound * factor


def unknown_values(library: Library, built: FormulaProgram) -> list[UnknownValue]:
    """Every priced, admitted ingredient and limited nutrient without a value; unsafe where 0 may do harm.

    Harmless is only a minimum, without a maximum, of a nutrient that is never negative; a ratio never is.
    """
    unsafe: dict[tuple[str, str], bool] = {}
    no_dry = np.isnan(built.dry)
    if not (no_dry.any() or np.isnan(built.composition).any()):
        return []
    for limit in built.limits:
        if limit.minimum is None and limit.maximum is None:
            continue
        by_dry = limit.unit == units.SHARE_OF_DRY_MATTER or limit.basis in (
            LimitBasis.DRY_MATTER, LimitBasis.AT_DRY_MATTER,
        )
        if by_dry and no_dry.any():
            for position in np.flatnonzero(no_dry):
                unsafe[built.ingredients[position].name, DRY_MATTER] = True
        for subject in (limit.subject, limit.per):
            if subject is not None and subject.is_nutrient:
                lacking = _lacking(built, subject, no_dry)
                if not lacking.any():
                    continue
                name, harmless = _harmless(library, limit, subject)
                for position in np.flatnonzero(lacking):
                    key = (built.ingredients[position].name, name)
                    unsafe[key] = unsafe.get(key, False) or not harmless
    return [UnknownValue(ingredient, nutrient, flag) for (ingredient, nutrient), flag in sorted(unsafe.items())]


def _lacking(built: FormulaProgram, subject: Subject, no_dry: np.ndarray) -> np.ndarray:
    if subject.kind is SubjectKind.NUTRIENT:
        return np.isnan(built.composition[:, built.columns[subject.ids[0]]])
    return no_dry


def _harmless(library: Library, limit: Limit, subject: Subject) -> tuple[str, bool]:
    only_minimum = limit.kind is LimitKind.NUTRIENT and limit.maximum is None
    if subject.kind is SubjectKind.NUTRIENT:
        nutrient = library.nutrient(subject.ids[0])
        return nutrient.name, only_minimum and nutrient.never_negative
    name = DRY_MATTER if subject.kind is SubjectKind.DRY_MATTER else MOISTURE
    return name, only_minimum and limit.basis in (LimitBasis.AS_FED, LimitBasis.PER_DAY)
