"""Why an optimum is unbounded: the fewest columns that can grow for ever while the cost falls."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from blendapp.optimise.arrays import Arrays, expand
from blendapp.optimise.linear import optimum
from blendapp.optimise.program import Array, Program


@dataclass(frozen=True, eq=False)
class Ray:
    """A direction in which every limit goes on holding and the cost falls without end.

    direction: shape (n,), so scaled that its amounts sum to one in absolute value. cost_slope: cost . direction,
    below zero. growing: columns that grow along it, the largest share first. at_fault: those of them whose own cost
    is below zero: each is a price below zero with nothing that limits how much may be used. Where it is empty (a
    column without a lower end falls, say) the missing limit is on the growing columns together.
    """

    direction: Array
    cost_slope: float
    growing: tuple[int, ...]
    at_fault: tuple[int, ...]


def ray(program: Program) -> Ray | None:
    """A ray of the recession cone along which cost falls, of least total change; None where there is none.

    The cone is a . d >= 0 (= 0 for equalities), d >= 0 where a lower end is finite, d <= 0 where an upper end is;
    d is written as the difference of two parts, its cost held at one unit below zero, and the sum of both parts made
    least, which keeps the columns few. Integrality and counts are set aside: they do not bound amounts.
    """
    arrays = expand(program)
    n = program.size
    peak = float(np.abs(program.cost).max(initial=0.0))
    if peak == 0.0:
        return None
    k = arrays.inequalities
    fall = program.cost / peak
    a = np.vstack((arrays.a, fall[None, :]))
    count = a.shape[0]
    parts = Arrays(
        program=program,
        a=np.hstack((a, -a)),
        b=np.concatenate((np.zeros(count - 1), [-1.0])),
        row=np.arange(count),
        side=np.ones(count, dtype=np.int64),
        factor=np.ones(count),
        bound=np.zeros(count),
        inequalities=k,
        cost=np.ones(2 * n),
        lower=np.zeros(2 * n),
        upper=np.concatenate(
            (np.where(np.isinf(arrays.upper), np.inf, 0.0), np.where(np.isinf(arrays.lower), np.inf, 0.0))
        ),
    )
    _, vertex = optimum(parts)
    if vertex is None:
        return None
    direction = vertex.x[:n] - vertex.x[n:]
    direction = direction / np.abs(direction).sum()
    direction[np.abs(direction) < 1e-12] = 0.0
    growing = [int(j) for j in np.argsort(-direction, kind="stable") if direction[j] > 0]
    return Ray(
        direction=direction,
        cost_slope=float(program.cost @ direction),
        growing=tuple(growing),
        at_fault=tuple(j for j in growing if program.cost[j] < 0),
    )
