"""All optimal prices of a program: the face of optimal duals as a polyhedron in few dimensions.

With F the free amounts and R the active rows, every optimal dual satisfies a[R, F]' y = cost[F], so y = y0 + V w with V
the left null space of a[R, F]; what is left are the signs of the y of inequalities and of the reduced costs of
idle columns, all linear in w. x may be any optimal mix: the face is the same.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.face import Face
from blendapp.optimise.lockstep import ZERO, Dictionary, Maxima, NotSettled, maximise
from blendapp.optimise.program import Array


@dataclass(frozen=True, eq=False)
class DualFace:
    """Functionals of the optimal duals, in units of the largest |cost| (peak).

    Label r < |R| is y of active row r; label |R| + i is the reduced cost of idle[i], turned so that it is >= 0 where
    it must have a sign (at an upper bound: minus the reduced cost). idle: columns at a bound, shape (N,). turn: shape
    (N,), 1 or -1. fixed: mask of the idle columns whose bounds are equal. signed: mask of the labels that
    must be >= 0. base: shape (labels,), values at a vertex. slope: shape (labels, p), change along w.
    loose: mask of labels that are unbounded both ways. dictionary: the signed constraints at the vertex, None
    where p = 0; lean: those of them that can be nought somewhere on the face. objective: shape (labels, p + 1),
    every label in terms of the dictionary's columns and a constant.
    """

    arrays: Arrays
    face: Face
    peak: float
    idle: Indices
    turn: Array
    fixed: NDArray[np.bool_]
    signed: NDArray[np.bool_]
    base: Array
    slope: Array
    loose: NDArray[np.bool_]
    dictionary: Dictionary | None
    lean: Dictionary | None
    objective: Array

    @property
    def dimension(self) -> int:
        """p: 0 where the prices are unique."""
        return int(self.slope.shape[1])

    @property
    def labels(self) -> int:
        """Count of functionals."""
        return int(self.base.shape[0])

    def largest(self, which: Indices, sign: Array) -> Maxima:
        """The largest value of sign x label over all optimal duals, for each of `which`. shapes (K,)."""
        count = which.shape[0]
        if self.dictionary is None or self.lean is None:
            return Maxima(
                value=np.where(self.loose[which], np.inf, sign * self.base[which]),
                gain=np.zeros((count, 0)),
                nonbasic=np.zeros((count, 0), dtype=np.int64),
                sure=np.full(count, bool((self.base[self.signed] > ZERO).all())),
                constants=np.tile(self.base, (count, 1)),
            )
        found = maximise(self.lean, sign[:, None] * self.objective[which], self.labels)
        constants = self.values(found.constants)
        free = np.tile(self.signed, (count, 1))
        free[np.arange(count)[:, None], found.nonbasic] = False
        return Maxima(
            value=np.where(self.loose[which], np.inf, found.value),
            gain=found.gain,
            nonbasic=found.nonbasic,
            sure=np.logical_not(np.any((constants <= ZERO) & free, axis=1)),
            constants=constants,
        )

    def values(self, constants: Array) -> Array:
        """Values of all labels, shape (K, labels), from those of the dictionary's first columns."""
        assert self.dictionary is not None
        found: Array = constants[:, self.dictionary.nonbasic] @ self.objective[:, :-1].T + self.objective[:, -1]
        return found


def build(arrays: Arrays, face: Face, x: Array, y: Array) -> DualFace:
    """The face of optimal duals at an optimal x with one optimal y (shape (m,), >= 0 for inequalities)."""
    active, free = face.active, face.free
    a = arrays.a[active]
    peak = float(np.abs(arrays.cost).max(initial=0.0)) or 1.0
    cost = arrays.cost / peak
    idle = (~face.inside).nonzero()[0]
    at_upper = arrays.upper[idle] - x[idle] < x[idle] - arrays.lower[idle]
    turn = np.where(at_upper, -1.0, 1.0)
    fixed = arrays.upper[idle] - arrays.lower[idle] <= face.tolerance
    signed = np.concatenate((active < arrays.inequalities, ~fixed))
    p = face.degree
    if p == 0:
        multipliers = cost[free] @ face.inverse if free.size else np.zeros(0)
    else:
        multipliers = y[active] / peak
        if free.size:  # rounding of the solver's duals, taken out along the row space
            multipliers = multipliers + (cost[free] - multipliers @ a[:, free]) @ face.inverse
    base = np.concatenate((multipliers, turn * (cost[idle] - multipliers @ a[:, idle])))
    base[np.abs(base) < 1e-13] = 0.0
    slope = np.vstack((face.null, -turn[:, None] * (a[:, idle].T @ face.null)))
    slope[np.abs(slope) < 1e-12] = 0.0
    loose = np.zeros(base.shape[0], dtype=bool)
    if p == 0:
        return DualFace(
            arrays, face, peak, idle, turn, fixed, signed, base, slope, loose, None, None, np.zeros((base.shape[0], 1))
        )
    slope, loose = _without_lines(slope, signed)
    if slope.shape[1] == 0:
        return DualFace(
            arrays, face, peak, idle, turn, fixed, signed, base, slope, loose, None, None, np.zeros((base.shape[0], 1))
        )
    base, tight = _vertex(base, slope, signed)
    inverse = np.linalg.inv(slope[tight])
    objective = np.hstack((slope @ inverse, base[:, None]))
    objective[np.abs(objective) < 1e-12] = 0.0
    objective[tight] = np.eye(tight.size, tight.size + 1)
    basic = signed.copy()
    basic[tight] = False
    labels = basic.nonzero()[0]
    rows_of = objective[labels]
    np.maximum(rows_of[:, -1], 0.0, out=rows_of[:, -1])
    dictionary = Dictionary(rows_of, labels, tight)
    return DualFace(
        arrays,
        face,
        peak,
        idle,
        turn,
        fixed,
        signed,
        base,
        slope,
        loose,
        dictionary,
        _lean(dictionary, base.shape[0]),
        objective,
    )


def _lean(dictionary: Dictionary, labels: int) -> Dictionary:
    """Without the constraints that cannot be nought anywhere on the face, by the box that holds the face."""
    p = dictionary.nonbasic.shape[0]
    box = maximise(dictionary, np.eye(p, p + 1), labels).value
    coefficients = dictionary.rows[:, :-1]
    with np.errstate(invalid="ignore"):
        fall = np.where(coefficients < 0.0, coefficients * box, 0.0).sum(axis=1)
    keep = dictionary.rows[:, -1] + fall <= ZERO
    return Dictionary(dictionary.rows[keep], dictionary.basic[keep], dictionary.nonbasic)


def _without_lines(slope: Array, signed: NDArray[np.bool_]) -> tuple[Array, NDArray[np.bool_]]:
    """Drop directions along which no sign ever changes: labels that move along them are unbounded both ways."""
    small = np.linalg.qr(slope[signed], mode="r")  # the same row space in p rows
    _, s, vt = scipy.linalg.svd(small, full_matrices=True, check_finite=False)
    rank = int((s > ZERO).sum())
    if rank == slope.shape[1]:
        return slope, np.zeros(slope.shape[0], dtype=bool)
    lines = slope @ vt[rank:].T
    loose = np.abs(lines).max(axis=1) > ZERO
    kept = slope @ vt[:rank].T
    kept[np.abs(kept) < 1e-12] = 0.0
    return kept, loose


def _vertex(base: Array, slope: Array, signed: NDArray[np.bool_]) -> tuple[Array, Indices]:
    """Values at a vertex of the face, and the labels of p independent constraints that are nought there."""
    p = slope.shape[1]
    candidates = signed.nonzero()[0]
    for _ in range(p + 1):
        near = candidates[base[candidates] <= ZERO]
        independent = _independent(slope[near], p)
        if independent.size == p:
            tight = near[independent]
            shift = np.linalg.solve(slope[tight], -base[tight])
            moved = base + slope @ shift
            moved[tight] = 0.0
            return moved, tight
        direction = _free_direction(slope[near], p)
        rate = slope[candidates] @ direction
        if not (rate < -ZERO).any():
            direction, rate = -direction, -rate
        falling = (rate < -ZERO) & (base[candidates] > ZERO)
        if not falling.any():
            break
        step = float((base[candidates][falling] / -rate[falling]).min())
        base = base + step * (slope @ direction)
        base[candidates] = np.maximum(base[candidates], 0.0)
    raise NotSettled("no vertex was found on the face of optimal prices")


def _independent(rows: Array, p: int) -> Indices:
    """Positions of up to p independent rows."""
    if not rows.shape[0]:
        return np.zeros(0, dtype=np.int64)
    _, r, order = scipy.linalg.qr(rows.T, mode="economic", pivoting=True, check_finite=False)
    size = np.abs(np.diag(r))
    rank = int((size > ZERO).sum())
    chosen: Indices = np.asarray(order[: min(rank, p)], dtype=np.int64)
    return chosen


def _free_direction(rows: Array, p: int) -> Array:
    """A direction along which none of the rows changes."""
    direction: Array = np.zeros(p)
    direction[0] = 1.0
    if rows.shape[0]:
        direction[:] = scipy.linalg.svd(rows, full_matrices=True, check_finite=False)[2][-1]
    return direction
