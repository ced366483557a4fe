"""Kilograms as weighed are held against the limits of their formula again."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping
from dataclasses import replace

import numpy as np

from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.results import LimitResult, NutrientResult, Side
from blendapp.optimise.build.answer import limit_result, nutrients_of
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.program import Array

# A value this close to its bound, as a share of it, stands at it: above the dust of adding kilograms. Of a bound of 0
# the share is of one, in the numbers of the program.
_CLOSE = 1e-9
_DUST = 1e-13


def limits_of(
    library: Library, built: FormulaProgram, x: Array, broken: Collection[int] = ()
) -> tuple[LimitResult, ...]:
    """Every limit of a formula at given amounts, recomputed from the composition; no prices.

    x: shape (n,), fractions of a blend or kg per day, one per column of built. broken: indices of limits that are
    known not to hold, exactly; none of them is shown at its bound.
    """
    values: list[float | None] = [None] * len(built.limits)
    program, counted = built.program, built.as_counted(x)
    for row in program.rows:
        if row.limit is not None:
            values[row.limit] = _quotient(row.numerator, row.divisor, x)
    for bound in program.bounds:
        values[bound.limit] = float(counted[bound.column])
    for count in program.counts:
        values[count.limit] = float(sum(counted[j] > 0 for j in count.columns))
    for index, limit in enumerate(built.limits):
        if limit.kind is LimitKind.PRACTICAL:
            subject = limit.subject.ids[0]
            values[index] = float(sum(counted[j] for j, i in enumerate(built.ingredients) if i.id == subject))
    return tuple(
        _placed(limit_result(index, shown), value, shown.factor, index in broken)
        for index, (shown, value) in enumerate(zip(built.shown, values, strict=True))
    )


def _quotient(numerator: Array, divisor: Array | None, x: Array) -> float | None:
    top = float(numerator @ x)
    if divisor is None:
        return top
    bottom = float(divisor @ x)
    return None if bottom == 0 else top / bottom


def _placed(blank: LimitResult, value: float | None, factor: float, broken: bool) -> LimitResult:
    if value is None:
        return blank
    shown = value / factor
    binding = None
    for side, bound in ((Side.MINIMUM, blank.minimum), (Side.MAXIMUM, blank.maximum)):
        if bound is not None and not broken and abs(shown - bound) <= max(_CLOSE * abs(bound), _DUST / factor):
            binding, shown = side, bound
            break
    if blank.kind is LimitKind.PRACTICAL and shown == 0:
        binding = None
    return replace(blank, value=shown, binding=binding)


def broken_by(limit: LimitResult) -> float | None:
    """By how much a limit is broken, in its unit: below 0 under a minimum, above 0 over a maximum; None if it holds."""
    if limit.value is None or limit.binding is not None:
        return None
    if limit.minimum is not None and limit.value < limit.minimum:
        absent = limit.kind is LimitKind.PRACTICAL and limit.value == 0
        return None if absent else limit.value - limit.minimum
    if limit.maximum is not None and limit.value > limit.maximum:
        return limit.value - limit.maximum
    return None


def weighed(
    library: Library, built: FormulaProgram, kilograms: Mapping[int, float], amount_total: float,
    broken: Collection[int] = (),
) -> tuple[tuple[LimitResult, ...], tuple[NutrientResult, ...]]:
    """Limits and nutrients of a batch as weighed.

    kilograms: by ingredient identifier. amount_total: what they stand for in the program's amounts: 1 for a blend,
    the kg per day of a ration. broken: as in limits_of.
    """
    total = math.fsum(kilograms.values())
    x = np.array([kilograms.get(i.id, 0.0) for i in built.ingredients])
    x = x * ((1.0 if built.formula.amounts is Amounts.BLEND else amount_total) / total) if total else x
    return limits_of(library, built, x, broken), nutrients_of(library, built, x)
