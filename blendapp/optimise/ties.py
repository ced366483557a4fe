"""Equally cheap mixes: which of them is the answer, and how they differ.

Every optimal mix is complementary to every optimal dual, so one dual tells the whole set of optimal mixes: columns
with a reduced cost stay at their bounds, rows with a price stay at theirs, the rest is free. The same holds for each
further wish (least change, most of the first column, ...), which shrinks the set until one mix is left.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.linear import FailedSolve, Vertex, optimum
from blendapp.optimise.program import Array
from blendapp.optimise.solution import Solution
from blendapp.optimise.solve import TIED, alone, snapshot
from blendapp.optimise.whole import count_states

_MOVES = 1e-9


@dataclass(frozen=True, eq=False)
class Exchange:
    """A way from the answer to an equally cheap mix. column: what there is more of. change: shape (n,), from the
    answer to the mix with the most of that column."""

    column: int
    change: Array


class _Set:
    """Mixes that remain: a linear program's feasible set, shrunk by the wishes already granted."""

    def __init__(self, arrays: Arrays) -> None:
        self.arrays = arrays
        self.held = np.arange(arrays.b.size) >= arrays.inequalities

    def shrink(self, x: Array, y: Array, cost: Array) -> None:
        """Keep only the mixes that are optimal for cost, given one optimum x with its prices y."""
        peak = float(np.abs(cost).max(initial=0.0)) or 1.0
        reduced = cost - y @ self.arrays.a
        lower, upper = self.arrays.lower.copy(), self.arrays.upper.copy()
        tolerance = 1e-9 * max(1.0, float(np.abs(x).max(initial=0.0)))
        stay = (np.abs(reduced) > TIED * peak) & ((x - lower <= tolerance) | (upper - x <= tolerance))
        lower[stay] = upper[stay] = x[stay]
        held = self.held | (np.abs(y) > TIED * peak)
        order = np.concatenate(((~held).nonzero()[0], held.nonzero()[0]))
        a = self.arrays
        self.arrays = dataclasses.replace(
            a,
            a=a.a[order],
            b=a.b[order],
            row=a.row[order],
            side=a.side[order],
            factor=a.factor[order],
            bound=a.bound[order],
            inequalities=int((~held).sum()),
            lower=lower,
            upper=upper,
        )
        self.held = held[order]

    def single(self) -> bool:
        """Whether the rows that are held leave the free columns no freedom."""
        free = self.arrays.lower < self.arrays.upper
        if not free.any():
            return True
        rows = self.arrays.a[self.held][:, free]
        return bool(rows.shape[0] >= rows.shape[1] and np.linalg.matrix_rank(rows, tol=_MOVES) == rows.shape[1])

    def grant(self, cost: Array) -> Array:
        """Find the optimum of a wish, and shrink to it. A wish that never ends is turned round: what could grow for
        ever at no cost is kept least."""
        status, vertex = optimum(self.arrays, cost=cost)
        if status == "unbounded":
            cost = -cost
            status, vertex = optimum(self.arrays, cost=cost)
        if vertex is None:
            raise FailedSolve(f"among equally cheap mixes the next choice is {status}")
        self.shrink(vertex.x, vertex.y, cost)
        return vertex.x


def tied(solution: Solution) -> bool:
    """Whether other amounts cost the same as an optimal solution."""
    arrays, face, y = solution.arrays, solution.face, solution.duals
    if arrays is not None and face is not None and y is not None and alone(arrays, face, y, arrays.cost - y @ arrays.a):
        return False
    return _optimal_set(solution) is not None


def settle(solution: Solution, reference: Sequence[float] | Array | None = None) -> Solution:
    """The same cost with the amounts that the tie rule chooses: the least sum of absolute changes from reference
    (shape (n,)) where given, then the largest amounts in the order of the columns (the least of a column that could
    grow for ever).

    A solution that is the only optimum, or no answer, comes back as it is. Of a mixed-integer one the choice of
    columns stays. Raises FailedSolve where the solver gives no clear status.
    """
    remaining = _optimal_set(solution)
    if remaining is None or solution.arrays is None or solution.x is None or solution.duals is None:
        return solution
    x = solution.x
    n = x.size
    if reference is not None:
        remaining, x = _nearest(remaining, np.asarray(reference, dtype=np.float64))
    for j in range(n):
        if remaining.single():
            break
        if remaining.arrays.lower[j] == remaining.arrays.upper[j]:
            continue
        cost = np.zeros(remaining.arrays.lower.size)
        cost[j] = -1.0
        x = remaining.grant(cost)
    settled = snapshot(solution.arrays, Vertex(x[:n], solution.duals))
    limits = {**solution.limits, **settled.limits}
    if solution.program is not None:
        count_states(solution.program, x[:n], limits)
    return dataclasses.replace(
        settled,
        status=solution.status,
        gap=solution.gap if solution.given else settled.gap,
        program=solution.program,
        given=solution.given,
        seconds=solution.seconds,
        limits=limits,
    )


def exchanges(solution: Solution) -> tuple[Exchange, ...]:
    """The ways in which an equally cheap mix can differ: for each column that one can hold more of, the mix with
    the most of it; ways that are the same but for their length come once. Empty where the optimum is unique."""
    remaining = _optimal_set(solution)
    if remaining is None or solution.x is None:
        return ()
    x = solution.x
    found: list[Exchange] = []
    for j in range(x.size):
        if remaining.arrays.lower[j] == remaining.arrays.upper[j]:
            continue
        cost = np.zeros(x.size)
        cost[j] = -1.0
        status, vertex = optimum(remaining.arrays, cost=cost)
        if vertex is None:
            if status == "unbounded":
                continue
            raise FailedSolve(f"among equally cheap mixes the most of a column is {status}")
        change = vertex.x - x
        change[np.abs(change) <= _MOVES * max(1.0, float(np.abs(x).max()))] = 0.0
        if change[j] > 0 and not any(_same_way(change, other.change) for other in found):
            found.append(Exchange(j, change))
    return tuple(found)


def _same_way(one: Array, other: Array) -> bool:
    a, b = one / np.abs(one).max(), other / np.abs(other).max()
    return bool(np.abs(a - b).max() <= 1e-7)


def _optimal_set(solution: Solution) -> _Set | None:
    """All optimal mixes; None where there is no other."""
    if solution.x is None or solution.arrays is None or solution.duals is None:
        return None
    remaining = _Set(solution.arrays)
    remaining.shrink(solution.x, solution.duals, solution.arrays.cost)
    return None if remaining.single() else remaining


def _nearest(remaining: _Set, reference: Array) -> tuple[_Set, Array]:
    """Shrink to the mixes with the least sum of absolute changes: x - above + below = reference."""
    arrays = remaining.arrays
    m, n = arrays.a.shape
    free = (arrays.lower < arrays.upper).nonzero()[0]
    k = free.size
    link: NDArray[np.float64] = np.zeros((k, n))
    link[np.arange(k), free] = 1.0
    wide = dataclasses.replace(
        arrays,
        a=np.vstack((np.hstack((arrays.a, np.zeros((m, 2 * k)))), np.hstack((link, -np.eye(k), np.eye(k))))),
        b=np.concatenate((arrays.b, reference[free])),
        row=np.concatenate((arrays.row, np.full(k, -1))),
        side=np.concatenate((arrays.side, np.zeros(k, dtype=np.int64))),
        factor=np.concatenate((arrays.factor, np.ones(k))),
        bound=np.concatenate((arrays.bound, reference[free])),
        cost=np.concatenate((arrays.cost, np.zeros(2 * k))),
        lower=np.concatenate((arrays.lower, np.zeros(2 * k))),
        upper=np.concatenate((arrays.upper, np.full(2 * k, np.inf))),
    )
    wider = _Set(wide)
    x = wider.grant(np.concatenate((np.zeros(n), np.ones(2 * k))))
    return wider, x
