"""Many small linear programs over one polyhedron, solved together: every pivot is one array operation.

A dictionary (Chvatal, Linear Programming, chapter 2) writes some constraints g >= 0 as constants plus coefficients
times the nonbasic ones, which are nought at the present vertex.
"""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.arrays import Indices
from blendapp.optimise.program import Array

PIVOT = 1e-9  # a coefficient smaller than this cannot block or gain
ZERO = 1e-9  # a constant smaller than this is nought
_CHUNK = 160  # programs worked on at a time, so that their tableaus stay in the cache
_BLAND_AFTER = 60
_GIVE_UP_AFTER = 400


class NotSettled(ArithmeticError):
    """A small program did not end: pivots went round in a circle of rounding."""


@dataclass(frozen=True, eq=False)
class Dictionary:
    """rows: shape (m, q + 1), coefficients of each basic constraint and, last, its constant >= 0.
    basic: labels of the rows, shape (m,). nonbasic: labels of the columns, shape (q,)."""

    rows: Array
    basic: Indices
    nonbasic: Indices


@dataclass(frozen=True, eq=False)
class Maxima:
    """Outcome of K programs. value: shape (K,), inf where unbounded. gain: the final objective rows, shape (K, q),
    <= 0; nonbasic: labels of their columns, shape (K, q). sure: shape (K,), whether the last vertex has no basic
    constraint at nought, so that it is the only optimum of its dual. constants: final constants of all labels,
    shape (K, labels), nought for nonbasic ones."""

    value: Array
    gain: Array
    nonbasic: Indices
    sure: NDArray[np.bool_]
    constants: Array


def maximise(dictionary: Dictionary, objectives: Array, labels: int, extra: Array | None = None) -> Maxima:
    """Maximise each objective over the dictionary's polyhedron.

    objectives: shape (K, q + 1) in terms of the nonbasic columns and a constant. labels: more than any label in the
    dictionary. extra: shape (K, m), coefficients of one further column (label -1), which differs from program to
    program; the objectives then have shape (K, q + 2). Raises NotSettled.
    """
    count, width = objectives.shape[0], objectives.shape[1] - 1
    start = dictionary.nonbasic if extra is None else np.append(dictionary.nonbasic, -1)
    found = Maxima(
        value=objectives[:, -1].copy(),
        gain=objectives[:, :-1].copy(),
        nonbasic=np.tile(start, (count, 1)),
        sure=np.full(count, bool((dictionary.rows[:, -1] > ZERO).all())),
        constants=np.zeros((count, labels + 1)),  # beyond the labels: the further column
    )
    found.constants[:, dictionary.basic] = dictionary.rows[:, -1]
    going = np.flatnonzero(np.any(objectives[:, :-1] > PIVOT, axis=1))
    if going.size and not dictionary.basic.size:
        found.value[going] = np.inf
        going = going[:0]
    for first in range(0, going.size, _CHUNK):
        chunk = going[first : first + _CHUNK]
        # the long axis last: every operation then runs along it
        t = np.empty((chunk.size, width + 1, dictionary.basic.size))
        if extra is None:
            t[:] = dictionary.rows.T
        else:
            t[:, : width - 1] = dictionary.rows[:, :-1].T
            t[:, width - 1] = extra[chunk]
            t[:, width] = dictionary.rows[:, -1]
        _pivot(found, chunk, t, objectives[chunk], np.tile(dictionary.basic, (chunk.size, 1)))
    return dataclasses.replace(found, constants=found.constants[:, :labels])


def _pivot(found: Maxima, chunk: Indices, t: Array, objective: Array, basic: Indices) -> None:
    """Pivot all programs of a chunk to their ends and note the outcomes. t: shape (K, q + 1, m)."""
    columns = found.nonbasic[chunk]
    none = np.iinfo(np.int64).max
    room = np.empty_like(t)  # one allocation for all turns
    for turn in range(_GIVE_UP_AFTER):
        each = np.arange(chunk.size)
        if turn < _BLAND_AFTER:
            entering = objective[:, :-1].argmax(axis=1)
        else:  # the smallest label: slower, but it cannot go round in a circle
            entering = np.where(objective[:, :-1] > PIVOT, columns, none).argmin(axis=1)
        going = objective[each, entering] > PIVOT
        column = t[each, entering]
        blocks = column < -PIVOT
        ratio = np.full(column.shape, np.inf)
        np.divide(t[:, -1], -column, out=ratio, where=blocks)
        if turn < _BLAND_AFTER:
            leaving = ratio.argmin(axis=1)
        else:
            leaving = np.where(ratio <= ratio.min(axis=1, keepdims=True), basic, none).argmin(axis=1)
        keep = going & (ratio[each, leaving] < np.inf)
        if not keep.all():
            done = (~keep).nonzero()[0]
            where = chunk[done]
            found.value[where] = np.where(going[done], np.inf, objective[done, -1])
            found.gain[where] = objective[done, :-1]
            found.nonbasic[where] = columns[done]
            found.sure[where] = (t[done, -1] > ZERO).all(axis=1)
            found.constants[where] = 0.0
            found.constants[where[:, None], basic[done]] = t[done, -1]
            kept = keep.nonzero()[0]
            if not kept.size:
                return
            t, objective, columns, basic = t[kept], objective[kept], columns[kept], basic[kept]
            chunk, entering, leaving, column = chunk[kept], entering[kept], leaving[kept], column[kept]
            each = np.arange(chunk.size)
        row = t[each, :, leaving]
        pivot = row[each, entering]
        row /= -pivot[:, None]
        row[each, entering] = 1.0 / pivot
        t[each, entering] = 0.0
        product = room[: chunk.size]
        np.multiply(row[:, :, None], column[:, None, :], out=product)
        t += product
        t[each, :, leaving] = row
        np.maximum(t[:, -1], 0.0, out=t[:, -1])
        factor = objective[each, entering]
        objective[each, entering] = 0.0
        objective += factor[:, None] * row
        swapped = columns[each, entering]
        columns[each, entering] = basic[each, leaving]
        basic[each, leaving] = swapped
    raise NotSettled("small programs over the face of optimal prices did not end")
