"""Sensitivity checked by solving again with the bound or the price moved."""

from __future__ import annotations

import dataclasses

import numpy as np

from blendapp.optimise.program import Bound, Program, Row
from blendapp.optimise.sensitivity import LimitPrices, Sensitivity
from blendapp.optimise.solution import Solution
from blendapp.optimise.solve import solve
from tests.optimise import made


def cost_when_moved(program: Program, one: Row | Bound, side: str, step: float) -> float:
    """The optimum with the bound moved, inf where nothing meets it."""
    assert one.limit is not None
    found = made.moved(program, one.limit, side, step)
    changed = next(o for o in (*found.rows, *found.bounds) if o.limit == one.limit)
    if changed.minimum is not None and changed.maximum is not None and changed.minimum > changed.maximum:
        return np.inf
    solution = solve(found)
    return np.inf if solution.objective is None else solution.objective


def faults(program: Program, solution: Solution, found: Sensitivity) -> list[str]:
    """Everything that solving again contradicts."""
    out: list[str] = []
    assert solution.objective is not None
    noise = 1e-9 * float(np.abs(program.cost) @ np.abs(solution.x))
    for one in (*program.rows, *program.bounds):
        if one.limit is None:
            continue
        prices = found.limits[one.limit]
        if prices.binding is None:
            if solution.limits[one.limit].value is not None:
                out += _idle(program, solution, one, noise)
            continue
        for side, direction, slope, holds in _slopes(one, prices):
            bound = one.maximum if side == "maximum" else one.minimum
            assert bound is not None
            if isinstance(one, Row) and one.divisor is not None:
                problem = _curved(program, solution, one, side, direction, bound, slope, noise)
            else:
                problem = _straight(program, solution, one, side, direction, bound, slope, holds, noise)
            if problem:
                out.append(f"limit {one.limit} {side} {direction:+g} slope {slope} holds {holds}: {problem}")
    return out + _price_faults(program, solution, found, noise)


def _slopes(one: Row | Bound, prices: LimitPrices) -> list[tuple[str, float, float | None, float | None]]:
    """(side, direction of the bound, rise of cost per unit moved, holds to)."""
    if one.minimum is not None and one.minimum == one.maximum:
        assert prices.tighten_cost is None
        assert prices.relax_saving is None
        return [
            ("both", 1.0, prices.raise_cost, prices.raise_holds_to),
            ("both", -1.0, prices.lower_cost, prices.lower_holds_to),
        ]
    assert prices.binding is not None
    assert prices.relax_saving is not None
    tighter = 1.0 if prices.binding == "minimum" else -1.0
    return [
        (prices.binding, tighter, prices.tighten_cost, prices.tighten_holds_to),
        (prices.binding, -tighter, -prices.relax_saving, prices.relax_holds_to),
    ]


def _size(solution: Solution, one: Row | Bound) -> float:
    """A thousandth of what the limited value could be, for bounds at nought."""
    assert solution.x is not None
    top = float(np.abs(solution.x).max())
    if isinstance(one, Row):
        top = float(np.abs(one.numerator).max()) * (top if one.divisor is None else 1.0)
    return 1e-3 * top if top > 0 else 1.0


def _idle(program: Program, solution: Solution, one: Row | Bound, noise: float) -> list[str]:
    """A limit that does not bind costs nothing, a little way up and down."""
    assert one.limit is not None
    assert solution.objective is not None
    value = solution.limits[one.limit].value
    assert value is not None
    out = []
    for side, end in (("minimum", one.minimum), ("maximum", one.maximum)):
        if end is not None:
            step = (value - end) / 2
            cost = cost_when_moved(program, one, side, step)
            if abs(cost - solution.objective) > noise:
                out.append(f"limit {one.limit} does not bind at its {side} but moves the cost")
    return out


def _straight(
    program: Program,
    solution: Solution,
    one: Row | Bound,
    side: str,
    direction: float,
    bound: float,
    slope: float | None,
    holds: float | None,
    noise: float,
) -> str | None:
    assert solution.objective is not None
    unit = max(abs(bound), _size(solution, one))
    if slope is None:
        cost = cost_when_moved(program, one, side, direction * 1e-4 * unit)
        return None if cost == np.inf else f"a bound that cannot be met is met at {cost}"
    full = 20.0 * unit if holds is None else (holds - bound) * direction
    if full < -1e-12 * unit:
        return "holds to the wrong side"
    for share in (0.5, 0.999):
        if full * share <= 1e-7 * unit:
            continue
        step = direction * full * share
        if isinstance(one, Bound) and bound + step < 0.0:
            continue  # an amount below nought does not exist: the column's own bound takes over
        rise = cost_when_moved(program, one, side, step) - solution.objective
        if not abs(rise - slope * abs(step)) <= noise + 1e-7 * abs(slope * step):
            return f"at {share} of the reach the cost rises {rise}, not {slope * abs(step)}"
    if holds is not None:
        step = direction * (full + 0.02 * max(full, unit))
        rise = cost_when_moved(program, one, side, step) - solution.objective
        if not rise > slope * abs(step) + noise:
            return f"beyond the reach the slope goes on: {rise} and {slope * abs(step)}"
    return None


def _curved(
    program: Program,
    solution: Solution,
    one: Row | Bound,
    side: str,
    direction: float,
    bound: float,
    slope: float | None,
    noise: float,
) -> str | None:
    assert solution.objective is not None
    unit = max(abs(bound), _size(solution, one))
    errors = []
    for relative in (1e-3, 1e-4, 1e-5, 1e-6):
        step = relative * unit
        rise = cost_when_moved(program, one, side, direction * step) - solution.objective
        if slope is None:
            if relative == 1e-4 and rise < np.inf:
                return f"a bound that cannot be met is met: {rise}"
            continue
        errors.append(abs(rise / step - slope) - 3 * noise / step - 0.01 * abs(slope))
    return f"slopes differ: {errors}" if errors and min(errors) > 1e-9 else None


def _price_faults(program: Program, solution: Solution, found: Sensitivity, noise: float) -> list[str]:
    """Just inside its range a price leaves these amounts optimal, just outside it does not."""
    assert solution.x is not None
    out = []
    size = float(np.abs(program.cost).max())
    for j in range(program.size):
        for end, sign in ((found.price_low[j], -1.0), (found.price_high[j], 1.0)):
            inside = program.cost[j] + sign * 10 * size if np.isinf(end) else end - sign * 1e-6 * size
            if (inside - program.cost[j]) * sign > 0:
                cost = program.cost.copy()
                cost[j] = inside
                best = solve(dataclasses.replace(program, cost=cost)).objective
                if best is None or float(cost @ solution.x) > best + noise + 1e-8 * abs(best):
                    out.append(f"column {j}: at {inside}, inside its range, other amounts are cheaper")
            if np.isfinite(end):
                cost = program.cost.copy()
                cost[j] = end + sign * 1e-2 * size
                best = solve(dataclasses.replace(program, cost=cost)).objective
                if best is not None and float(cost @ solution.x) <= best + 1e-12 * abs(best):
                    out.append(f"column {j}: beyond {end} the amounts are still optimal")
    return out
