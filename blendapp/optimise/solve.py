"""Solve a program and hand out a frozen answer: amounts made clean, prices, the state of every limit."""

from __future__ import annotations

import dataclasses
import time

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise import face as faces
from blendapp.optimise import whole
from blendapp.optimise.arrays import Arrays, expand
from blendapp.optimise.face import Face
from blendapp.optimise.linear import FailedSolve, Vertex, optimum
from blendapp.optimise.program import Array, Program
from blendapp.optimise.solution import LimitState, Side, Solution

_MOST_SEARCHES = 20
_PROVEN = 1e-7  # the gap that an optimum may have
_NULL = 1e-8  # a price that moves less than this along the null space is fixed
TIED = 1e-9  # a reduced cost below this share of the largest cost is a tie
_PRICE_NOISE = 1e-11  # duals below this share of the largest cost are rounding


def solve(program: Program, time_limit_s: float | None = None) -> Solution:
    """The least-cost answer of a program, with prices; `stopped` if time_limit_s (seconds) ran out.

    Raises FailedSolve where the solver gives no clear status.
    """
    started = time.perf_counter()
    if program.integral:
        return _solve_whole(program, time_limit_s, started)
    arrays = expand(program)
    status, vertex = optimum(arrays, time_limit_s)
    if vertex is None:
        return Solution(status, priced=program, arrays=arrays, seconds=time.perf_counter() - started)
    return snapshot(arrays, vertex, started)


def snapshot(arrays: Arrays, vertex: Vertex, started: float | None = None) -> Solution:
    """Clean an optimum and read prices and limits from it. started: perf_counter when the work began."""
    face, x = _clean(arrays, vertex.x)
    y = _duals(arrays, face, vertex.y)
    reduced = arrays.cost - y @ arrays.a
    lower_price, upper_price = _column_prices(arrays, x, reduced)
    per_side = arrays.factor * y  # d(optimum)/d(bound as stated), before any divisor: turns maxima round
    minimum_price = np.zeros(len(arrays.program.rows))
    maximum_price = np.zeros(len(arrays.program.rows))
    low = arrays.side >= 0
    minimum_price[arrays.row[low]] = per_side[low]
    maximum_price[arrays.row[~low]] = per_side[~low]
    objective = float(arrays.cost @ x)
    at_lower, at_upper = lower_price > 0, upper_price < 0
    dual = float(
        y @ arrays.b + lower_price[at_lower] @ arrays.lower[at_lower] + upper_price[at_upper] @ arrays.upper[at_upper]
    )
    flow = float(np.abs(arrays.cost) @ np.abs(x))
    return Solution(
        status="optimal",
        x=x,
        objective=objective,
        gap=abs(objective - dual) / (flow if flow > 0 else 1.0),
        minimum_price=minimum_price,
        maximum_price=maximum_price,
        lower_price=lower_price,
        upper_price=upper_price,
        limits=_limits(arrays, face, x, y, reduced),
        priced=arrays.program,
        program=arrays.program,
        arrays=arrays,
        face=face,
        duals=y,
        seconds=0.0 if started is None else time.perf_counter() - started,
    )


def _clean(arrays: Arrays, raw: Array) -> tuple[Face, Array]:
    """Bounds made exact, then the free amounts solved afresh from the active rows, kept if no limit suffers."""
    face = faces.find(arrays, raw)
    x = np.where(face.inside, raw, np.where(raw - arrays.lower < arrays.upper - raw, arrays.lower, arrays.upper))
    if face.free.size and face.active.size:
        a = arrays.a[face.active]
        x[face.free] += face.inverse @ (arrays.b[face.active] - a @ x)
    if _violation(arrays, x) > max(_violation(arrays, raw), 0.1 * face.tolerance):
        return face, np.clip(raw, arrays.lower, arrays.upper)
    return face, x


def _violation(arrays: Arrays, x: Array) -> float:
    slack = arrays.a @ x - arrays.b
    k = arrays.inequalities
    worst = max(float((arrays.lower - x).max(initial=0.0)), float((x - arrays.upper).max(initial=0.0)))
    if k:
        worst = max(worst, -float(slack[:k].min()))
    if k < slack.shape[0]:
        worst = max(worst, float(np.abs(slack[k:]).max()))
    return worst


def _duals(arrays: Arrays, face: Face, raw: Array) -> Array:
    """Row duals: solved afresh where they are unique, else the solver's; rounding below nought removed."""
    k = arrays.inequalities
    y = np.zeros_like(raw)
    if face.degree == 0 and face.active.size:
        y[face.active] = arrays.cost[face.free] @ face.inverse
    else:
        y[face.active] = raw[face.active]
    noise = _PRICE_NOISE * float(np.abs(arrays.cost).max(initial=0.0))
    y[np.abs(y) <= noise] = 0.0
    if k and y[:k].min() < 0.0:
        y[:k] = np.maximum(raw[:k], 0.0) if y[:k].min() < -1e3 * noise else np.maximum(y[:k], 0.0)
    return y


def _column_prices(arrays: Arrays, x: Array, reduced: Array) -> tuple[Array, Array]:
    """Split reduced costs over the two bounds: >= 0 on the lower, <= 0 on the upper."""
    lower_price = np.where((reduced > 0.0) & (arrays.lower > -np.inf), reduced, 0.0)
    upper_price = np.where((reduced < 0.0) & (arrays.upper < np.inf), reduced, 0.0)
    return lower_price, upper_price


def _limits(arrays: Arrays, face: Face, x: Array, y: Array, reduced: Array) -> dict[int, LimitState]:
    """State of every limit. Prices only where the null space does not move them."""
    program = arrays.program
    limits: dict[int, LimitState] = {}
    sides: dict[int, list[int]] = {}
    for position, k in enumerate(face.active.tolist()):
        sides.setdefault(int(arrays.row[k]), []).append(position)
    fixed_price = np.abs(face.null).max(axis=1, initial=0.0) <= _NULL
    single = alone(arrays, face, y, reduced)
    for i, row in enumerate(program.rows):
        if row.limit is None:
            continue
        per = 1.0 if row.divisor is None else float(row.divisor @ x)
        if abs(per) <= face.tolerance * (1.0 if row.divisor is None else float(np.abs(row.divisor).max())):
            limits[row.limit] = LimitState(None, None, True, 0.0)
            continue
        value = float(row.numerator @ x) / per
        binding: Side | None = None
        price: float | None = 0.0
        for position in sides.get(i, ()):
            k = int(face.active[position])
            minimum = arrays.side[k] > 0 or (arrays.side[k] == 0 and y[k] >= 0.0)
            binding = "minimum" if minimum else "maximum"
            value = float(arrays.bound[k])
            # among several optimal mixes, what the bound multiplies may differ, and with it the two slopes
            fixed = fixed_price[position] and (row.divisor is None or single or y[k] == 0.0)
            price = float(y[k] * arrays.factor[k]) * per if fixed else None
        limits[row.limit] = LimitState(value, binding, price is not None, price)
    if program.bounds:
        _column_limits(arrays, face, x, reduced, limits)
    return limits


def alone(arrays: Arrays, face: Face, y: Array, reduced: Array) -> bool:
    """Whether no other mix costs the same, told by prices that are nowhere nought (so it may say no in vain)."""
    noise = TIED * float(np.abs(arrays.cost).max(initial=0.0))
    idle = ~face.inside & (arrays.lower < arrays.upper)
    held = face.active[face.active < arrays.inequalities]
    return bool(face.spare == 0 and (np.abs(reduced[idle]) > noise).all() and (y[held] > noise).all())


def _column_limits(arrays: Arrays, face: Face, x: Array, reduced: Array, limits: dict[int, LimitState]) -> None:
    """State of limits that are bounds of one column. Two that hold the same side share its price: not unique."""
    program = arrays.program
    tolerance = face.tolerance
    holders: dict[tuple[int, bool], int] = {}
    for bound in program.bounds:
        j = bound.column
        for upper, end in ((False, bound.minimum), (True, bound.maximum)):
            if end is not None and abs(x[j] - end) <= tolerance:
                holders[j, upper] = holders.get((j, upper), 0) + 1
    for j, upper in holders:
        own = program.upper[j] if upper else program.lower[j]
        if abs(x[j] - own) <= tolerance:
            holders[j, upper] += 1
    for bound in program.bounds:
        j = bound.column
        at_low = bound.minimum is not None and abs(x[j] - bound.minimum) <= tolerance
        at_high = bound.maximum is not None and abs(x[j] - bound.maximum) <= tolerance
        if not (at_low or at_high):
            limits[bound.limit] = LimitState(float(x[j]), None, True, 0.0)
            continue
        d = float(reduced[j])
        target = at_low and at_high
        binding: Side = "minimum" if at_low and (d >= 0.0 or not at_high) else "maximum"
        others = holders.get((j, False), 0) + holders.get((j, True), 0) - at_low - at_high
        fixed = others == 0 and (target or not (at_low and x[j] >= arrays.upper[j] - tolerance))
        fixed = fixed and (target or not (at_high and x[j] <= arrays.lower[j] + tolerance))
        if fixed and face.degree:
            moves = arrays.a[face.active, j] @ face.null
            fixed = bool(np.abs(moves).max() <= _NULL)
        limits[bound.limit] = LimitState(float(x[j]), binding, bool(fixed), d if fixed else None)


def _solve_whole(program: Program, time_limit_s: float | None, started: float) -> Solution:
    """Choose by the mixed-integer program, then price the linear program with that choice fixed.

    The search takes a mark within 1e-6 of no for a no, and limits as met within 1e-6. A choice that needed this is
    forbidden; one that costs more than the bound found becomes the ceiling of a closer search.
    """
    excluded: list[NDArray[np.bool_]] = []
    best: Solution | None = None
    bound = -np.inf
    for _ in range(_MOST_SEARCHES):
        left = None if time_limit_s is None else max(time_limit_s - (time.perf_counter() - started), 0.01)
        choice = whole.choose(program, left, tuple(excluded), None if best is None else best.objective)
        if choice.x is None:
            break
        found = [_fixed(program, reading, started) for reading in whole.readings(program, choice)]
        answers = [one for one in found if one is not None]
        if not answers:
            excluded.append(choice.used)
            continue
        bound = max(bound, choice.dual_bound)
        best = min((*answers, *([] if best is None else [best])), key=lambda one: one.objective or 0.0)
        best = dataclasses.replace(best, status=choice.status, gap=_gap(program, best, bound))
        assert best.gap is not None
        if best.status != "optimal" or best.gap <= _PROVEN:
            return best
    if best is not None:  # not proven least within what is asked of an optimum: then it is the best found
        return dataclasses.replace(best, status="stopped")
    if choice.x is not None:
        raise FailedSolve("no choice of columns that the search offers meets the limits")
    return Solution(choice.status, program=program, given=True, seconds=time.perf_counter() - started)


def _fixed(program: Program, choice: whole.Choice, started: float) -> Solution | None:
    """The answer with a choice fixed; None where the limits cannot be met with it."""
    arrays = expand(whole.restrict(program, choice))
    _, vertex = optimum(arrays)
    if vertex is None:
        return None
    linear = snapshot(arrays, vertex, started)
    assert linear.x is not None
    assert linear.objective is not None
    limits = dict(linear.limits)
    whole.choice_states(program, choice, linear.x, limits)
    return dataclasses.replace(
        linear,
        status=choice.status,
        gap=_gap(program, linear, choice.dual_bound),
        limits=limits,
        program=program,
        given=True,
        seconds=time.perf_counter() - started,
    )


def _gap(program: Program, solution: Solution, bound: float) -> float:
    """How far above a bound the cost lies, over the money that flows."""
    assert solution.x is not None
    assert solution.objective is not None
    flow = float(np.abs(program.cost) @ np.abs(solution.x))
    return max(solution.objective - bound, 0.0) / (flow if flow > 0 else 1.0)
