"""Over which prices of a column, the rest held, the amounts stay optimal: by amounts, not by basis.

The amounts stay optimal as long as some dual still explains the prices: a program over the face of optimal duals with
the price change as one more variable. Under degeneracy that is wider than the range of any one basis.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.dual_face import DualFace
from blendapp.optimise.lockstep import PIVOT, ZERO, Dictionary, Maxima, maximise
from blendapp.optimise.program import Array

_SOLVABLE = 1e-7
_FIRST = 3
_TURNS = 8


def price_ranges(dual: DualFace, highest: Array) -> tuple[Array, Array]:
    """Lowest and highest cost of each column, shape (n,) each, -inf and inf where without end.

    highest: shape (labels,), the largest value of each label over the optimal duals (DualFace.largest).
    """
    arrays, face = dual.arrays, dual.face
    cost = arrays.cost
    low = np.full(cost.shape[0], -np.inf)
    high = np.full(cost.shape[0], np.inf)
    room = highest[face.active.size :] * dual.peak
    at_lower = (dual.turn > 0) & ~dual.fixed
    at_upper = (dual.turn < 0) & ~dual.fixed
    low[dual.idle[at_lower]] = cost[dual.idle[at_lower]] - room[at_lower]
    high[dual.idle[at_upper]] = cost[dual.idle[at_upper]] + room[at_upper]
    free = face.free
    if not free.size:
        return low, high
    prices = face.inverse  # row j: how the prices of the active rows follow the cost of free column j
    change = np.hstack((prices, -dual.turn * (prices @ arrays.a[face.active][:, dual.idle])))
    if dual.dictionary is None:
        base, change = dual.base[dual.signed], change[:, dual.signed]
        falls, rises = change < -PIVOT, change > PIVOT
        up = np.where(falls, base / np.where(falls, -change, 1.0), np.inf).min(axis=1, initial=np.inf)
        down = np.where(rises, base / np.where(rises, change, 1.0), np.inf).min(axis=1, initial=np.inf)
    else:
        up, down = _ends(dual, dual.dictionary, change)
    if face.spare:
        # a mix between two vertices: a price that tells them apart may not move at all
        project = prices @ arrays.a[np.ix_(face.active, free)]
        tied = np.abs(project - np.eye(free.size)).max(axis=1) > _SOLVABLE
        up = np.where(tied, 0.0, up)
        down = np.where(tied, 0.0, down)
    low[free] = cost[free] - down * dual.peak
    high[free] = cost[free] + up * dual.peak
    return low, high


def _ends(dual: DualFace, dictionary: Dictionary, change: Array) -> tuple[Array, Array]:
    """How far each price can rise and fall with some dual still explaining it. change: shape (|F|, labels).

    Few constraints matter to each: start with those that would block first and those of the lean face, and add what
    the outcome breaks until it breaks nothing.
    """
    tight, basic = dictionary.nonbasic, dictionary.basic
    count = change.shape[0]
    moved = change[:, basic] - change[:, tight] @ dual.objective[basic, :-1].T
    extra = np.vstack((moved, -moved))
    value = np.full(2 * count, np.inf)
    assert dual.lean is not None
    use = np.isin(basic, dual.lean.basic)
    blocks = extra < -PIVOT
    ratio = np.where(blocks, dictionary.rows[:, -1] / np.where(blocks, -extra, 1.0), np.inf)
    near = min(_FIRST, basic.size)
    if near:
        use[np.argpartition(ratio, near - 1, axis=1)[:, :near].ravel()] = True
    left = np.arange(2 * count)
    for turn in range(_TURNS):
        if turn == _TURNS - 1:
            use[:] = True
        found = _solved(dictionary, use, extra[left], dual.labels)
        endless = np.isinf(found.value)
        if endless.any() and not use.all():  # what none in use blocks may be blocked by one that is not
            value[left[endless]] = _solved(dictionary, use | True, extra[left[endless]], dual.labels).value
        values = found.constants[:, tight] @ dictionary.rows[:, :-1].T + dictionary.rows[:, -1]
        values += extra[left] * np.where(endless, 0.0, found.value)[:, None]
        broken = ~endless & (values.min(axis=1, initial=0.0) < -ZERO)
        kept = ~endless & ~broken
        value[left[kept]] = found.value[kept]
        if not broken.any():
            break
        use[values[broken].argmin(axis=1)] = True
        left = left[broken]
    return value[:count], value[count:]


def _solved(dictionary: Dictionary, use: NDArray[np.bool_], extra: Array, labels: int) -> Maxima:
    """The largest value of the further column for each row of extra (shape (K, m)), by the constraints in use."""
    p = dictionary.nonbasic.size
    objective = np.zeros((extra.shape[0], p + 2))
    objective[:, p] = 1.0
    part = Dictionary(dictionary.rows[use], dictionary.basic[use], dictionary.nonbasic)
    return maximise(part, objective, labels, extra[:, use])
