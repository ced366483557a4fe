"""The whole batch as mixed-integer programs, one for each aim, each holding what the aims before it reached."""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from typing import Any, NamedTuple

import numpy as np
import scipy.optimize
import scipy.sparse

from blendapp.optimise.program import Array
from blendapp.optimise.quiet import quiet
from blendapp.optimise.steps.problem import Task
from blendapp.optimise.steps.totals import common_measure

_milp: Any = scipy.optimize.milp
# Sides and aims are scaled so that what the solver neglects (1e-7 to 1e-6) is small beside what one step does.
_SCALE = 100.0


class Found(NamedTuple):
    """steps: None where time ran out first, or where there is none. bound: no batch has less. none: proven."""

    steps: tuple[int, ...] | None
    bound: float
    proven: bool
    none: bool = False


class Integers:
    """Columns: steps less the nearest whole ones (n), relative deviations (n), presence of lines that may be absent,
    one mark a limit that may break, and one for the second of two totals.

    play: how far from the totals another one is as good. guard: limits whose sides must hold by that much more,
    because the solver took dust for holding.
    """

    def __init__(self, task: Task, totals: Sequence[Fraction], play: Fraction = Fraction(0)) -> None:
        self.task, self.totals, self.play = task, list(totals), play
        placed = task.placed
        n = self.size = len(placed)
        self.origin = [0 if p.absent else min(max(round(p.share / p.step), p.lo), p.hi) for p in placed]
        self.low = np.array([(0 if p.absent else p.lo) - m for p, m in zip(placed, self.origin, strict=True)], float)
        self.high = np.array([p.hi - m for p, m in zip(placed, self.origin, strict=True)], dtype=float)
        self.maybe = [j for j, p in enumerate(placed) if p.absent]
        self.sides, self.always = self._at_risk()
        self.marks = sorted({task.sides[k].limit for k, *_rest in self.sides})
        self.second = len(self.totals) > 1
        self.columns = 2 * n + len(self.maybe) + len(self.marks) + int(self.second)
        self.guard: dict[int, float] = {}

    def _at_risk(self) -> tuple[list[tuple[int, Array, float, float]], int]:
        """Sides that may break or hold: (side, scaled terms, scaled value at the origin, worst); and how many limits
        break whatever is weighed."""
        found, always = [], set()
        for k, side in enumerate(self.task.sides):
            size = max((abs(t) for t in side.terms), default=0) or 1
            terms = np.array([_SCALE * float(Fraction(t, size)) for t in side.terms])
            at = _SCALE * float(Fraction(sum(t * m for t, m in zip(side.terms, self.origin, strict=True)), size))
            worst = at + float(np.minimum(terms * self.low, terms * self.high).sum())
            best = at + float(np.maximum(terms * self.low, terms * self.high).sum())
            if worst >= 1e-6:
                continue
            if best < -1e-6 and (side.if_used is None or not self.task.placed[side.if_used].absent):
                always.add(side.limit)
                continue
            found.append((k, terms, at, worst))
        found = [one for one in found if self.task.sides[one[0]].limit not in always]
        return found, len(always)

    def fewest_broken(self, time_limit_s: float) -> Found:
        """The fewest limits broken at one of the totals."""
        aim = np.zeros(self.columns)
        aim[self._marks()] = 1.0
        found = self._solve(aim, [], time_limit_s)
        if not math.isfinite(found.bound):
            return found if found.none else found._replace(bound=float(self.always))
        return found._replace(bound=self.always + math.ceil(found.bound - 1e-6))

    def least_deviation(self, most_broken: int, time_limit_s: float) -> Found:
        """The least sum of relative deviations."""
        aim = np.zeros(self.columns)
        aim[self.size : 2 * self.size] = _SCALE
        found = self._solve(aim, [self._broken_row(most_broken)], time_limit_s)
        return found._replace(bound=found.bound / _SCALE)

    def least_cost(self, most_broken: int, deviation: float, time_limit_s: float) -> Found:
        """The least cost among those that break and deviate no more. bound: relative to the cost at the origin."""
        aim = np.zeros(self.columns)
        cost = np.array(self.task.cost)
        size = float(np.abs(cost).max(initial=0.0)) or 1.0
        aim[: self.size] = _SCALE * cost / size
        total = np.zeros(self.columns)
        total[self.size : 2 * self.size] = _SCALE
        rows = [self._broken_row(most_broken), (total, -np.inf, _SCALE * deviation * (1 + 1e-9) + 1e-6)]
        found = self._solve(aim, rows, time_limit_s)
        return found._replace(bound=found.bound * size / _SCALE + self.task.money(self.origin))

    def nearest_total(self, time_limit_s: float) -> Found:
        """The least error of the total, for an order whose totals are not known. bound: of the error in kg."""
        step = np.array([float(p.step) for p in self.task.placed])
        off = float(self.task.total(self.origin)) - self.task.order.batch_kg
        n = self.size
        matrix = np.zeros((2, n + 1))
        matrix[:, :n] = step
        matrix[0, n], matrix[1, n] = 1.0, -1.0
        low, high = np.array([-off, -np.inf]), np.array([np.inf, -off])
        aim = np.zeros(n + 1)
        aim[n] = 1.0
        least, most = self.task.order.least_total_kg, self.task.order.greatest_total_kg
        if least is not None or most is not None:
            here = off + self.task.order.batch_kg
            matrix = np.vstack((matrix, np.append(step, 0.0)))
            low = np.append(low, -np.inf if least is None else least - here)
            high = np.append(high, np.inf if most is None else most - here)
        return self._run(
            aim, scipy.sparse.csr_array(matrix), low, high, np.append(self.low, 0.0), np.append(self.high, np.inf),
            np.append(np.ones(n), 0.0), time_limit_s,
        )

    def _marks(self) -> slice:
        first = 2 * self.size + len(self.maybe)
        return slice(first, first + len(self.marks))

    def _broken_row(self, most: int) -> tuple[Array, float, float]:
        row = np.zeros(self.columns)
        row[self._marks()] = 1.0
        return row, -np.inf, float(most - self.always)

    def _solve(self, aim: Array, more: list[tuple[Array, float, float]], time_limit_s: float) -> Found:
        n = self.size
        rows, low, high = self._rows()
        for row, least, most in more:
            rows.append(row)
            low.append(least)
            high.append(most)
        lower, upper = np.zeros(self.columns), np.ones(self.columns)
        lower[:n], upper[:n] = self.low, self.high
        upper[n : 2 * n] = np.inf
        integrality = np.ones(self.columns)
        integrality[n : 2 * n] = 0.0
        matrix = scipy.sparse.csr_array(np.array(rows))
        ends = np.array(low), np.array(high), lower, upper
        found = self._run(aim, matrix, *ends, integrality, time_limit_s)
        if found.bound == -math.inf:  # time was up before the solver had any batch, and then it tells no bound
            found = found._replace(bound=self._run(aim, matrix, *ends, 0.0 * integrality, time_limit_s).bound)
        return found

    def _rows(self) -> tuple[list[Array], list[float], list[float]]:
        """The total; deviations; presence; limits."""
        n, placed = self.size, self.task.placed
        rows: list[Array] = []
        low: list[float] = []
        high: list[float] = []
        finest = min(p.step for p in placed)
        row = np.zeros(self.columns)
        row[:n] = [float(p.step / finest) for p in placed]
        at = self.task.total(self.origin)
        ends = [float((total - at) / finest) for total in self.totals]
        if self.second:
            row[-1] = ends[0] - ends[1]
        rows.append(row)
        # Where a step is no multiple of the finest one (litres times a density) an equality is at the mercy of
        # rounding, and the solver may find it met nowhere. Totals lie a common measure apart: a part of it lets in no
        # other.
        common = common_measure(placed)
        play = float(max(self.play, 0 if common == finest else Fraction(3, 10) * common) / finest)
        low.append(ends[0] - play)
        high.append(ends[0] + play)
        for j, p in enumerate(placed):
            off = float((p.step * self.origin[j] - p.share) / p.allowed)
            for sign in (1.0, -1.0):
                row = np.zeros(self.columns)
                row[n + j], row[j] = 1.0, -sign * float(p.step / p.allowed)
                rows.append(row)
                low.append(sign * off)
                high.append(np.inf)
        for place, j in enumerate(self.maybe):
            for steps, least, most in ((placed[j].lo, 0.0, np.inf), (placed[j].hi, -np.inf, 0.0)):
                row = np.zeros(self.columns)
                row[j], row[2 * n + place] = 1.0, -float(steps)
                rows.append(row)
                low.append(least)
                high.append(most)
        first = self._marks().start
        for k, terms, value, worst in self.sides:
            side = self.task.sides[k]
            guard = self.guard.get(side.limit, 0.0)
            row = np.zeros(self.columns)
            row[:n] = terms
            row[first + self.marks.index(side.limit)] = guard - worst
            end = guard - value
            if side.if_used is not None and side.if_used in self.maybe:
                # An absent line meets a least amount: the side is let go by worst x (1 - presence).
                row[2 * n + self.maybe.index(side.if_used)] = -(guard - worst)
                end -= guard - worst
            rows.append(row)
            low.append(end)
            high.append(np.inf)
        return rows, low, high

    def _run(
        self, aim: Array, matrix: Any, low: Array, high: Array, lower: Array, upper: Array, integrality: Array,
        time_limit_s: float,
    ) -> Found:
        with quiet():
            result = _milp(
                aim,
                integrality=integrality,
                bounds=scipy.optimize.Bounds(lower, upper),
                constraints=scipy.optimize.LinearConstraint(matrix, low, high),
                options={"mip_rel_gap": 0.0, "time_limit": max(time_limit_s, 0.01)},
            )
        bound = -math.inf if result.mip_dual_bound is None else float(result.mip_dual_bound)
        if result.status == 2:
            return Found(None, math.inf, True, none=True)
        if result.x is None:
            return Found(None, bound, False)
        moved = np.round(result.x[: self.size]).astype(int).tolist()
        return Found(tuple(m + k for m, k in zip(self.origin, moved, strict=True)), bound, result.status == 0)
