"""A linear program kept in HiGHS with its basis, for many neighbouring solves (highspy's public interface)."""

from __future__ import annotations

from typing import Any, Literal

import highspy
import numpy as np

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.program import Array

Verdict = Literal["optimal", "infeasible", "unbounded", "unclear"]
PRIMAL, DUAL = 4, 1

_STATUS: dict[Any, Verdict] = {
    highspy.HighsModelStatus.kOptimal: "optimal",
    highspy.HighsModelStatus.kInfeasible: "infeasible",
    highspy.HighsModelStatus.kUnbounded: "unbounded",
}


class _Silent(highspy.Highs):
    """HiGHS without the banner that its callbacks print on standard output as they are set up."""

    def enableCallbacks(self) -> None:
        pass


class Warm:
    """One linear program: minimise cost . x with the rows of some arrays, solved again and again from its last basis.

    strategy: PRIMAL where costs change (the basis stays feasible), DUAL where bounds do.
    """

    def __init__(self, arrays: Arrays, cost: Array | None = None, strategy: int = PRIMAL) -> None:
        m, n = arrays.a.shape
        solver: highspy.Highs = _Silent()  # type: ignore[no-untyped-call]
        solver.setOptionValue("output_flag", False)
        for option, value in (
            ("presolve", "off"),
            ("solver", "simplex"),
            ("simplex_strategy", DUAL),  # without a basis the dual simplex is several times faster
            ("primal_feasibility_tolerance", 1e-9),
            ("dual_feasibility_tolerance", 1e-9),
            ("threads", 1),
        ):
            solver.setOptionValue(option, value)
        model = highspy.HighsLp()
        model.num_col_, model.num_row_ = n, m
        model.col_cost_ = arrays.cost if cost is None else cost
        model.col_lower_, model.col_upper_ = arrays.lower, arrays.upper
        model.row_lower_ = arrays.b
        high = arrays.b.copy()
        high[: arrays.inequalities] = np.inf
        model.row_upper_ = high
        model.a_matrix_.format_ = highspy.MatrixFormat.kRowwise
        entries = arrays.a != 0.0
        model.a_matrix_.start_ = np.concatenate(([0], np.cumsum(entries.sum(axis=1)))).astype(np.int32)
        model.a_matrix_.index_ = entries.nonzero()[1].astype(np.int32)
        model.a_matrix_.value_ = arrays.a[entries]
        solver.passModel(model)
        self._solver = solver
        self._strategy = strategy
        self._started = False
        self._columns = np.arange(n, dtype=np.int32)
        self.cost = np.array(model.col_cost_, dtype=np.float64)

    def set_cost(self, cost: Array) -> None:
        """Costs of all columns, shape (n,)."""
        self._solver.changeColsCost(self._columns.size, self._columns, cost)
        self.cost = cost

    def set_column(self, j: int, lower: float, upper: float) -> None:
        """Bounds of one column."""
        self._solver.changeColBounds(j, lower, upper)

    def set_row(self, i: int, lower: float, upper: float) -> None:
        """Bounds of one row."""
        self._solver.changeRowBounds(i, lower, upper)

    def add_row(self, coefficients: Array, lower: float, upper: float) -> None:
        """One more row, shape (n,), after the others."""
        used = coefficients.nonzero()[0].astype(np.int32)
        self._solver.addRow(lower, upper, used.size, used, coefficients[used])

    def add_columns(self, coefficients: Array, cost: Array, lower: Array, upper: Array) -> None:
        """More columns after the others. coefficients: shape (m, k); the rest: shape (k,)."""
        rows = np.arange(coefficients.shape[0], dtype=np.int32)
        for k in range(cost.shape[0]):
            self._solver.addCol(
                float(cost[k]),
                float(lower[k]),
                float(upper[k]),
                rows.size,
                rows,
                np.ascontiguousarray(coefficients[:, k]),
            )

    def delete_columns(self, first: int, beyond: int) -> None:
        """Take columns first .. beyond - 1 away again."""
        self._solver.deleteCols(beyond - first, np.arange(first, beyond, dtype=np.int32))

    def basis(self) -> highspy.HighsBasis:
        """The basis of the last solve, for set_basis."""
        return self._solver.getBasis()

    def basis_parts(self) -> tuple[Indices, Indices, Indices]:
        """Basic columns, rows at a bound and columns at their upper bound in the last solve."""
        basis = self._solver.getBasis()
        columns, rows = np.array(basis.col_status), np.array(basis.row_status)
        basic, upper = highspy.HighsBasisStatus.kBasic, highspy.HighsBasisStatus.kUpper
        return (columns == basic).nonzero()[0], (rows != basic).nonzero()[0], (columns == upper).nonzero()[0]

    def set_basis(self, basis: highspy.HighsBasis) -> None:
        """Start the next solve from a basis of the same rows and columns."""
        self._solver.setBasis(basis)

    def set_strategy(self, strategy: int) -> None:
        """PRIMAL or DUAL from the next solve on."""
        self._strategy = strategy
        self._solver.setOptionValue("simplex_strategy", strategy)

    def forget(self) -> None:
        """Drop the basis: the next solve is a fresh one."""
        self._solver.clearSolver()
        self._fresh()

    def _fresh(self) -> None:
        self._started = False
        self._solver.setOptionValue("simplex_strategy", DUAL)

    def solve(self) -> Verdict:
        """Solve from the last basis; once more without it where that ends unclear."""
        self._solver.run()
        verdict = _STATUS.get(self._solver.getModelStatus(), "unclear")
        if verdict == "unclear":
            self.forget()
            self._solver.run()
            verdict = _STATUS.get(self._solver.getModelStatus(), "unclear")
        if not self._started:
            self._started = True
            self._solver.setOptionValue("simplex_strategy", self._strategy)
        return verdict

    def x(self) -> Array:
        """The columns of the last solve, shape (n,)."""
        return np.array(self._solver.getSolution().col_value, dtype=np.float64)

    def duals(self) -> Array:
        """The prices of the rows of the last solve, shape (m,): d(optimum)/d(row bound)."""
        return np.array(self._solver.getSolution().row_dual, dtype=np.float64)

    def reduced(self) -> Array:
        """The reduced costs of the last solve, shape (n,)."""
        return np.array(self._solver.getSolution().col_dual, dtype=np.float64)
