"""One linear program through scipy's linprog (HiGHS). This file alone owns the signs of the solver's marginals."""

from __future__ import annotations

from typing import Any, Literal, NamedTuple

import numpy as np
import scipy.optimize

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.program import Array

Verdict = Literal["optimal", "infeasible", "unbounded", "stopped"]

_linprog: Any = scipy.optimize.linprog  # its overloads know neither arrays of bounds nor options made at run time
_FIRST = {"presolve": False, "primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10}
_SECOND = {"presolve": True, "primal_feasibility_tolerance": 1e-9, "dual_feasibility_tolerance": 1e-9}
_THIRD: dict[str, Any] = {"presolve": True}
_SHORT = 1e-9
_OPTIMAL, _LIMIT, _INFEASIBLE, _UNBOUNDED = 0, 1, 2, 3


class FailedSolve(RuntimeError):
    """The solver ended without a clear status."""


class Vertex(NamedTuple):
    """x and the duals of the rows (>= 0 for inequalities), as the solver found them."""

    x: Array
    y: Array


def optimum(
    arrays: Arrays, time_limit_s: float | None = None, cost: Array | None = None
) -> tuple[Verdict, Vertex | None]:
    """Status and vertex of the linear program: presolve off, on where that does not end in a clear status.

    cost: shape (n,), in place of the arrays' own. Raises FailedSolve where no attempt ends in a clear status.
    """
    objective = arrays.cost if cost is None else cost
    if arrays.crossed.size:
        return "infeasible", None
    k = arrays.inequalities
    count = arrays.a.shape[0]
    if not objective.size:  # no columns: the rows hold as they are or never
        met = not (arrays.b[:k] > 0).any() and not arrays.b[k:].any()
        return ("optimal", Vertex(np.zeros(0), np.zeros(count))) if met else ("infeasible", None)
    bounds = np.stack((arrays.lower, arrays.upper), axis=1)
    call: dict[str, Any] = {"bounds": bounds, "method": "highs-ds"}
    if k:
        call["A_ub"], call["b_ub"] = -arrays.a[:k], -arrays.b[:k]
    if count > k:
        call["A_eq"], call["b_eq"] = arrays.a[k:], arrays.b[k:]
    verdicts: list[int] = []
    for options in (_FIRST, _SECOND, _THIRD):
        if time_limit_s is not None:
            options = {**options, "time_limit": time_limit_s}
        result = _linprog(objective, options=options, **call)
        if result.status == _OPTIMAL:
            y = np.empty(count)
            if k:
                y[:k] = -result.ineqlin.marginals
            if count > k:
                y[k:] = result.eqlin.marginals
            return "optimal", Vertex(np.asarray(result.x, dtype=np.float64), y)
        if result.status == _LIMIT:
            return "stopped", None
        # one verdict of a simplex run without presolve is not enough for a "no": ask again with presolve
        if result.status in verdicts and result.status in (_INFEASIBLE, _UNBOUNDED):
            return ("infeasible" if result.status == _INFEASIBLE else "unbounded"), None
        verdicts.append(result.status)
    short = shortage(arrays)
    if short is not None and short > _SHORT:
        return "infeasible", None
    if short is not None and _UNBOUNDED in verdicts:
        return "unbounded", None
    raise FailedSolve(f"the solver gave no clear answer: {result.message}")


def shortage(arrays: Arrays) -> float | None:
    """The least sum of scaled shortfalls with which all rows can be met: 0 where the program is feasible. Always has
    an answer, unless the solver fails (None)."""
    k, (count, n) = arrays.inequalities, arrays.a.shape
    more = np.hstack((arrays.a, np.eye(count), np.vstack((np.zeros((k, count - k)), -np.eye(count - k)))))
    bounds = np.zeros((more.shape[1], 2))
    bounds[:n, 0], bounds[:n, 1] = arrays.lower, arrays.upper
    bounds[n:, 1] = np.inf
    cost = np.concatenate((np.zeros(n), np.ones(more.shape[1] - n)))
    call: dict[str, Any] = {"bounds": bounds, "method": "highs-ds", "options": _SECOND}
    if k:
        call["A_ub"], call["b_ub"] = -more[:k], -arrays.b[:k]
    if count > k:
        call["A_eq"], call["b_eq"] = more[k:], arrays.b[k:]
    result = _linprog(cost, **call)
    return float(result.fun) if result.status == _OPTIMAL else None
