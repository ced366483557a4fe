"""Answers kept with their bases: after a change of prices most need no solve, and the rest only a few pivots."""

from __future__ import annotations

import dataclasses
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.basis import Basis, basis_of, inverse_of
from blendapp.optimise.linear import FailedSolve, Vertex
from blendapp.optimise.program import Array
from blendapp.optimise.solution import Solution
from blendapp.optimise.solve import snapshot
from blendapp.optimise.warm import PRIMAL, Warm

_SIGN = 1e-9  # a price of the wrong sign by more than this share of the largest cost ends a basis
_FEASIBLE = 1e-9
_GAP = 1e-7


class Repriced(NamedTuple):
    """stays: whether the old amounts are still optimal. x: the amounts now, shape (n,). objective: their cost now.
    as_before: the cost now of the old amounts."""

    stays: bool
    x: Array
    objective: float
    as_before: float


class _Test(NamedTuple):
    """What decides whether a basis stays optimal as costs change: y = cost[columns] @ inverse, the prices of rows, must
    be >= 0 where signed, turn (cost[others] - cost[columns] @ matrix) >= 0, and nought where exact."""

    columns: Indices
    rows: Indices
    inverse: Array
    signed: NDArray[np.bool_]
    others: Indices
    matrix: Array
    turn: Array
    exact: NDArray[np.bool_]


class Kept:
    """One answered linear program whose costs may change while all else stands.

    Raises ValueError for a solution without an answer, or of a mixed-integer program: there a basis proves nothing.
    """

    def __init__(self, solution: Solution) -> None:
        if solution.arrays is None or solution.x is None or solution.given:
            raise ValueError("only the answer of a linear program can be kept")
        self._arrays: Arrays = solution.arrays
        self._solution: Solution | None = solution
        self._x: Array = solution.x
        self._y: Array | None = solution.duals
        self._test: _Test | None = None
        self._warm: Warm | None = None

    def prepare(self) -> None:
        """Do beforehand what the first change of prices would have to: the test and the warm solver."""
        if self._test is None:
            self._test = self._fresh_test()
        if self._warm is None:
            self._warm = Warm(self._arrays, None, PRIMAL)
            self._warm.solve()

    def holds(self, cost: Array) -> bool:
        """Whether the basis of the last answer proves its amounts optimal at another cost, shape (n,). A no may be
        in vain where the optimum is degenerate."""
        if self._test is None:
            self._test = self._fresh_test()
        test = self._test
        basic = cost[test.columns]
        tolerance = _SIGN * float(np.abs(cost).max(initial=0.0))
        y = basic @ test.inverse
        if (y[test.signed] < -tolerance).any():
            return False
        reduced = test.turn * (cost[test.others] - basic @ test.matrix)
        return bool((reduced >= -tolerance).all() and (reduced[test.exact] <= tolerance).all())

    def reprice(self, cost: Array) -> Repriced:
        """The answer at another cost: the old amounts where they are still optimal, else solved from their basis and
        checked. Raises FailedSolve where that fails or falls for ever."""
        before = float(cost @ self._x)
        if self.holds(cost):
            self._arrays = dataclasses.replace(self._arrays, cost=cost)
            self._solution, self._y = None, None
            return Repriced(True, self._x, before, before)
        if self._warm is None:
            self._warm = Warm(self._arrays, None, PRIMAL)
            self._warm.solve()
        self._warm.set_cost(cost)
        if self._warm.solve() != "optimal":
            raise FailedSolve("after a change of prices no answer was found")
        arrays = dataclasses.replace(self._arrays, cost=cost)
        x, y = np.clip(self._warm.x(), arrays.lower, arrays.upper), self._warm.duals()
        y[: arrays.inequalities] = np.maximum(y[: arrays.inequalities], 0.0)
        _check(arrays, x, y)
        old = self._x
        self._arrays, self._x, self._y = arrays, x, y
        self._solution, self._test = None, None
        objective = float(cost @ x)
        size = max(1.0, float(np.abs(x).max(initial=0.0)))
        same = bool(np.abs(x - old).max() <= 1e-7 * size)
        return Repriced(same, x, objective, before)

    def solution(self) -> Solution:
        """The whole answer at the present costs."""
        return self._current()

    def _fresh_test(self) -> _Test:
        """From the solver's own basis after a solve here, else from the answer handed in."""
        if self._solution is None and self._warm is not None:
            basis = Basis(*self._warm.basis_parts())
            if basis.columns.size == basis.rows.size:
                return _test(self._arrays, basis, np.zeros(self._x.size, dtype=bool))
        solution = self._current()
        assert solution.face is not None
        return _test(self._arrays, basis_of(solution), solution.face.inside)

    def _current(self) -> Solution:
        if self._solution is None:
            if self._y is None:
                assert self._test is not None
                self._y = np.zeros(self._arrays.b.size)
                self._y[self._test.rows] = self._arrays.cost[self._test.columns] @ self._test.inverse
                self._y[: self._arrays.inequalities] = np.maximum(self._y[: self._arrays.inequalities], 0.0)
            program = dataclasses.replace(self._arrays.program, cost=self._arrays.cost)
            self._arrays = dataclasses.replace(self._arrays, program=program)
            self._solution = snapshot(self._arrays, Vertex(self._x, self._y))
        return self._solution


def _test(arrays: Arrays, basis: Basis, inside: NDArray[np.bool_]) -> _Test:
    """The test of a basis. inside: columns that must have no reduced cost though they are not in it: those of a mix
    between vertices."""
    inverse = inverse_of(arrays, basis)
    other = np.ones(arrays.cost.size, dtype=bool)
    other[basis.columns] = False
    other &= arrays.lower < arrays.upper
    others = other.nonzero()[0]
    turn = np.ones(arrays.cost.size)
    turn[basis.at_upper] = -1.0
    return _Test(
        columns=basis.columns,
        rows=basis.rows,
        inverse=inverse,
        signed=basis.rows < arrays.inequalities,
        others=others,
        matrix=inverse @ arrays.a[np.ix_(basis.rows, others)],
        turn=turn[others],
        exact=inside[others],
    )


def _check(arrays: Arrays, x: Array, y: Array) -> None:
    """The optimality conditions of a mix and its prices, on the arrays."""
    size = max(1.0, float(np.abs(x).max(initial=0.0)))
    slack = arrays.a @ x - arrays.b
    k = arrays.inequalities
    missed = max(-float(slack[:k].min(initial=0.0)), float(np.abs(slack[k:]).max(initial=0.0)))
    reduced = arrays.cost - y @ arrays.a
    falls, rises = reduced < 0, reduced > 0
    with np.errstate(invalid="ignore"):
        dual = y @ arrays.b + (
            np.where(rises, reduced * arrays.lower, 0.0) + np.where(falls, reduced * arrays.upper, 0.0)
        ).sum(where=np.abs(reduced) > 1e-12 * float(np.abs(arrays.cost).max(initial=0.0)))
    flow = float(np.abs(arrays.cost) @ np.abs(x)) or 1.0
    if missed > 3 * _FEASIBLE * size or not abs(float(arrays.cost @ x) - dual) <= _GAP * flow:
        raise FailedSolve("after a change of prices the answer did not stand up to its check")
