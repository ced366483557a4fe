"""Conflicts that only the choice of columns makes: counts and least amounts among the members."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable

import numpy as np

from blendapp.optimise.conflicts import Conflict, Repair, conflict
from blendapp.optimise.program import Array, Count, Program, Row
from blendapp.optimise.solution import Side
from blendapp.optimise.solve import solve

_STEPS = 30
_SETTLED = 1e-9


def explain(program: Program, time_limit_s: float | None = None) -> Conflict | None:
    """Why a program, mixed-integer ones included, is infeasible; None where it is feasible or time ran out.

    Where the linear part alone is infeasible that is what is explained. Else limits are left out one by one, each
    time with a mixed-integer solve of at most time_limit_s seconds. Raises FailedSolve.
    """
    linear = conflict(program)
    if linear is not None or not program.integral:
        return linear
    if _status(program, time_limit_s) != "infeasible":
        return None
    members = _limits(program)
    for limit in tuple(members):
        fewer = [m for m in members if m != limit]
        if _status(_only(program, fewer), time_limit_s) == "infeasible":
            members = fewer
    repairs = tuple(_repair(program, limit, time_limit_s) for limit in members)
    return Conflict((), tuple(members), repairs, ())


def _status(program: Program, time_limit_s: float | None) -> str:
    return solve(dataclasses.replace(program, cost=np.zeros(program.size)), time_limit_s).status


def _limits(program: Program) -> list[int]:
    found = {row.limit for row in program.rows if row.limit is not None}
    found |= {bound.limit for bound in program.bounds} | {count.limit for count in program.counts}
    if program.least_limit is not None:
        found |= {int(limit) for limit in program.least_limit if limit >= 0}
    return sorted(found)


def _only(program: Program, limits: Iterable[int]) -> Program:
    """The program with these limits alone; least amounts that belong to no limit stay."""
    kept = set(limits)
    least = program.least_if_used
    if least is not None and program.least_limit is not None:
        dropped = np.array([limit >= 0 and int(limit) not in kept for limit in program.least_limit])
        least = np.where(dropped, 0.0, least)
    return dataclasses.replace(
        program,
        rows=tuple(row for row in program.rows if row.limit is None or row.limit in kept),
        bounds=tuple(bound for bound in program.bounds if bound.limit in kept),
        counts=tuple(count for count in program.counts if count.limit in kept),
        least_if_used=least,
    )


def _repair(program: Program, limit: int, time_limit_s: float | None) -> Repair:
    """The least change of one limit that alone makes the program feasible."""
    others = _only(program, (other for other in _limits(program) if other != limit))
    for count in program.counts:
        if count.limit == limit:
            return Repair(limit, "maximum", float(count.most), _fewest(others, count.columns, count.most, time_limit_s))
    if program.least_limit is not None and program.least_if_used is not None:
        for j in (program.least_limit == limit).nonzero()[0].tolist():
            unit = np.zeros(program.size)
            unit[j] = 1.0
            start = float(program.least_if_used[j])
            most = _extreme(others, Row(unit, start, None, None, limit), start, -1.0, time_limit_s)
            return Repair(limit, "minimum", start, None if most is None or most <= 0 else most)
    row = _row(program, limit)
    trial = solve(dataclasses.replace(others, cost=np.zeros(program.size)), time_limit_s)
    low = row.minimum is not None
    if trial.x is not None and row.minimum is not None and row.maximum is not None:
        per = 1.0 if row.divisor is None else float(row.divisor @ trial.x)
        low = per <= 0 or float(row.numerator @ trial.x) / per < row.minimum
    side: Side = "minimum" if low else "maximum"
    start_end = row.minimum if low else row.maximum
    assert start_end is not None
    if trial.x is None:
        return Repair(limit, side, start_end, None)
    return Repair(limit, side, start_end, _extreme(others, row, start_end, -1.0 if low else 1.0, time_limit_s))


def _row(program: Program, limit: int) -> Row:
    for row in program.rows:
        if row.limit == limit:
            return row
    bound = next(bound for bound in program.bounds if bound.limit == limit)
    unit = np.zeros(program.size)
    unit[bound.column] = 1.0
    return Row(unit, bound.minimum, bound.maximum, None, limit)


def _extreme(others: Program, row: Row, start: float, sign: float, time_limit_s: float | None) -> float | None:
    """The greatest (sign -1) or least (sign 1) value of a row, by Dinkelbach's method where it has a divisor."""
    value = start
    for _ in range(_STEPS):
        cost: Array = sign * row.numerator
        if row.divisor is not None:
            cost = cost - sign * value * row.divisor
        found = solve(dataclasses.replace(others, cost=cost), time_limit_s)
        if found.status != "optimal" or found.x is None:
            return None
        per = 1.0 if row.divisor is None else float(row.divisor @ found.x)
        if per <= 0:
            return None
        nearer = float(row.numerator @ found.x) / per
        if row.divisor is None or abs(nearer - value) <= _SETTLED * max(abs(nearer), abs(value)):
            return nearer
        value = nearer
    return None


def _fewest(others: Program, columns: tuple[int, ...], most: int, time_limit_s: float | None) -> float | None:
    """The smallest count above `most` with which the program is feasible."""
    for allowed in range(most + 1, len(columns) + 1):
        counts = (*others.counts, Count(columns, allowed, -1))
        if _status(dataclasses.replace(others, counts=counts), time_limit_s) == "optimal":
            return float(allowed)
    return None
