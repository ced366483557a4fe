"""What a bound costs, on both sides, and how far that holds; the prices at which the amounts change.

The optimal cost z is the largest value over all dual solutions, so its two slopes in a right-hand side are the largest
and the least price of that row over the face of optimal duals (Dantzig and Thapa, Linear Programming 1,
sensitivity; Murty, Linear Programming, chapter 8). Where a bound r multiplies amounts, the slopes are
those of the saddle function, y times divisor . x, over all optimal duals and all optimal mixes (Mills 1956, Marginal
values of matrix games and linear programs).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np

from blendapp.optimise.dual_face import DualFace, build
from blendapp.optimise.price_ranges import price_ranges
from blendapp.optimise.program import Array, Program
from blendapp.optimise.reach import Move, divisor_extremes, reaches
from blendapp.optimise.solution import Side, Solution

_EQUAL = 1e-9  # two slopes this close (to the larger of them, or to this share of the largest cost) are one
_NIL = 1e-11  # a slope below this share of the largest cost is nought


class LimitPrices(NamedTuple):
    """Slopes of the optimal cost in one limit, per unit of its value.

    tighten_cost: rise per unit of stricter bound, None where no stricter bound can be met; relax_saving: fall per
    unit of looser bound; each with the bound up to which it holds, None where it holds without end, where it is
    no figure, and where the bound multiplies amounts. Where minimum = maximum these are None, and raise_cost
    and lower_cost are the signed costs of moving the target up and down (None where it cannot be moved). unique:
    whether both sides agree; None for a count.
    """

    binding: Side | None
    unique: bool | None
    tighten_cost: float | None = None
    tighten_holds_to: float | None = None
    relax_saving: float | None = None
    relax_holds_to: float | None = None
    raise_cost: float | None = None
    raise_holds_to: float | None = None
    lower_cost: float | None = None
    lower_holds_to: float | None = None


@dataclass(frozen=True, eq=False)
class Sensitivity:
    """limits: prices of each limit by its index. price_low, price_high: shape (n,), the interval of each column's
    cost over which these amounts stay optimal, -inf and inf where without end. break_even: shape (n,), price_low
    of a column that stands at its least amount, NaN of others. unique_optimum: whether no other amounts cost
    the same."""

    limits: Mapping[int, LimitPrices]
    price_low: Array
    price_high: Array
    break_even: Array
    unique_optimum: bool


class _Slot(NamedTuple):
    """A limit that binds: the label whose extremes are its slopes, and how the label turns into them.

    per_unit: d(right-hand side of the label)/d(bound of the limit). shared: another bound holds the same side;
    opposed: a bound that is not this limit's holds the other side of the same column. multiplied: index of the
    row whose divisor the bound multiplies, -1 where none. low, high: within what a column may go as its bound moves.
    """

    limit: int
    label: int
    side: Side
    target: bool
    bound: float
    per_unit: float
    shared: bool
    opposed: bool
    low: float
    high: float
    multiplied: int


def sensitivity(solution: Solution) -> Sensitivity:
    """Both-sided prices, price ranges and break-even prices of an optimal solution.

    Of a mixed-integer answer they are those of the linear program with the choice fixed. Raises ValueError where
    there is no optimal answer.
    """
    if solution.arrays is None or solution.face is None or solution.x is None or solution.duals is None:
        raise ValueError("only an answer has prices")
    arrays, face, x = solution.arrays, solution.face, solution.x
    dual = build(arrays, face, x, solution.duals)
    slots = _slots(arrays.program, dual, x)
    everything = np.arange(dual.labels)
    some = np.array(sorted({slot.label for slot in slots}), dtype=np.int64)
    signs = np.concatenate((np.ones(dual.labels), -np.ones(some.size)))
    extremes = dual.largest(np.concatenate((everything, some)), signs)
    place = {int(label): dual.labels + k for k, label in enumerate(some)}
    highest = extremes.value[: dual.labels]
    unique = face.spare == 0 and bool((highest[dual.signed] > _EQUAL).all())
    moves: list[Move] = []
    found: dict[int, LimitPrices] = {}
    nil = _NIL * dual.peak
    for slot in slots:
        top = _scaled(float(highest[slot.label]), dual.peak, nil)
        bottom = _scaled(-float(extremes.value[place[slot.label]]), dual.peak, nil)
        prices, wanted = _prices(slot, dual, x, top, bottom, highest)
        found[slot.limit] = prices
        moves += [
            Move(
                slot.limit,
                field,
                slot.label,
                sign,
                slot.label if sign > 0 else place[slot.label],
                slot.bound,
                slot.low,
                slot.high,
            )
            for field, sign in wanted
        ]
    for (limit, field), value in reaches(dual, x, moves, extremes).items():
        found[limit] = _with(found[limit], field, value)
    limits: dict[int, LimitPrices] = {}
    for limit, state in solution.limits.items():
        if state.unique is None:
            limits[limit] = LimitPrices(state.binding, None)
        elif limit in found:
            limits[limit] = found[limit]
        else:
            limits[limit] = LimitPrices(None, True, 0.0, None, 0.0, None)
    low, high = price_ranges(dual, highest)
    at_least = np.zeros(x.shape[0], dtype=bool)
    at_least[dual.idle] = (dual.turn > 0) & ~dual.fixed
    return Sensitivity(limits, low, high, np.where(at_least, low, np.nan), unique)


def _with(prices: LimitPrices, field: str, value: float | None) -> LimitPrices:
    changed: dict[str, Any] = {field: value}
    return prices._replace(**changed)


def _scaled(value: float, peak: float, nil: float) -> float:
    value *= peak
    return 0.0 if abs(value) <= nil else value


def _slots(program: Program, dual: DualFace, x: Array) -> list[_Slot]:
    """One entry for each limit that binds and has a price."""
    arrays, face = dual.arrays, dual.face
    slots: list[_Slot] = []
    for position, k in enumerate(face.active.tolist()):
        row = program.rows[int(arrays.row[k])]
        if row.limit is None:
            continue
        multiplied = -1 if row.divisor is None else int(arrays.row[k])
        if row.divisor is not None and abs(float(row.divisor @ x)) <= face.tolerance * float(np.abs(row.divisor).max()):
            continue
        side: Side = "maximum" if arrays.side[k] < 0 else "minimum"
        slots.append(
            _Slot(
                row.limit,
                position,
                side,
                bool(arrays.side[k] == 0),
                float(arrays.bound[k]),
                abs(float(arrays.factor[k])),
                False,
                False,
                -np.inf,
                np.inf,
                multiplied,
            )
        )
    if not program.bounds:
        return slots
    where = {int(j): face.active.size + i for i, j in enumerate(dual.idle)}
    for bound in program.bounds:
        j = bound.column
        ends = (bound.minimum, bound.maximum)
        holds = [end is not None and abs(x[j] - end) <= face.tolerance for end in ends]
        if j not in where or not any(holds):
            continue
        others = [b for b in program.bounds if b.column == j and b.limit != bound.limit]
        lows = [float(program.lower[j])] + [b.minimum for b in others if b.minimum is not None]
        highs = [float(program.upper[j])] + [b.maximum for b in others if b.maximum is not None]
        rest_low, rest_high = max(lows), min(highs)
        low_held = x[j] - rest_low <= face.tolerance
        high_held = rest_high - x[j] <= face.tolerance
        target = all(holds)
        label = where[j]
        low = rest_low if holds[0] else float(arrays.lower[j])
        high = rest_high if holds[1] else float(arrays.upper[j])
        if holds[0] and bound.minimum is not None:
            slots.append(
                _Slot(bound.limit, label, "minimum", target, bound.minimum, 1.0, low_held, high_held, low, high, -1)
            )
        elif bound.maximum is not None:
            slots.append(
                _Slot(bound.limit, label, "maximum", False, bound.maximum, 1.0, high_held, low_held, low, high, -1)
            )
    return slots


def _prices(
    slot: _Slot, dual: DualFace, x: Array, top: float, bottom: float, highest: Array
) -> tuple[LimitPrices, list[tuple[str, int]]]:
    """The prices of one limit from the largest and least value of its label, and the moves (field, sign of the
    label) whose reach is wanted."""
    column = slot.label - dual.face.active.size
    sign = 1
    if column >= 0 and (dual.turn[column] < 0) != (slot.side == "maximum"):
        sign, top, bottom = -1, -bottom, -top  # the label of a fixed column is turned for the other bound
    least = most = 1.0
    if slot.multiplied >= 0:
        divisor = dual.arrays.program.rows[slot.multiplied].divisor
        assert divisor is not None
        least, most = divisor_extremes(dual, x, divisor, highest)
    up = np.inf if slot.opposed else top * slot.per_unit
    wanted: list[tuple[str, int]] = []
    if slot.target:
        down = -np.inf if slot.shared else bottom * slot.per_unit
        raised = None if up == np.inf else _times(up, least if up >= 0 else most)
        lowered = None if down == -np.inf else -_times(down, most if down >= 0 else least) + 0.0
        side: Side = "minimum"
        if raised is not None and raised <= 0 and (lowered is None or lowered > 0):
            side = "maximum"
        if slot.multiplied < 0:
            wanted += [("raise_holds_to", sign)] if raised is not None else []
            wanted += [("lower_holds_to", -sign)] if lowered is not None else []
        same = raised is not None and lowered is not None and _same(raised, -lowered, dual.peak)
        return LimitPrices(side, same, raise_cost=raised, lower_cost=lowered), wanted
    down = 0.0 if slot.shared else max(bottom, 0.0) * slot.per_unit
    cost = 0.0 if least <= 0.0 else (None if up == np.inf else _times(up, least))
    saving = _times(down, most)
    if slot.multiplied < 0:
        wanted += [("tighten_holds_to", sign)] if cost is not None else []
        # a saving of nought goes on for ever: the optimal cost is convex in the bound and does not fall beyond
        wanted += [("relax_holds_to", -sign)] if saving > 0.0 else []
    same = cost is not None and _same(cost, saving, dual.peak)
    return LimitPrices(slot.side, same, cost, None, saving, None), wanted


def _times(slope: float, amount: float) -> float:
    return 0.0 if slope == 0.0 else float(slope * amount)


def _same(one: float, other: float, peak: float) -> bool:
    return abs(one - other) <= _EQUAL * max(abs(one), abs(other), _EQUAL * peak)
