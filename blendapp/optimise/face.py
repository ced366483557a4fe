"""The face of the program on which an answer lies: which amounts are free, which rows are active, their algebra."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.program import Array

ACTIVE = 1e-9  # a scaled row or a bound is active within this, times the largest amount where that is above one
RANK = 1e-10  # singular values below this share of the largest are nought


@dataclass(frozen=True, eq=False)
class Face:
    """F = free, the amounts strictly inside their bounds; R = active, the rows at their bounds, equalities included.

    inside: mask of F, shape (n,). tolerance: what counted as active. inverse: the (pseudo-)inverse of a[R, F], shape
    (|F|, |R|). null: orthonormal basis of the left null space of a[R, F], shape (|R|, p): duals may move along
    it, so p = 0 says that the duals are unique. spare: dimension of the right null space: 0 where x is a vertex.
    """

    free: Indices
    active: Indices
    inside: NDArray[np.bool_]
    tolerance: float
    inverse: Array
    null: Array
    spare: int

    @property
    def degree(self) -> int:
        """How many more active rows there are than rank: p of the method."""
        return int(self.null.shape[1])


def find(arrays: Arrays, x: Array) -> Face:
    """The face on which x lies. x: shape (n,), feasible within the tolerance."""
    tolerance = ACTIVE * max(1.0, float(x.max(initial=0.0)), -float(x.min(initial=0.0)))
    inside = (x > arrays.lower + tolerance) & (x < arrays.upper - tolerance)
    free = inside.nonzero()[0]
    slack = arrays.a @ x - arrays.b
    slack[arrays.inequalities :] = 0.0
    active = (slack <= tolerance).nonzero()[0]
    matrix = arrays.a[np.ix_(active, free)]
    rows, columns = matrix.shape
    if rows == columns:
        if rows == 0:
            return Face(free, active, inside, tolerance, np.zeros((0, 0)), np.zeros((0, 0)), 0)
        inverse = _invert(matrix)
        if inverse is not None:
            return Face(free, active, inside, tolerance, inverse, np.zeros((rows, 0)), 0)
    if rows == 0 or columns == 0:
        return Face(free, active, inside, tolerance, np.zeros((columns, rows)), np.eye(rows), columns)
    u, s, vt = scipy.linalg.svd(matrix, check_finite=False)
    rank = int((s > RANK * max(float(s[0]), ACTIVE)).sum())
    inverse = (vt[:rank].T / s[:rank]) @ u[:, :rank].T
    return Face(free, active, inside, tolerance, inverse, u[:, rank:], columns - rank)


def _invert(matrix: Array) -> Array | None:
    """The inverse, or None where the matrix is singular to working accuracy."""
    try:
        inverse: Array = np.linalg.inv(matrix).astype(np.float64, copy=False)
    except np.linalg.LinAlgError:
        return None
    if not float(np.abs(inverse).max()) * matrix.shape[0] < 1.0 / RANK:  # the matrix itself is of order one
        return None
    return inverse
