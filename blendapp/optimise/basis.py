"""The basis behind an answer: as many columns as rows, whose prices prove the answer optimal."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.dual_face import build
from blendapp.optimise.program import Array
from blendapp.optimise.solution import Solution

_INDEPENDENT = 1e-10


class Basis(NamedTuple):
    """columns: between their bounds, or at one in a degenerate place; rows: held, as many; both sorted. at_upper:
    idle columns at their upper bound."""

    columns: Indices
    rows: Indices
    at_upper: Indices


def basis_of(solution: Solution) -> Basis:
    """The basis of a vertex of the face of optimal prices. Raises ValueError where there is no answer."""
    arrays, face, x = solution.arrays, solution.face, solution.x
    if arrays is None or face is None or x is None or solution.duals is None:
        raise ValueError("only an answer has a basis")
    columns, rows = face.free, face.active
    if face.degree == 0 and face.spare == 0:
        idle = (~face.inside).nonzero()[0]
        at_upper = idle[arrays.upper[idle] - x[idle] < x[idle] - arrays.lower[idle]]
        return Basis(columns, rows, at_upper)
    dual = build(arrays, face, x, solution.duals)
    at_upper = dual.idle[dual.turn < 0]
    if dual.dictionary is not None:
        tight = dual.dictionary.nonbasic
        rows = np.delete(rows, tight[tight < rows.size])
        columns = np.sort(np.concatenate((columns, dual.idle[tight[tight >= face.active.size] - face.active.size])))
    rows = rows[_independent(arrays.a[np.ix_(rows, columns)])]
    columns = columns[_independent(arrays.a[np.ix_(rows, columns)].T)]
    return Basis(columns, rows, np.setdiff1d(at_upper, columns))


def _independent(matrix: Array) -> Indices:
    """Positions of independent rows, the first of any that depend on each other, by elimination."""
    chosen: list[int] = []
    directions = np.zeros((0, matrix.shape[1]))
    for i in range(matrix.shape[0]):
        left = matrix[i].astype(np.float64)
        for _ in range(2):  # twice, so that rounding leaves nothing of the others
            left = left - (directions @ left) @ directions
        norm = float(np.linalg.norm(left))
        if norm > _INDEPENDENT:
            directions = np.vstack((directions, left / norm))
            chosen.append(i)
    return np.array(chosen, dtype=np.int64)


def inverse_of(arrays: Arrays, basis: Basis) -> Array:
    """The inverse of the basis matrix a[rows, columns]."""
    if not basis.rows.size:
        return np.zeros((0, 0))
    inverse: Array = np.linalg.inv(arrays.a[np.ix_(basis.rows, basis.columns)]).astype(np.float64, copy=False)
    return inverse
