"""Why nothing meets all limits: what each could reach, a smallest set that clashes, and what each would have to give.

The prices of the program of the smallest largest shortfall name few limits that clash, for its dual vertices are
those of the alternative polyhedron (Gleeson and Ryan 1990, Identifying minimally infeasible subsystems of
inequalities); a deletion filter (Chinneck, Feasibility and Infeasibility in Optimization, chapter 6) makes the set
irreducible. Every verdict is checked without the solver: a "can" by its mix, a "cannot" by its multipliers.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from blendapp.optimise.arrays import Arrays, expand
from blendapp.optimise.fractional import extreme_quotient
from blendapp.optimise.linear import FailedSolve
from blendapp.optimise.program import Array, Program, Row
from blendapp.optimise.shortfall import Clash, Elastic, clashing, least_shortfall
from blendapp.optimise.solution import Side
from blendapp.optimise.unreached import Reach, unreached

_SETTLED = 1e-12
_STEPS = 50
_GENEROUS = 1e-3
_ROUNDS = 9


@dataclass(frozen=True)
class Repair:
    """One bound and what it would have to become, the rest as it is; to is None where no change of it alone helps."""

    limit: int
    side: Side
    start: float
    to: float | None


@dataclass(frozen=True)
class Conflict:
    """Why a program is infeasible.

    reach: sides that cannot be met even alone, within the column bounds. members: limits that cannot hold
    together, any one of which can be dropped so that the others hold together. repairs: one for each member. total:
    bounds to be changed together so that the sum of their changes, each over its own size, is least. Where nothing but
    the columns' own bounds and the balance clash, members are empty.
    """

    reach: tuple[Reach, ...]
    members: tuple[int, ...]
    repairs: tuple[Repair, ...]
    total: tuple[Repair, ...]


def conflict(program: Program) -> Conflict | None:
    """Explain an infeasible linear program (of a mixed-integer one: its linear part); None where it is feasible.

    Raises FailedSolve where a verdict does not stand up to its check.
    """
    plain = as_rows(program)
    arrays = expand(plain)
    clash = clashing(arrays)
    if clash is None:
        return None
    elastic = Elastic(arrays)
    members = _irreducible(plain, elastic, clash) if clash.limits else ()
    total = _total(elastic) if members else ()
    return Conflict(unreached(program), members, _repairs(elastic, members), total)


def as_rows(program: Program) -> Program:
    """The linear part with every limit a row, so that limits on one column and others are treated alike."""
    extra = []
    for bound in program.bounds:
        unit = np.zeros(program.size)
        unit[bound.column] = 1.0
        extra.append(Row(unit, bound.minimum, bound.maximum, None, bound.limit))
    return dataclasses.replace(
        program, rows=(*program.rows, *extra), bounds=(), whole=None, least_if_used=None, least_limit=None, counts=()
    )


def only(program: Program, limits: Iterable[int]) -> Program:
    """A program of rows with these limits alone, and the balance."""
    kept = set(limits)
    return dataclasses.replace(
        program, rows=tuple(row for row in program.rows if row.limit is None or row.limit in kept)
    )


def _irreducible(plain: Program, elastic: Elastic, clash: Clash) -> tuple[int, ...]:
    """Limits that cannot hold together, none of which can be spared."""
    members = _filtered(elastic, clash)
    if members is None or least_shortfall(expand(only(plain, members))).feasible:
        members = clash.limits  # the warm run erred: filter again, every verdict from a fresh and checked solve
        for limit in clash.limits:
            fewer = tuple(m for m in members if m != limit)
            if not least_shortfall(expand(only(plain, fewer))).feasible:
                members = fewer
    return members


def _filtered(elastic: Elastic, clash: Clash) -> tuple[int, ...] | None:
    """The deletion filter over the clashing limits, warm; None where a verdict does not stand. A limit without which
    the others are known to hold together stays without being tried."""
    without: dict[int, Array] = {}
    for limit, x in clash.witnesses.items():
        if elastic.meets(x, [other for other in clash.limits if other != limit]):
            without[limit] = x
    aside = [limit for limit in elastic.limits if limit not in clash.limits]
    tried = [limit for limit in clash.limits if limit not in without]
    if tried:
        elastic.close()
        for limit in aside:
            elastic.drop(limit)
    for limit in tried:
        elastic.drop(limit)
        verdict = elastic.solve()
        if verdict == "infeasible":
            aside.append(limit)
        elif verdict == "optimal":
            without[limit] = elastic.x()
            elastic.restore(limit)
        else:
            return None
    if tried:
        for limit in aside:
            elastic.restore(limit)
    members = tuple(limit for limit in clash.limits if limit in without)
    for limit, x in without.items():
        if not elastic.meets(x, [m for m in members if m != limit]):
            return None
    return members


def _repairs(elastic: Elastic, members: tuple[int, ...]) -> tuple[Repair, ...]:
    """For each member the least change that alone makes the program feasible."""
    elastic.close()
    found = []
    for limit in members:
        elastic.open(limit)
        found.append(_repair(elastic, limit))
        elastic.close(limit)
    return tuple(found)


def _repair(elastic: Elastic, limit: int) -> Repair:
    """The nearest value of a row that all other limits allow. With a divisor it is the optimum of a linear-fractional
    program, by Dinkelbach's method (Management Science 13, 1967): a few solves that differ in their costs."""
    row = elastic.row(limit)
    verdict = elastic.solve()
    if verdict == "infeasible":
        end = row.minimum if row.minimum is not None else row.maximum
        assert end is not None
        return Repair(limit, "minimum" if row.minimum is not None else "maximum", end, None)
    if verdict != "optimal":
        raise FailedSolve("a repair was not found")
    x: Array | None = elastic.x()
    assert x is not None
    value = _value(row, x)
    low = row.minimum is not None and (value is None or value < row.minimum)
    start = row.minimum if low else row.maximum
    assert start is not None
    side: Side = "minimum" if low else "maximum"
    if row.divisor is not None:
        sign = -1.0 if low else 1.0
        for _ in range(_STEPS):
            last = start if value is None else value
            verdict = elastic.aim(sign * (row.numerator - last * row.divisor))
            if verdict == "unbounded":
                value, x = _endless(elastic.arrays, row, sign), None
                break
            if verdict != "optimal":
                raise FailedSolve("a repair was not found")
            x = elastic.x()
            value = _value(row, x)
            if value is None or abs(value - last) <= _SETTLED * max(abs(value), abs(last)):
                break
        elastic.aim(None)
    if x is not None and not elastic.meets(x, [other for other in elastic.limits if other != limit]):
        raise FailedSolve("a repair does not hold what it promises")
    return Repair(limit, side, start, value)


def _endless(arrays: Arrays, row: Row, sign: float) -> float:
    """The best quotient among mixes without end. Where it is only approached, as mixes grow for ever, a thousandth
    more, so that amounts stay within reason."""
    assert row.divisor is not None
    plain = arrays.program
    others = expand(dataclasses.replace(plain, rows=tuple(one for one in plain.rows if one is not row)))
    found = extreme_quotient(others, row.numerator, row.divisor, sign)
    if found is None:
        raise FailedSolve("a repair was not found")
    return found.value if found.x is not None else found.value + sign * _GENEROUS * abs(found.value)


def _value(row: Row, x: Array) -> float | None:
    per = 1.0 if row.divisor is None else float(row.divisor @ x)
    return None if per <= 0.0 else float(row.numerator @ x) / per


def _total(elastic: Elastic) -> tuple[Repair, ...]:
    """The bounds that change when the sum of changes, each over its limit's own size, is least.

    A bound that multiplies amounts changes by its shortfall over divisor . x, which is not known beforehand: the
    weights are taken from the mix before, until they settle.
    """
    arrays = elastic.arrays
    rows = [arrays.program.rows[int(i)] for i in arrays.row]
    size = np.array([_size(row, float(bound)) for row, bound in zip(rows, arrays.bound, strict=True)])
    weight = 1.0 / (np.abs(arrays.factor) * size)
    elastic.open()
    elastic.weigh(weight)
    per = np.ones(size.size)
    x: Array | None = None
    for _ in range(_ROUNDS):
        if elastic.solve() != "optimal":
            raise FailedSolve("the least total change was not found")
        x = elastic.x()
        now = np.array([1.0 if row.divisor is None else max(float(row.divisor @ x), 1e-9) for row in rows])
        if np.abs(now - per).max() <= 1e-9 * np.abs(now).max():
            break
        per = now
        elastic.weigh(weight / per)
    assert x is not None
    repairs = []
    for k in elastic.missed(x).tolist():
        row, value = rows[k], _value(rows[k], x)
        if row.limit is None or value is None:
            continue
        low = row.minimum is not None and value < row.minimum
        start = row.minimum if low else row.maximum
        assert start is not None
        repairs.append(Repair(row.limit, "minimum" if low else "maximum", start, value))
    return tuple(repairs)


def _size(row: Row, bound: float) -> float:
    """What a change of a bound is measured by: the bound itself, or what stands beside it where it is nought."""
    ends = [abs(end) for end in (bound, row.minimum, row.maximum) if end is not None and end != 0.0]
    return ends[0] if ends else float(np.abs(row.numerator).max(initial=0.0)) or 1.0
