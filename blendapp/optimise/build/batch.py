"""A mix becomes kilograms on scales, and kilograms are held against the limits again."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.results import LimitResult, NutrientResult, Side
from blendapp.optimise.build.answer import limit_result, nutrients_of
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.program import Array

# A limit counts as broken, or as binding, beyond this share of its bound: above the dust of adding kilograms.
_CLOSE = 1e-9


def weigh(shares_kg: Sequence[float], steps_kg: Sequence[float], batch_kg: float) -> list[float]:
    """Targets in kg: each share at its scale's nearest step, the rest put where it disturbs least.

    The rest goes to the line with the finest step among those over a fifth of the batch, or to the largest line where
    there is none, in whole steps of its scale; what is smaller than half a step stays as residue.
    """
    targets = [_steps(share, step) * step for share, step in zip(shares_kg, steps_kg, strict=True)]
    large = [j for j, share in enumerate(shares_kg) if share > batch_kg / 5]
    if large:
        taker = min(large, key=lambda j: (steps_kg[j], -shares_kg[j], j))
    elif targets:
        taker = max(range(len(targets)), key=lambda j: (shares_kg[j], -j))
    else:
        return []
    rest = batch_kg - math.fsum(targets)
    targets[taker] = max(0.0, targets[taker] + _steps(rest, steps_kg[taker]) * steps_kg[taker])
    return [round(target, 9) for target in targets]


def _steps(mass_kg: float, step_kg: float) -> int:
    """The nearest whole number of steps; a half goes up. The nudge undoes what dividing decimals in binary loses."""
    return math.floor(mass_kg / step_kg + 0.5 + 1e-9)


def limits_of(library: Library, built: FormulaProgram, x: Array) -> tuple[LimitResult, ...]:
    """Every limit of a formula at given amounts, recomputed from the composition; no prices.

    x: shape (n,), fractions of a blend or kg per day, one per column of built.
    """
    values: list[float | None] = [None] * len(built.limits)
    program = built.program
    for row in program.rows:
        if row.limit is not None:
            values[row.limit] = _quotient(row.numerator, row.divisor, x)
    for bound in program.bounds:
        values[bound.limit] = float(x[bound.column])
    for count in program.counts:
        values[count.limit] = float(sum(x[j] > 0 for j in count.columns))
    for index, limit in enumerate(built.limits):
        if limit.kind is LimitKind.PRACTICAL:
            values[index] = float(sum(x[j] for j, i in enumerate(built.ingredients) if i.id == limit.subject.ids[0]))
    return tuple(
        _placed(limit_result(library, built.formula, index, limit), value, factor)
        for index, (limit, value, factor) in enumerate(zip(built.limits, values, built.factors, strict=True))
    )


def _quotient(numerator: Array, divisor: Array | None, x: Array) -> float | None:
    top = float(numerator @ x)
    if divisor is None:
        return top
    bottom = float(divisor @ x)
    return None if bottom == 0 else top / bottom


def _placed(blank: LimitResult, value: float | None, factor: float) -> LimitResult:
    if value is None:
        return blank
    shown = value / factor
    binding = None
    for side, bound in ((Side.MINIMUM, blank.minimum), (Side.MAXIMUM, blank.maximum)):
        if bound is not None and abs(shown - bound) <= _CLOSE * max(1.0, abs(bound)):
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
    library: Library, built: FormulaProgram, kilograms: dict[int, float], amount_total: float
) -> tuple[tuple[LimitResult, ...], tuple[NutrientResult, ...]]:
    """Limits and nutrients of a batch as weighed.

    kilograms: by ingredient identifier. amount_total: what they stand for in the program's amounts: 1 for a blend,
    the kg per day of a ration.
    """
    total = math.fsum(kilograms.values())
    x = np.array([kilograms.get(i.id, 0.0) for i in built.ingredients])
    x = x * ((1.0 if built.formula.amounts is Amounts.BLEND else amount_total) / total) if total else x
    return limits_of(library, built, x), nutrients_of(library, built, x)
