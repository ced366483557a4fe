"""The extreme quotient of two linear sums over the mixes of a program, also where mixes have no end.

Charnes and Cooper, Programming with linear fractional functionals (Naval Research Logistics Quarterly 9, 1962): with
u = t x and divisor . u = 1 the quotient is linear in u; t = 0 is a direction in which mixes grow for ever.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.linear import optimum
from blendapp.optimise.program import Array


class Quotient(NamedTuple):
    """value: the extreme. x: a mix that has it, None where it is only approached by mixes that grow for ever."""

    value: float
    x: Array | None


def extreme_quotient(arrays: Arrays, numerator: Array, divisor: Array, sign: float) -> Quotient | None:
    """The least (sign 1) or greatest (sign -1) numerator . x / divisor . x over the mixes of arrays with divisor . x
    above nought; None where there is no such mix, or no end."""
    n = arrays.a.shape[1]
    k = arrays.inequalities
    ends: list[Array] = []
    for column in range(n):
        for bound, turn in ((arrays.lower[column], 1.0), (arrays.upper[column], -1.0)):
            if np.isfinite(bound) and bound != 0.0:
                end = np.zeros(n + 1)
                end[column], end[n] = turn, -turn * bound
                ends.append(end)
    homogeneous = np.hstack((arrays.a, -arrays.b[:, None]))
    unit = np.append(divisor, 0.0)
    a = np.vstack((homogeneous[:k], *ends, homogeneous[k:], unit))
    rows = a.shape[0]
    b = np.zeros(rows)
    b[-1] = 1.0
    lower = np.append(np.where(arrays.lower >= 0.0, 0.0, -np.inf), 0.0)
    upper = np.append(np.where(arrays.upper <= 0.0, 0.0, np.inf), np.inf)
    wide = Arrays(
        program=arrays.program,
        a=a,
        b=b,
        row=np.full(rows, -1),
        side=np.ones(rows, dtype=np.int64),
        factor=np.ones(rows),
        bound=np.zeros(rows),
        inequalities=k + len(ends),
        cost=np.zeros(n + 1),
        lower=lower,
        upper=upper,
    )
    status, vertex = optimum(wide, cost=sign * np.append(numerator, 0.0))
    if status != "optimal" or vertex is None:
        return None
    t = float(vertex.x[n])
    value = float(numerator @ vertex.x[:n])
    return Quotient(value, vertex.x[:n] / t if t > 1e-9 * float(np.abs(vertex.x).max()) else None)
