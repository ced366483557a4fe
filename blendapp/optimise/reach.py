"""How far a slope of the optimal cost holds, and what a bound multiplies over all optimal mixes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import NamedTuple

import numpy as np

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.dual_face import DualFace
from blendapp.optimise.linear import optimum
from blendapp.optimise.lockstep import ZERO, Maxima
from blendapp.optimise.program import Array

_RATE = 1e-9


class Move(NamedTuple):
    """One bound moved one way.

    label: the dual functional of the bound; sign: 1 where its largest value is the slope, -1 where its least is.
    place: index of that value among the extremes. bound: where it stands. low, high: within what the column
    may go when its own bound moves (for a row: not used).
    """

    limit: int
    field: str
    label: int
    sign: int
    place: int
    bound: float
    low: float
    high: float


def reaches(dual: DualFace, x: Array, moves: Sequence[Move], extremes: Maxima) -> dict[tuple[int, str], float | None]:
    """The value of each moved bound up to which its slope holds, None where it holds without end.

    The multipliers of the small program that gave the slope are the way in which the mix follows the bound; a ratio
    test says how far it can. Where that way is not the only one, the mix is followed by a program of its own.
    """
    if not moves:
        return {}
    arrays, face = dual.arrays, dual.face
    count, rows = len(moves), face.active.size
    places = np.array([move.place for move in moves])
    sure = extremes.sure[places] & (face.spare == 0)
    follow = np.zeros((dual.labels, count))
    each = np.arange(count)
    if dual.dictionary is not None:
        follow[extremes.nonbasic[places].T, each] = np.maximum(-extremes.gain[places].T, 0.0)
    need = follow[:rows]
    step = dual.turn[:, None] * follow[rows:]
    label = np.array([move.label for move in moves])
    sign = np.array([move.sign for move in moves], dtype=np.float64)
    is_row = label < rows
    need[label[is_row], each[is_row]] += sign[is_row]
    own = (~is_row).nonzero()[0]
    shift = np.zeros(count)
    shift[own] = sign[own] * dual.turn[label[own] - rows]
    step[label[own] - rows, own] += shift[own]
    direction = np.zeros((x.shape[0], count))
    direction[dual.idle] = step
    active = arrays.a[face.active]
    if face.free.size:
        direction[face.free] = face.inverse @ (need - active[:, dual.idle] @ step)
    rising, falling = direction > _RATE, direction < -_RATE
    up_room = np.repeat((arrays.upper - x)[:, None], count, axis=1)
    down_room = np.repeat((x - arrays.lower)[:, None], count, axis=1)
    for q in own.tolist():
        j = int(dual.idle[label[q] - rows])
        up_room[j, q] = moves[q].high - x[j]
        down_room[j, q] = x[j] - moves[q].low
    far = np.where(rising, up_room / np.where(rising, direction, 1.0), np.inf).min(axis=0)
    far = np.minimum(far, np.where(falling, down_room / np.where(falling, -direction, 1.0), np.inf).min(axis=0))
    inactive = np.ones(arrays.b.shape[0], dtype=bool)
    inactive[face.active] = False
    if inactive.any():
        slack = arrays.a[inactive] @ x - arrays.b[inactive]
        rate = arrays.a[inactive] @ direction
        closing = rate < -_RATE
        far = np.minimum(far, np.where(closing, slack[:, None] / np.where(closing, -rate, 1.0), np.inf).min(axis=0))
    far = np.maximum(far, 0.0)
    out: dict[tuple[int, str], float | None] = {}
    for q, move in enumerate(moves):
        reach = float(far[q])
        if not sure[q] and np.isfinite(reach):
            reach = max(reach, _followed(dual, x, move, float(shift[q]), extremes.constants[move.place]))
        if not np.isfinite(reach):
            out[move.limit, move.field] = None
        elif is_row[q]:
            out[move.limit, move.field] = move.bound + move.sign * reach / float(arrays.factor[face.active[move.label]])
        else:
            out[move.limit, move.field] = move.bound + float(shift[q]) * reach
    return out


def _followed(dual: DualFace, x: Array, move: Move, shift: float, constants: Array) -> float:
    """The largest step of the bound for which a mix exists that the extreme prices still explain: what has a price
    stays at its bound, the rest is free. shape of constants: (labels,)."""
    arrays, face = dual.arrays, dual.face
    rows, n = face.active.size, x.shape[0]
    m = arrays.b.shape[0]
    held = np.zeros(m, dtype=bool)
    held[arrays.inequalities :] = True
    priced = constants > ZERO
    held[face.active[priced[:rows] & dual.signed[:rows]]] = True
    extended = np.hstack((arrays.a, np.zeros((m, 1))))
    lower, upper = np.append(arrays.lower, 0.0), np.append(arrays.upper, np.inf)
    stay = priced[rows:] & ~dual.fixed
    lower[dual.idle[stay]] = x[dual.idle[stay]]
    upper[dual.idle[stay]] = x[dual.idle[stay]]
    a, b = extended, arrays.b
    if move.label < rows:
        a = extended.copy()
        a[face.active[move.label], n] = -float(move.sign)
    else:
        i = move.label - rows
        j = int(dual.idle[i])
        lower[j], upper[j] = move.low, move.high
        own = np.zeros((1, n + 1))
        target = move.field in ("raise_holds_to", "lower_holds_to")
        minimum = dual.turn[i] > 0 if not dual.fixed[i] else shift * move.sign > 0
        own[0, j], own[0, n] = (1.0, -shift) if minimum else (-1.0, shift)
        a = np.vstack((extended, own))
        b = np.append(b, x[j] if minimum else -x[j])
        held = np.append(held, bool(target or stay[i] or (dual.fixed[i] and abs(constants[move.label]) > ZERO)))
    order = np.concatenate(((~held).nonzero()[0], held.nonzero()[0]))
    program = replace(arrays, a=a[order], b=b[order], inequalities=int((~held).sum()), lower=lower, upper=upper)
    cost = np.zeros(n + 1)
    cost[n] = -1.0
    status, vertex = optimum(program, cost=cost)
    if status == "unbounded":
        return np.inf
    return 0.0 if vertex is None else float(vertex.x[n])


def divisor_extremes(dual: DualFace, x: Array, divisor: Array, highest: Array) -> tuple[float, float]:
    """Least and greatest divisor . x over all optimal mixes. highest: shape (labels,), as in price_ranges."""
    arrays, face = dual.arrays, dual.face
    rows = face.active.size
    priced = highest > ZERO
    if face.spare == 0 and priced[dual.signed].all():
        value = float(divisor @ x)
        return value, value
    held = np.zeros(arrays.b.shape[0], dtype=bool)
    held[arrays.inequalities :] = True
    held[face.active[priced[:rows] & dual.signed[:rows]]] = True
    lower, upper = arrays.lower.copy(), arrays.upper.copy()
    stay = dual.idle[priced[rows:]]
    lower[stay] = x[stay]
    upper[stay] = x[stay]
    order = np.concatenate(((~held).nonzero()[0], held.nonzero()[0]))
    program: Arrays = replace(
        arrays, a=arrays.a[order], b=arrays.b[order], inequalities=int((~held).sum()), lower=lower, upper=upper
    )
    ends = []
    for sign in (1.0, -1.0):
        _, vertex = optimum(program, cost=sign * divisor)
        ends.append(sign * np.inf * -1.0 if vertex is None else float(divisor @ vertex.x))
    return ends[0], ends[1]
