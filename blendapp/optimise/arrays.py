"""A labelled program as the arrays that a solver takes: one side a row, scaled, every inequality as >=."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.program import Array, Program

Indices = NDArray[np.int64]

_CANCELLED = 1e-14  # a coefficient this small beside its two parts is the rounding of a difference
_SAME = 1e-12  # two bounds this close (relative) are one value that came by two units


@dataclass(frozen=True, eq=False)
class Arrays:
    """Minimise cost . x with a[:inequalities] x >= b[:inequalities], a[inequalities:] x = b[inequalities:],
    lower <= x <= upper.

    a: shape (m, n), the largest coefficient of each row in [0.5, 1) by a power of two, so that scaling rounds
    nothing. b: shape (m,). row: shape (m,), index into program.rows. side: shape (m,), 1 for a minimum, -1 for a
    maximum (whose row is turned round), 0 for an equality. factor: shape (m,), so that a = factor (numerator -
    bound divisor), negative for a maximum. bound: shape (m,), the bound as the program states it.
    lower, upper: shape (n,), the tightest of the columns' own bounds and of those that limits set.
    """

    program: Program
    a: Array
    b: Array
    row: Indices
    side: Indices
    factor: Array
    bound: Array
    inequalities: int
    cost: Array
    lower: Array
    upper: Array

    @property
    def crossed(self) -> Indices:
        """Columns whose tightest lower bound exceeds their tightest upper bound."""
        return (self.lower > self.upper).nonzero()[0]


def column_bounds(program: Program) -> tuple[Array, Array]:
    """The tightest lower and upper bound of each column, shape (n,) each."""
    lower = program.lower.astype(np.float64)
    upper = program.upper.astype(np.float64)
    if not program.bounds:
        return lower, upper
    for bound in program.bounds:
        j = bound.column
        if bound.minimum is not None and bound.minimum > lower[j]:
            lower[j] = bound.minimum
        if bound.maximum is not None and bound.maximum < upper[j]:
            upper[j] = bound.maximum
    crossed = lower > upper
    if crossed.any():
        same = crossed & (lower - upper <= _SAME * np.maximum(np.abs(lower), np.abs(upper)))
        lower[same] = upper[same]
    return lower, upper


def expand(program: Program) -> Arrays:
    """The solver arrays of a program. Inequalities come first, in the order of the rows, then the equalities."""
    rows = program.rows
    sides: list[tuple[int, int, float]] = []
    equal: list[tuple[int, int, float]] = []
    for i, row in enumerate(rows):
        low, high = row.minimum, row.maximum
        if low is not None and low == high:
            equal.append((i, 0, low))
            continue
        if low is not None and low != -np.inf:
            sides.append((i, 1, low))
        if high is not None and high != np.inf:
            sides.append((i, -1, high))
    inequalities = len(sides)
    sides += equal
    lower, upper = column_bounds(program)
    index = np.array([s[0] for s in sides], dtype=np.int64)
    side = np.array([s[1] for s in sides], dtype=np.int64)
    bound = np.array([s[2] for s in sides], dtype=np.float64)
    b = bound.copy()
    a = np.array([rows[s[0]].numerator for s in sides], dtype=np.float64).reshape(len(sides), program.size)
    for k, (i, _, value) in enumerate(sides):
        divisor = rows[i].divisor
        if divisor is not None:
            a[k] = _difference(a[k], value * divisor)
            b[k] = 0.0
    size = np.maximum(a.max(axis=1, initial=0.0), -a.min(axis=1, initial=0.0))
    factor = np.ldexp(1.0, -np.frexp(size)[1])
    factor[side < 0] *= -1.0
    a *= factor[:, None]
    b *= factor
    return Arrays(program, a, b, index, side, factor, bound, inequalities, program.cost, lower, upper)


def _difference(first: Array, second: Array) -> Array:
    """first - second, with 0 where the two cancel but for rounding."""
    left = first - second
    left[np.abs(left) <= _CANCELLED * np.maximum(np.abs(first), np.abs(second))] = 0.0
    return left
