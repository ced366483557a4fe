"""Prove an answer in rational arithmetic: a basis that is exactly feasible and exactly optimal for the numbers given.

Every number of the program is a binary fraction and is taken as it stands (or as the decimal that was typed). The
basis found in floating point is solved exactly; where rounding left it a hair outside, exact pivots lead on to one
that holds. The proof is that basis: its mix meets every limit and its prices have the right signs.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.basis import basis_of
from blendapp.optimise.program import Program
from blendapp.optimise.solution import Solution

_MOST_PIVOTS = 200
_CLOSE = 1e-7

Exact = list[Fraction]


class NotProven(ArithmeticError):
    """No exactly optimal basis was found: the limits may contradict each other by less than rounding."""


@dataclass(frozen=True)
class Proof:
    """objective: the exact least cost. x: the exact mix of the basis. price: the exact price of each arrays' row, >= 0
    for inequalities. columns, rows: the basis: columns between their bounds and rows held. pivots: exact pivots that
    were needed after the floating-point basis."""

    objective: Fraction
    x: tuple[Fraction, ...]
    price: tuple[Fraction, ...]
    columns: tuple[int, ...]
    rows: tuple[int, ...]
    pivots: int


def prove(solution: Solution, as_typed: bool = False) -> Proof:
    """Prove that the objective of an optimal answer is the least there is, exactly, and equal to 1e-7.

    as_typed: take each number of the program as its shortest decimal instead of as the binary fraction that stands for
    it: right where the program's numbers were typed, not computed.
    Of a mixed-integer answer it is proven for the linear program with the choice fixed. Raises NotProven, and
    ValueError where there is no answer.
    """
    if solution.arrays is None or solution.face is None or solution.x is None or solution.duals is None:
        raise ValueError("only an answer can be proven")
    system = _System(solution.arrays, _as_typed if as_typed else Fraction)
    found = basis_of(solution)
    columns, rows, at_upper = (set(part.tolist()) for part in found)
    for pivots in range(_MOST_PIVOTS):
        x, price, reduced = system.solve(columns, rows, at_upper)
        step = system.pivot(columns, rows, at_upper, x, price, reduced)
        if step is None:
            objective = sum((c * v for c, v in zip(system.cost, x, strict=True)), Fraction(0))
            flow = float(np.abs(solution.arrays.cost) @ np.abs(solution.x)) or 1.0
            assert solution.objective is not None
            if abs(float(objective) - solution.objective) > _CLOSE * flow:
                raise NotProven("the exact least cost is another")
            return Proof(objective, tuple(x), tuple(price), tuple(sorted(columns)), tuple(sorted(rows)), pivots)
        columns, rows, at_upper = step
    raise NotProven("no exactly optimal basis was found")


class _System:
    """The program in fractions: a x >= b, the last rows = b, lower <= x <= upper."""

    def __init__(self, arrays: Arrays, read: Callable[[float], Fraction]) -> None:
        program: Program = arrays.program
        self.inequalities = arrays.inequalities
        self.cost = [read(float(c)) for c in arrays.cost]
        self.lower: list[Fraction | None] = [_end(float(v), read) for v in arrays.lower]
        self.upper: list[Fraction | None] = [_end(float(v), read) for v in arrays.upper]
        self.a: list[Exact] = []
        self.b: Exact = []
        for k, i in enumerate(arrays.row.tolist()):
            row = program.rows[i]
            sign = -1 if arrays.side[k] < 0 else 1
            bound = read(float(arrays.bound[k]))
            entries = [read(float(v)) for v in row.numerator]
            if row.divisor is not None:
                entries = [n - bound * read(float(d)) for n, d in zip(entries, row.divisor, strict=True)]
                bound = Fraction(0)
            self.a.append([sign * v for v in entries])
            self.b.append(sign * bound)

    def solve(self, columns: set[int], rows: set[int], at_upper: set[int]) -> tuple[Exact, Exact, Exact]:
        """x, prices of all rows and reduced costs of a basis, exactly."""
        basic, held = sorted(columns), sorted(rows)
        x: Exact = []
        for j in range(len(self.cost)):
            end = self.upper[j] if j in at_upper and self.upper[j] is not None else self.lower[j]
            if end is None:
                end = self.upper[j]
            x.append(Fraction(0) if j in columns or end is None else end)
        idle = [j for j in range(len(x)) if j not in columns and x[j] != 0]
        right = [self.b[k] - sum((self.a[k][j] * x[j] for j in idle), Fraction(0)) for k in held]
        matrix = [[self.a[k][j] for j in basic] for k in held]
        for j, value in zip(basic, _solve(matrix, right), strict=True):
            x[j] = value
        turned = [[self.a[k][j] for k in held] for j in basic]
        y = [Fraction(0)] * len(self.b)
        for k, value in zip(held, _solve(turned, [self.cost[j] for j in basic]), strict=True):
            y[k] = value
        reduced = [
            c - sum((y[k] * self.a[k][j] for k in held), Fraction(0)) if j not in columns else Fraction(0)
            for j, c in enumerate(self.cost)
        ]
        return x, y, reduced

    def pivot(
        self, columns: set[int], rows: set[int], at_upper: set[int], x: Exact, y: Exact, reduced: Exact
    ) -> tuple[set[int], set[int], set[int]] | None:
        """The next basis, None where this one is optimal: a dual pivot while the mix misses a limit by a hair, then
        primal ones while the cost can fall by one."""
        outside = self._outside(columns, rows, x)
        gains = self._gains(columns, rows, at_upper, y, reduced)
        if not outside and not gains:
            return None
        if outside:
            return self._dual_pivot(columns, rows, at_upper, y, reduced, outside[0])
        return self._primal_pivot(columns, rows, at_upper, x, gains[0])

    def _outside(self, columns: set[int], rows: set[int], x: Exact) -> list[tuple[str, int, int]]:
        """What the mix misses: (kind, index, direction in which it must move)."""
        found: list[tuple[str, int, int]] = []
        for j in sorted(columns):
            low, high = self.lower[j], self.upper[j]
            if low is not None and x[j] < low:
                found.append(("column", j, 1))
            elif high is not None and x[j] > high:
                found.append(("column", j, -1))
        for k in range(len(self.b)):
            if k not in rows:
                slack = self._activity(k, x) - self.b[k]
                if slack < 0:
                    found.append(("row", k, 1))
                elif slack > 0 and k >= self.inequalities:
                    found.append(("row", k, -1))
        return found

    def _gains(
        self, columns: set[int], rows: set[int], at_upper: set[int], y: Exact, reduced: Exact
    ) -> list[tuple[str, int, int]]:
        """What could lower the cost: (kind, index, direction in which it may move)."""
        found: list[tuple[str, int, int]] = []
        for j in range(len(self.cost)):
            if j in columns or (self.lower[j] is not None and self.lower[j] == self.upper[j]):
                continue
            free = self.lower[j] is None and self.upper[j] is None
            if reduced[j] < 0 and (free or not self._sits_high(j, at_upper)):
                found.append(("column", j, 1))
            elif reduced[j] > 0 and (free or self._sits_high(j, at_upper)):
                found.append(("column", j, -1))
        found += [("row", k, 1) for k in sorted(rows) if k < self.inequalities and y[k] < 0]
        return found

    def _sits_high(self, j: int, at_upper: set[int]) -> bool:
        return self.upper[j] is not None and (j in at_upper or self.lower[j] is None)

    def _activity(self, k: int, x: Exact) -> Fraction:
        return sum((v * w for v, w in zip(self.a[k], x, strict=True) if v and w), Fraction(0))

    def _follow(self, columns: set[int], rows: set[int], kind: str, index: int) -> dict[int, Fraction]:
        """How the basic columns follow when an idle column, or the right-hand side of a held row, rises by one."""
        basic, held = sorted(columns), sorted(rows)
        right = [-self.a[k][index] if kind == "column" else Fraction(int(k == index)) for k in held]
        return dict(zip(basic, _solve([[self.a[k][j] for j in basic] for k in held], right), strict=True))

    def _primal_pivot(
        self, columns: set[int], rows: set[int], at_upper: set[int], x: Exact, entering: tuple[str, int, int]
    ) -> tuple[set[int], set[int], set[int]]:
        kind, index, direction = entering
        rates = {j: direction * v for j, v in self._follow(columns, rows, kind, index).items()}
        own: Fraction | None = None
        if kind == "column":
            rates[index] = Fraction(direction)
            low, high = self.lower[index], self.upper[index]
            own = None if low is None or high is None else high - low
        best: tuple[Fraction, str, int] | None = None if own is None else (own, "flip", index)
        for j in sorted(columns):
            end = self.upper[j] if rates[j] > 0 else self.lower[j]
            if rates[j] != 0 and end is not None:
                step = (end - x[j]) / rates[j]
                if best is None or step < best[0]:
                    best = (step, "column", j)
        for k in range(len(self.b)):
            if k not in rows:
                rate = sum((self.a[k][j] * v for j, v in rates.items()), Fraction(0))
                slack = self._activity(k, x) - self.b[k]
                if rate < 0 or (rate > 0 and k >= self.inequalities):
                    step = -slack / rate
                    if best is None or step < best[0]:
                        best = (step, "row", k)
        if best is None:
            raise NotProven("the cost can fall for ever in exact arithmetic")
        _, leaving, other = best
        columns, rows, at_upper = set(columns), set(rows), set(at_upper)
        if leaving == "flip":
            at_upper ^= {index}
            return columns, rows, at_upper
        if kind == "column":
            columns.add(index)
            at_upper.discard(index)
        else:
            rows.discard(index)
        if leaving == "column":
            columns.discard(other)
            if rates[other] > 0:
                at_upper.add(other)
        else:
            rows.add(other)
        return columns, rows, at_upper

    def _dual_pivot(
        self,
        columns: set[int],
        rows: set[int],
        at_upper: set[int],
        y: Exact,
        reduced: Exact,
        leaving: tuple[str, int, int],
    ) -> tuple[set[int], set[int], set[int]]:
        """Bring in what costs least, among what moves the missed column or row its way."""
        kind, index, direction = leaving
        basic, held = sorted(columns), sorted(rows)
        target = [Fraction(int(j == index)) if kind == "column" else self.a[index][j] for j in basic]
        # weights of the held rows by which the missed quantity is a combination of them and of idle columns
        weights = dict(zip(held, _solve([[self.a[k][j] for k in held] for j in basic], target), strict=True))
        best: tuple[Fraction, str, int] | None = None
        for j in range(len(self.cost)):
            if j in columns or (self.lower[j] is not None and self.lower[j] == self.upper[j]):
                continue
            own = self.a[index][j] if kind == "row" else Fraction(0)
            effect = own - sum((weights[k] * self.a[k][j] for k in held), Fraction(0))
            free = self.lower[j] is None and self.upper[j] is None
            way = direction * effect
            may = way != 0 if free else (way < 0 if self._sits_high(j, at_upper) else way > 0)
            if may:
                ratio = abs(reduced[j]) / abs(effect)
                if best is None or ratio < best[0]:
                    best = (ratio, "column", j)
        for k in held:
            if k < self.inequalities and direction * weights[k] > 0:
                ratio = abs(y[k]) / abs(weights[k])
                if best is None or ratio < best[0]:
                    best = (ratio, "row", k)
        if best is None:
            raise NotProven("in exact arithmetic the limits contradict each other")
        _, entering, other = best
        columns, rows, at_upper = set(columns), set(rows), set(at_upper)
        if entering == "column":
            columns.add(other)
            at_upper.discard(other)
        else:
            rows.discard(other)
        if kind == "column":
            columns.discard(index)
            if direction < 0:
                at_upper.add(index)
            else:
                at_upper.discard(index)
        else:
            rows.add(index)
        return columns, rows, at_upper


def _end(value: float, read: Callable[[float], Fraction]) -> Fraction | None:
    return None if math.isinf(value) else read(value)


def _as_typed(value: float) -> Fraction:
    return Fraction(repr(value))


def _solve(matrix: list[Exact], right: Exact) -> Exact:
    """Solve a square system exactly, without fractions on the way (Bareiss, Mathematics of Computation 22, 1968)."""
    n = len(matrix)
    work: list[list[int]] = []
    for row, value in zip(matrix, right, strict=True):
        entries = [*row, value]
        common = math.lcm(*(v.denominator for v in entries))
        work.append([int(v * common) for v in entries])
    previous = 1
    for k in range(n):
        at = next((i for i in range(k, n) if work[i][k] != 0), None)
        if at is None:
            raise NotProven("the basis is singular in exact arithmetic")
        work[k], work[at] = work[at], work[k]
        pivot = work[k][k]
        for i in range(k + 1, n):
            factor = work[i][k]
            work[i] = [0] * (k + 1) + [
                (pivot * work[i][c] - factor * work[k][c]) // previous for c in range(k + 1, n + 1)
            ]
        previous = pivot
    x: Exact = [Fraction(0)] * n
    for i in range(n - 1, -1, -1):
        total = Fraction(work[i][n]) - sum((work[i][c] * x[c] for c in range(i + 1, n)), Fraction(0))
        x[i] = total / work[i][i]
    return x
