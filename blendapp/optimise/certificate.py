"""Check an answer without the solver: from the program as stated and the numbers handed out, nothing else."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from blendapp.optimise.program import Array, Program
from blendapp.optimise.solution import Solution

VIOLATION = 1e-9  # of a row over its largest coefficient, and of a bound, times the largest amount where above one
GAP = 1e-7  # of the money that flows, sum |cost_j x_j|
_USED = 1e-9


class FailedCheck(ArithmeticError):
    """An answer that does not hold. No part of it may be shown."""


class Check(NamedTuple):
    """What an answer was found to be worth; every figure is relative, so that tolerances mean the same everywhere.

    largest_violation: of any limit or bound, in the units of VIOLATION. worst: what is violated most, in words.
    duality_gap: |cost . x - dual objective| over sum |cost_j x_j| (at a mixed-integer answer: to the best bound
    known). dual_residual: worst |cost - what the prices explain| over the largest |cost|. complementary_slackness:
    sum of |price x distance from its bound| over sum |cost_j x_j|. wrong_sign: largest price of the wrong sign over
    the largest |cost|.
    """

    largest_violation: float
    worst: str
    duality_gap: float
    dual_residual: float
    complementary_slackness: float
    wrong_sign: float


def check(program: Program, solution: Solution) -> Check:
    """Check an answer; raises FailedCheck where it does not hold or where nothing proves that none is cheaper.

    At a mixed-integer answer the prices are checked against the linear program with the choice fixed
    (solution.priced), and duality_gap is the solver's own, the one figure that cannot be checked without it. An
    answer that is stopped need not close its gap.
    """
    x = solution.x
    if x is None or solution.objective is None:
        raise FailedCheck("there is no answer to check")
    if x.shape != (program.size,) or not np.isfinite(x).all():
        raise FailedCheck("an amount is not a number")
    if solution.priced is program:
        result = _linear(program, solution, x)
    else:
        if solution.priced is None or solution.gap is None:
            raise FailedCheck("the answer carries no prices")
        inner = _linear(solution.priced, solution, x)
        if inner.duality_gap > GAP:
            raise FailedCheck(f"the prices do not explain the cost: gap {inner.duality_gap:.3g}")
        amount, worst = _primal(program, x)[:2]
        whole, where = _choices(program, x)
        if whole > amount:
            amount, worst = whole, where
        result = inner._replace(largest_violation=amount, worst=worst, duality_gap=solution.gap)
    if not result.largest_violation <= VIOLATION:
        raise FailedCheck(f"{result.worst} is missed by {result.largest_violation:.3g}")
    if solution.status != "stopped" and not result.duality_gap <= GAP:
        raise FailedCheck(f"the answer is not proven least: gap {result.duality_gap:.3g}")
    for name, value in (
        ("the prices do not explain the costs", result.dual_residual),
        ("a price stands on a limit that does not bind", result.complementary_slackness),
        ("a price has the wrong sign", result.wrong_sign),
    ):
        if not value <= GAP:
            raise FailedCheck(f"{name}: {value:.3g}")
    return result


def _primal(program: Program, x: Array) -> tuple[float, str, Array, Array, Array, Array]:
    """Largest violation and its place, and per row: activity, what the bound multiplies, minimum, maximum."""
    size = max(1.0, float(np.abs(x).max(initial=0.0)))
    over, where = 0.0, ""
    for what, excess in (("below its least", program.lower - x), ("above its greatest", x - program.upper)):
        j = int(excess.argmax()) if excess.size else 0
        if excess.size and excess[j] / size > over:
            over, where = float(excess[j]) / size, f"{_name(program, j)} {what}"
    for bound in program.bounds:
        value = float(x[bound.column])
        if bound.minimum is not None and (bound.minimum - value) / size > over:
            over, where = (bound.minimum - value) / size, f"the minimum of {_name(program, bound.column)}"
        if bound.maximum is not None and (value - bound.maximum) / size > over:
            over, where = (value - bound.maximum) / size, f"the maximum of {_name(program, bound.column)}"
    rows = program.rows
    m = len(rows)
    numerators = np.array([row.numerator for row in rows], dtype=np.float64).reshape(m, program.size)
    low = np.array([-np.inf if row.minimum is None else row.minimum for row in rows])
    high = np.array([np.inf if row.maximum is None else row.maximum for row in rows])
    activity = numerators @ x
    scale = np.maximum(numerators.max(axis=1, initial=0.0), -numerators.min(axis=1, initial=0.0))
    per = np.ones(m)
    for i, row in enumerate(rows):
        if row.divisor is not None:
            per[i] = row.divisor @ x
            ends = [abs(end) for end in (row.minimum, row.maximum) if end is not None and np.isfinite(end)]
            scale[i] = max(scale[i], max(ends, default=0.0) * float(np.abs(row.divisor).max()))
    scale[scale == 0.0] = 1.0
    with np.errstate(invalid="ignore"):
        below = np.where(low > -np.inf, (low * per - activity) / scale, 0.0) / size
        above = np.where(high < np.inf, (activity - high * per) / scale, 0.0) / size
    for i, row in enumerate(rows):
        # a negative divisor turns the limit round: the row as solved would not be the limit as stated
        if row.divisor is not None and per[i] < -VIOLATION * size * float(np.abs(row.divisor).max()):
            below[i], above[i] = -below[i], -above[i]
    for what, excess in (("minimum", below), ("maximum", above)):
        if m and float(excess.max()) > over:
            i = int(excess.argmax())
            over, where = float(excess[i]), f"the {what} of row {i} (limit {rows[i].limit})"
    return over, where, activity, per, low, high


def _choices(program: Program, x: Array) -> tuple[float, str]:
    """Largest violation among whole numbers, least amounts if used and counts."""
    size = max(1.0, float(np.abs(x).max(initial=0.0)))
    over, where = 0.0, ""
    if program.whole is not None:
        off = np.where(program.whole, np.abs(x - np.round(x)), 0.0) / size
        if off.size and off.max() > over:
            over, where = float(off.max()), f"{_name(program, int(off.argmax()))} as a whole number"
    if program.least_if_used is not None:
        short = np.where(x > _USED * size, program.least_if_used - x, 0.0) / size
        if short.size and short.max() > over:
            over, where = float(short.max()), f"the least amount of {_name(program, int(short.argmax()))}"
    for count in program.counts:
        used = int((x[list(count.columns)] > _USED * size).sum())
        if used > count.most:
            over, where = float(used - count.most), f"the count of limit {count.limit}"
    return over, where


def _linear(program: Program, solution: Solution, x: Array) -> Check:
    """The optimality conditions of the linear program."""
    over, where, activity, per, low, high = _primal(program, x)
    y_low, y_high = solution.minimum_price, solution.maximum_price
    d_low, d_high = solution.lower_price, solution.upper_price
    if y_low is None or y_high is None or d_low is None or d_high is None or solution.objective is None:
        raise FailedCheck("the answer carries no prices")
    flow = float(np.abs(program.cost) @ np.abs(x)) or 1.0
    peak = float(np.abs(program.cost).max(initial=0.0)) or 1.0
    if abs(float(program.cost @ x) - solution.objective) > GAP * flow:
        raise FailedCheck("the cost is not the sum of its parts")
    low_ends = np.where(y_low != 0.0, low, 0.0)
    high_ends = np.where(y_high != 0.0, high, 0.0)
    worth = y_low * low_ends + y_high * high_ends  # what the prices make of the bounds, row by row
    explained = d_low + d_high
    price = y_low + y_high
    dual = 0.0
    lower, upper = program.lower.copy(), program.upper.copy()
    for bound in program.bounds:
        if bound.minimum is not None:
            lower[bound.column] = max(lower[bound.column], bound.minimum)
        if bound.maximum is not None:
            upper[bound.column] = min(upper[bound.column], bound.maximum)
    for i in price.nonzero()[0].tolist():
        row = program.rows[i]
        explained = explained + price[i] * row.numerator
        if row.divisor is None:
            dual += float(worth[i])
        else:
            explained = explained - worth[i] * row.divisor
    dual += float(d_low @ np.where(d_low != 0.0, lower, 0.0) + d_high @ np.where(d_high != 0.0, upper, 0.0))
    residual = float(np.abs(program.cost - explained).max(initial=0.0)) / peak
    slack = (
        float(np.abs(y_low * (activity - low_ends * per)) @ (y_low != 0.0))
        + float(np.abs(y_high * (high_ends * per - activity)) @ (y_high != 0.0))
        + float(np.abs(d_low * (x - np.where(d_low != 0.0, lower, 0.0))).sum())
        + float(np.abs(d_high * (np.where(d_high != 0.0, upper, 0.0) - x)).sum())
    )
    signed = low < high  # an equality may have a price of either sign
    wrong = (
        max(
            float(np.where(signed, -y_low, 0.0).max(initial=0.0)),
            float(np.where(signed, y_high, 0.0).max(initial=0.0)),
            float((-d_low).max(initial=0.0)),
            float(d_high.max(initial=0.0)),
            0.0,
        )
        / peak
    )
    gap = float(abs(solution.objective - dual)) / flow
    return Check(over, where, gap, residual, slack / flow, wrong)


def _name(program: Program, j: int) -> str:
    return program.names[j] if j < len(program.names) else f"column {j}"
