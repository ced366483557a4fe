"""A solution becomes a domain result again: figures as displayed, in the units of the limits."""

from __future__ import annotations

import datetime
import math
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from blendapp.domain import units
from blendapp.domain.formulas import Amounts, Limit, LimitKind, SubjectKind
from blendapp.domain.library import Library
from blendapp.domain.results import (
    Check,
    IngredientResult,
    LimitResult,
    NutrientResult,
    Result,
    Side,
    Status,
    UnknownValue,
)
from blendapp.optimise.build.composition import Shown
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.program import Array
from blendapp.optimise.sensitivity import LimitPrices, Sensitivity
from blendapp.optimise.solution import LimitState, Solution

# Below this share of the mix (or kg per day) an amount is numerical dust and is shown as none.
_DUST = 1e-12


def without_answer(
    library: Library, built: FormulaProgram, on: datetime.date, status: Status, cause: str | None,
    unknown: Sequence[UnknownValue] = (), cautions: Sequence[str] = (),
) -> Result:
    """A result that shows no figure which could be read as an answer."""
    formula = built.formula
    return Result(
        formula_id=formula.id,
        formula=formula.name,
        amounts=formula.amounts,
        status=status,
        currency=library.mill.currency,
        on=on,
        ingredients=tuple(
            IngredientResult(i.id, i.name, price)
            for i, price in zip(built.ingredients, built.price_per_t.tolist(), strict=True)
        ),
        limits=tuple(limit_result(index, shown) for index, shown in enumerate(built.shown)),
        nutrients=(),
        unpriced=tuple(i.name for i in built.unpriced),
        unknown=tuple(unknown),
        by_formula=_by_formula(library, built, unknown),
        cautions=tuple(cautions),
        cause=cause,
    )


def answered(
    library: Library, on: datetime.date, built: FormulaProgram, solution: Solution, check: Check,
    unknown: Sequence[UnknownValue], cautions: Sequence[str], sensitivity: Sensitivity | None = None,
) -> Result:
    """The result of a solution that has amounts: optimal, or the best found when time was up.

    sensitivity: what its prices come from; without one they are the solver's, and none where more than one fits.
    """
    assert solution.x is not None
    formula = built.formula
    x = np.where(np.abs(solution.x) < _DUST, 0.0, solution.x)
    money = x * built.program.cost
    worth: Mapping[int, LimitPrices] = {} if sensitivity is None else sensitivity.limits
    return Result(
        formula_id=formula.id,
        formula=formula.name,
        amounts=formula.amounts,
        status=Status.OPTIMAL if solution.status == "optimal" else Status.STOPPED,
        currency=library.mill.currency,
        on=on,
        ingredients=tuple(
            IngredientResult(i.id, i.name, price, amount, cost, prices, even)
            for i, price, amount, cost, prices, even in zip(
                built.ingredients, built.price_per_t.tolist(), x.tolist(), money.tolist(),
                *_price_ranges(built, sensitivity), strict=True,
            )
        ),
        limits=tuple(
            limit_result(index, one, **_figures(one.limit, one.factor, solution.limits.get(index), worth.get(index)))
            for index, one in enumerate(built.shown)
        ),
        nutrients=nutrients_of(library, built, x),
        unpriced=tuple(i.name for i in built.unpriced),
        unknown=tuple(unknown),
        by_formula=_by_formula(library, built, unknown),
        cautions=tuple(cautions),
        cost=float(money.sum()),
        gap=solution.gap,
        given_ingredients=solution.given,
        check=check,
    )


def _by_formula(library: Library, built: FormulaProgram, unknown: Sequence[UnknownValue]) -> tuple[str, ...]:
    """The ingredients of which something is not known that the formula which makes them knows."""
    lacking = {i.name for i in built.unpriced} | {one.ingredient for one in unknown}
    return tuple(
        i.name for i in (*built.ingredients, *built.unpriced)
        if i.name in lacking and i.made_by_formula_id in library.records["formula"]
    )


def limit_result(index: int, shown: Shown, **figures: Any) -> LimitResult:
    """A limit as displayed; figures: the fields of LimitResult that an answer adds."""
    limit = shown.limit
    return LimitResult(
        index, limit.id, limit.kind, shown.name, shown.per, shown.basis, shown.unit, limit.minimum, limit.maximum,
        **figures,
    )


def _price_ranges(
    built: FormulaProgram, sensitivity: Sensitivity | None
) -> tuple[list[tuple[float | None, float | None] | None], list[float | None]]:
    """For each column its price range and its break-even price, per tonne."""
    n = len(built.ingredients)
    if sensitivity is None:
        return [None] * n, [None] * n
    per_t = 1.0 if built.formula.amounts is Amounts.BLEND else 1e3
    low, high, even = (
        [value * per_t if math.isfinite(value) else None for value in ends.tolist()]
        for ends in (sensitivity.price_low, sensitivity.price_high, sensitivity.break_even)
    )
    return list(zip(low, high, strict=True)), even


def _figures(
    limit: Limit, factor: float, state: LimitState | None, prices: LimitPrices | None
) -> dict[str, Any]:
    """Value, working side and prices of a limit at an answer, as displayed."""
    if state is None:
        return {}
    value = None if state.value is None else state.value / factor
    binding = None if state.binding is None else Side(state.binding)
    # At its bound a value is the bound, digit for digit: what is displayed must not look a hair outside.
    if binding is not None and limit.kind is not LimitKind.PRACTICAL:
        value = limit.minimum if binding is Side.MINIMUM else limit.maximum
    found = {"value": value, "binding": binding, "shadow_price_unique": state.unique}
    if limit.kind is LimitKind.COUNT:
        return found
    if prices is not None:
        return {**found, "binding": prices.binding and Side(prices.binding), **_both_sided(prices, factor)}
    if state.price is None:
        return found
    price = state.price * factor
    if limit.minimum is not None and limit.minimum == limit.maximum:
        return {**found, "raise_cost": price + 0.0, "lower_cost": -price + 0.0}
    cost = abs(price) if binding is not None else 0.0
    return {**found, "tighten_cost": cost, "relax_saving": cost}


def _both_sided(prices: LimitPrices, factor: float) -> dict[str, Any]:
    """Slopes per displayed unit, and the displayed bound up to which each holds."""
    slopes = ("tighten_cost", "relax_saving", "raise_cost", "lower_cost")
    found: dict[str, Any] = {
        name: None if (slope := getattr(prices, name)) is None else slope * factor + 0.0 for name in slopes
    }
    for name in ("tighten_holds_to", "relax_holds_to"):
        end = getattr(prices, name)
        found[name] = None if end is None else end / factor
    found["shadow_price_unique"] = prices.unique
    return found


def nutrients_of(library: Library, built: FormulaProgram, x: Array) -> tuple[NutrientResult, ...]:
    """Every nutrient of the library in a mix: per kg as fed of a blend, per day of a ration."""
    limited = {
        limit.subject.ids[0]
        for limit in built.limits
        if limit.kind is LimitKind.NUTRIENT and limit.subject.kind is SubjectKind.NUTRIENT
    }
    return mixed_nutrients(library, built.formula.amounts, built.columns, built.composition, x,
                           [i.name for i in built.ingredients], limited)


def mixed_nutrients(
    library: Library, amounts: Amounts, columns: Mapping[int, int], composition: Array, x: Array,
    names: Sequence[str], limited: set[int],
) -> tuple[NutrientResult, ...]:
    """composition: shape (ingredients, nutrients), NaN unknown; x: fractions of a blend, or kg per day."""
    used = x > 0
    count = int(used.sum())
    lacking = np.isnan(composition)
    totals = (x @ np.where(lacking, 0.0, composition)).tolist() if len(x) else [0.0] * composition.shape[1]
    lacking &= used[:, None]
    counts = lacking.sum(axis=0).tolist()
    found = []
    for nutrient in library.nutrients:
        column = columns[nutrient.id]
        missing = counts[column]
        if amounts is Amounts.BLEND:
            unit, scale = nutrient.unit, units.concentration(nutrient.unit).factor
        else:
            unit = units.own_per_day(nutrient.unit)
            scale = units.per_day(unit).factor
        found.append(NutrientResult(
            nutrient.id,
            nutrient.name,
            unit,
            None if missing == count else totals[column] / scale,
            tuple(names[int(j)] for j in np.flatnonzero(lacking[:, column])) if missing else (),
            nutrient.id in limited,
        ))
    return tuple(found)
