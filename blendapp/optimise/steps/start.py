"""A good batch without a solver: shares rounded, the rest given to the largest remainders, then moves of two lines."""

from __future__ import annotations

import time
from collections.abc import Sequence
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.program import Array
from blendapp.optimise.steps.problem import Task

Whole = NDArray[np.int64]

_SAME = 1e-12
_DUST = 1e-10  # of a scaled side: what adding floats may miss


def start(
    task: Task, totals: Sequence[Fraction], time_limit_s: float, play: Fraction = Fraction(0),
    first: Sequence[int] | None = None,
) -> tuple[int, ...]:
    """Whole steps within what every line is allowed; near one of the totals, with few limits broken.

    play: how far from the totals another one is as good. first: where to begin, else at the rounded shares. Improves in
    the order of total, broken limits, deviation, cost, until no move of one or two lines helps.
    """
    return _Walk(task, totals, time.perf_counter() + time_limit_s, float(play)).run(first)


class _Walk:
    def __init__(self, task: Task, totals: Sequence[Fraction], deadline: float, play_kg: float) -> None:
        self.placed, self.same_kg = task.placed, max(play_kg, 1e-9)
        self.size = len(self.placed)
        self.deadline = deadline
        self.step = np.array([float(p.step) for p in self.placed])
        self.share = np.array([float(p.share) for p in self.placed])
        self.allowed = np.array([float(p.allowed) for p in self.placed])
        self.lo = np.array([p.lo for p in self.placed], dtype=np.int64)
        self.hi = np.array([p.hi for p in self.placed], dtype=np.int64)
        self.absent = np.array([p.absent for p in self.placed])
        self.cost = np.array(task.cost)
        self.totals = np.array([float(t) for t in totals])
        self.nearest = np.array([p.nearest for p in self.placed], dtype=np.int64)
        sides = [np.array([float(t) for t in side.terms]) for side in task.sides]
        reach = np.maximum(self.hi, 1)
        self.a = np.array([s / max(float(np.abs(s * reach).max()), 1e-300) for s in sides]).reshape(-1, self.size)
        self.if_used = np.array([-1 if s.if_used is None else s.if_used for s in task.sides], dtype=np.int64)
        self.line, self.by, self.other, self.other_by = self._moves()

    def _moves(self) -> tuple[Whole, Whole, Whole, Whole]:
        """One line a step up or down, and two lines so that the total stays."""
        found: list[tuple[int, int, int, int]] = []
        for i, p in enumerate(self.placed):
            found += [(i, 1, i, 0), (i, -1, i, 0)]
            if p.absent:
                found += [(i, p.lo, i, 0), (i, -p.lo, i, 0)]
            for j, q in enumerate(self.placed):
                if i == j or p.fixed or q.fixed:
                    continue
                ratio = p.step / q.step
                a, b = ratio.denominator, ratio.numerator
                if a <= max(p.hi - p.lo, 1) and b <= max(q.hi - q.lo, 1):
                    found.append((i, a, j, -b))
        moves = np.array(found, dtype=np.int64).reshape(-1, 4)
        return moves[:, 0], moves[:, 1], moves[:, 2], moves[:, 3]

    def run(self, first: Sequence[int] | None = None) -> tuple[int, ...]:
        n = self._filled() if first is None else np.array(first, dtype=np.int64)
        n = self._descend(n, eager=True)
        n = self._descend(n, eager=False)
        return tuple(int(v) for v in n)

    def _filled(self) -> Whole:
        """Every line at its nearest step, then the rest from coarse to fine, cheapest deviation first."""
        n = self.nearest.copy()
        mass = float(self.step @ n)
        wanted = float(self.totals[np.abs(self.totals - mass).argmin()])
        for step in sorted(set(self.step.tolist()), reverse=True):
            lines = np.flatnonzero(self.step == step)
            for _ in range(int(abs(wanted - mass) / step) + 1):
                rest = wanted - mass
                if abs(rest) < step * (1 - 1e-9):
                    break
                way = 1 if rest > 0 else -1
                able = lines[self._admissible(n[lines] + way, lines)]
                if not able.size:
                    break
                j = able[np.argmin(self._deviations(n[able] + way, able) - self._deviations(n[able], able))]
                n[j] += way
                mass += way * step
        return n

    def _admissible(self, n: Whole, lines: Whole) -> NDArray[np.bool_]:
        inside: NDArray[np.bool_] = (n >= self.lo[lines]) & (n <= self.hi[lines])
        inside |= (n == 0) & self.absent[lines]
        return inside

    def _deviations(self, n: Whole, lines: Whole) -> Array:
        found: Array = np.abs(n * self.step[lines] - self.share[lines]) / self.allowed[lines]
        return found

    def _descend(self, n: Whole, eager: bool) -> Whole:
        """Take the best move until none helps. eager: before the count of broken limits comes by how much."""
        i, by, j, other = self.line, self.by, self.other, self.other_by
        everyone = np.arange(self.size)
        mass = float(self.step @ n)
        values: Array = self.a @ n.astype(float)
        deviation = float(self._deviations(n, everyone).sum())
        moved = by * self.step[i] + other * self.step[j]
        money = by * self.cost[i] + other * self.cost[j]
        changes = self.a[:, i] * by + self.a[:, j] * other
        while time.perf_counter() < self.deadline:
            able = self._admissible(n[i] + by, i) & (self._admissible(n[j] + other, j) | (other == 0))
            rest = self._deviations(n[i] + by, i) - self._deviations(n[i], i)
            rest += np.where(other != 0, self._deviations(n[j] + other, j) - self._deviations(n[j], j), 0.0)
            after = values[:, None] + changes
            short = np.minimum(after + _DUST, 0.0)
            for k in np.flatnonzero(self.if_used >= 0):
                used = n[self.if_used[k]] + by * (i == self.if_used[k]) + other * (j == self.if_used[k])
                short[k, used == 0] = 0.0
            now = self._score(mass, self._short(values, n), deviation, 0.0, eager)
            keys = self._keys(mass + moved, short, deviation + rest, money, eager)
            keys = [np.where(able, key, np.inf) for key in keys]
            best = int(np.lexsort(keys[::-1])[0]) if able.any() else -1
            if best < 0 or not _better([float(key[best]) for key in keys], now):
                break
            n = n.copy()
            n[i[best]] += by[best]
            n[j[best]] += other[best]
            mass = float(self.step @ n)
            values = self.a @ n.astype(float)
            deviation = float(self._deviations(n, everyone).sum())
        return n

    def _short(self, values: Array, n: Whole) -> Array:
        short = np.minimum(values + _DUST, 0.0)
        for k in np.flatnonzero(self.if_used >= 0):
            if n[self.if_used[k]] == 0:
                short[k] = 0.0
        return short[:, None]

    def _score(self, mass: float, short: Array, deviation: float, money: float, eager: bool) -> list[float]:
        one = self._keys(np.array([mass]), short, np.array([deviation]), np.array([money]), eager)
        return [float(key[0]) for key in one]

    def _keys(self, mass: Array, short: Array, deviation: Array, money: Array, eager: bool) -> list[Array]:
        error = np.abs(mass[:, None] - self.totals).min(axis=1)
        error[error < self.same_kg] = 0.0
        count = (short < 0.0).sum(axis=0).astype(float)
        keys = [error, count, deviation, money]
        if eager:
            keys[1:1] = [-short.sum(axis=0)]
        return keys


def _better(one: list[float], other: list[float]) -> bool:
    """Lexicographically, by more than the dust of adding."""
    for a, b in zip(one, other, strict=True):
        if a < b - _SAME * max(1.0, abs(b)):
            return True
        if a > b + _SAME * max(1.0, abs(b)):
            return False
    return False
