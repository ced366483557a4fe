"""Mixed-integer programs: which columns are used, and whole amounts. Prices come later, with that choice fixed."""

from __future__ import annotations

import contextlib
import ctypes
import dataclasses
import os
import sys
from collections.abc import Iterator
from typing import Any, NamedTuple

import numpy as np
import scipy.optimize
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays, expand
from blendapp.optimise.linear import optimum
from blendapp.optimise.program import Array, Bound, Program, Row
from blendapp.optimise.solution import LimitState, Status

_milp: Any = scipy.optimize.milp
_USED = 1e-9  # an amount above this counts as used
_ENDLESS = 1e5  # stands for "no upper end" of a column whose reach is unlimited


class Choice(NamedTuple):
    """x: shape (n,), None where there is none. used: mask of the columns that may be above zero, shape (n,).
    dual_bound: no choice costs less."""

    status: Status
    x: Array | None
    used: NDArray[np.bool_]
    dual_bound: float


def choose(
    program: Program,
    time_limit_s: float | None = None,
    excluded: tuple[NDArray[np.bool_], ...] = (),
    ceiling: float | None = None,
) -> Choice:
    """Solve the mixed-integer program. excluded: masks of choices not to be offered again. ceiling: a cost that a mix
    is known to have: what costs more is left out, which keeps the marked columns' upper ends close."""
    if ceiling is not None:
        slack = 1e-9 * max(abs(ceiling), 1e-9)
        cap = Row(program.cost, None, ceiling + slack)
        program = dataclasses.replace(program, rows=(*program.rows, cap))
    n = program.size
    arrays = expand(program)
    lower, upper = arrays.lower.copy(), arrays.upper.copy()
    least = np.zeros(n) if program.least_if_used is None else program.least_if_used
    must = (least > 0) & (lower > 0)
    lower[must] = np.maximum(lower[must], least[must])
    upper[(least > 0) & (lower <= 0) & (upper < least)] = 0.0
    none = Choice("infeasible", None, np.zeros(n, dtype=bool), -np.inf)
    if (lower > upper).any():
        return none
    marked = _marked(program)
    _bound_marked(arrays, marked, lower, upper, all_of_them=ceiling is not None)
    matrix, low, high = _constraints(program, arrays, marked, least, lower, upper, excluded)
    k = marked.size
    integrality = np.zeros(n + k)
    if program.whole is not None:
        integrality[:n][program.whole] = 1
    integrality[n:] = 1
    peak = float(np.abs(program.cost).max(initial=0.0))
    scale = float(2.0 ** (10 - np.frexp(peak)[1])) if peak > 0 else 1.0
    options: dict[str, Any] = {"mip_rel_gap": 0.0}
    if time_limit_s is not None:
        options["time_limit"] = time_limit_s
    with _quiet():
        result = _milp(
            np.concatenate((program.cost * scale, np.zeros(k))),
            integrality=integrality,
            bounds=scipy.optimize.Bounds(np.concatenate((lower, np.zeros(k))), np.concatenate((upper, np.ones(k)))),
            constraints=scipy.optimize.LinearConstraint(matrix, low, high),
            options=options,
        )
    if result.status == 2:
        return none
    if result.status == 3:
        return none._replace(status="unbounded")
    if result.status == 4:
        relaxed, _ = optimum(arrays, cost=np.zeros(n))
        return none._replace(status="infeasible" if relaxed == "infeasible" else "unbounded")
    dual_bound = -np.inf if result.mip_dual_bound is None else float(result.mip_dual_bound) / scale
    status: Status = "optimal" if result.status == 0 else "stopped"
    if result.x is None:
        return none._replace(status="stopped", dual_bound=dual_bound)
    x = np.asarray(result.x[:n], dtype=np.float64)
    if marked.size and (x[marked] >= 0.999 * _ENDLESS).any():
        return none._replace(status="unbounded")
    used = x > _USED
    used[marked] = result.x[n:] > 0.5
    return Choice(status, x, used, dual_bound)


def restrict(program: Program, choice: Choice) -> Program:
    """The linear program with the choice fixed: columns not chosen held at 0, chosen ones at their least amount or
    above (as a bound of that limit), whole amounts at their number."""
    assert choice.x is not None
    lower, upper = program.lower.astype(np.float64), program.upper.astype(np.float64)
    bounds = list(program.bounds)
    for j in _marked(program).tolist():
        if not choice.used[j]:
            if lower[j] <= 0.0:
                upper[j] = 0.0
        elif program.least_if_used is not None and program.least_if_used[j] > 0:
            limit = -1 if program.least_limit is None else int(program.least_limit[j])
            if limit >= 0:
                bounds.append(Bound(j, float(program.least_if_used[j]), None, limit))
            else:
                lower[j] = max(lower[j], float(program.least_if_used[j]))
    if program.whole is not None:
        number = np.round(choice.x[program.whole])
        lower[program.whole] = number
        upper[program.whole] = number
    return dataclasses.replace(
        program,
        lower=lower,
        upper=upper,
        bounds=tuple(bounds),
        whole=None,
        least_if_used=None,
        least_limit=None,
        counts=(),
    )


def readings(program: Program, choice: Choice) -> list[Choice]:
    """What the solver's choice may mean: its marks, and, where something trickled past a mark, that taken as used,
    if the counts allow it."""
    assert choice.x is not None
    trickled = choice.used | (choice.x > _USED * max(1.0, float(np.abs(choice.x).max())))
    if (trickled == choice.used).all() or any(
        int(trickled[list(count.columns)].sum()) > count.most for count in program.counts
    ):
        return [choice]
    return [choice, choice._replace(used=trickled)]


def choice_states(program: Program, choice: Choice, x: Array, limits: dict[int, LimitState]) -> None:
    """Add the state of the limits that the restricted program does not hold: counts, and least amounts unused."""
    if program.least_if_used is not None and program.least_limit is not None:
        for j in (program.least_limit >= 0).nonzero()[0].tolist():
            if not choice.used[j] or program.least_if_used[j] <= 0:
                limits[int(program.least_limit[j])] = LimitState(float(x[j]), None, True, 0.0)
    count_states(program, x, limits)


def count_states(program: Program, x: Array, limits: dict[int, LimitState]) -> None:
    """Add the state of the counts."""
    for count in program.counts:
        value = int((x[list(count.columns)] > _USED).sum())
        limits[count.limit] = LimitState(float(value), "maximum" if value >= count.most else None, None, None)


def _marked(program: Program) -> NDArray[np.int64]:
    """Columns that need a yes or no: a least amount if used, or a place in a count."""
    marked = np.zeros(program.size, dtype=bool)
    if program.least_if_used is not None:
        marked |= program.least_if_used > 0
    for count in program.counts:
        marked[list(count.columns)] = True
    return marked.nonzero()[0]


def _bound_marked(arrays: Arrays, marked: NDArray[np.int64], lower: Array, upper: Array, all_of_them: bool) -> None:
    """Give every marked column a finite upper end, or all_of_them a closer one: the most that the linear program
    lets it reach. A mark counts as no within 1e-6, so that much of the upper end can trickle past it."""
    for j in marked.tolist():
        if np.isfinite(upper[j]) and not all_of_them:
            continue
        cost = np.zeros(lower.shape[0])
        cost[j] = -1.0
        _, vertex = optimum(arrays, cost=cost)
        reach = _ENDLESS if vertex is None else max(float(vertex.x[j]) * (1 + 1e-9), 0.0)
        upper[j] = min(upper[j], max(reach, lower[j]))


def _constraints(
    program: Program,
    arrays: Arrays,
    marked: NDArray[np.int64],
    least: Array,
    lower: Array,
    upper: Array,
    excluded: tuple[NDArray[np.bool_], ...],
) -> tuple[Array, Array, Array]:
    """Rows over x and the marks z: the program's own; x <= upper z; x >= least z; counts; excluded choices."""
    n, k = program.size, marked.size
    rows: list[Array] = [np.hstack((arrays.a, np.zeros((arrays.a.shape[0], k))))]
    low: list[Array] = [arrays.b]
    high: list[Array] = [np.where(np.arange(arrays.b.size) < arrays.inequalities, np.inf, arrays.b)]
    on = np.zeros((k, n + k))
    on[np.arange(k), marked] = 1.0
    on[np.arange(k), n + np.arange(k)] = -upper[marked]
    rows.append(on)
    low.append(np.full(k, -np.inf))
    high.append(np.zeros(k))
    off = np.zeros((k, n + k))
    off[np.arange(k), marked] = 1.0
    off[np.arange(k), n + np.arange(k)] = -least[marked]
    keep = least[marked] > 0
    rows.append(off[keep])
    low.append(np.zeros(int(keep.sum())))
    high.append(np.full(int(keep.sum()), np.inf))
    place = {int(j): n + p for p, j in enumerate(marked.tolist())}
    for count in program.counts:
        row = np.zeros((1, n + k))
        row[0, [place[j] for j in count.columns]] = 1.0
        rows.append(row)
        low.append(np.array([-np.inf]))
        high.append(np.array([float(count.most)]))
    for used in excluded:
        row = np.zeros((1, n + k))
        row[0, n:] = np.where(used[marked], 1.0, -1.0)
        rows.append(row)
        low.append(np.array([-np.inf]))
        high.append(np.array([float(used[marked].sum()) - 1.0]))
    return np.vstack(rows), np.concatenate(low), np.concatenate(high)


def _flush() -> None:
    with contextlib.suppress(OSError, AttributeError):
        ctypes.CDLL("ucrtbase" if sys.platform == "win32" else None).fflush(None)


@contextlib.contextmanager
def _quiet() -> Iterator[None]:
    """Send what the solver's own code prints nowhere: it can print a line though told not to."""
    try:
        sys.stdout.flush()
        kept = os.dup(1)
    except (OSError, ValueError, AttributeError):  # a program without a standard output
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    try:
        os.dup2(nowhere, 1)
        yield
    finally:
        _flush()  # or what was printed stays in C's buffer and comes out later
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)
