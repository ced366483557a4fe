"""What each limit could reach on its own, within the column bounds and the balance."""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass

import numpy as np

from blendapp.optimise.arrays import Arrays, column_bounds, expand
from blendapp.optimise.fractional import extreme_quotient
from blendapp.optimise.program import Array, Program, Row
from blendapp.optimise.solution import Side
from blendapp.optimise.warm import Warm

_SETTLED = 1e-12
_STEPS = 50


@dataclass(frozen=True)
class Reach:
    """A side of a limit that cannot be met even alone: asked, and the nearest value that can be reached (None where
    its divisor is nought in every mix)."""

    limit: int
    side: Side
    asked: float
    reachable: float | None


def unreached(program: Program) -> tuple[Reach, ...]:
    """The sides of rows that cannot be met within the column bounds, own and limits', and the balance alone. Empty
    where those clash among themselves."""
    lower, upper = column_bounds(program)
    if (lower > upper).any():
        return ()
    balance = tuple(row for row in program.rows if row.limit is None)
    box = _Box(dataclasses.replace(program, rows=balance))
    if box.greatest(np.zeros(program.size)) is None:
        return ()
    found = []
    for row in program.rows:
        if row.limit is None:
            continue
        for side, asked in (("minimum", row.minimum), ("maximum", row.maximum)):
            if asked is None:
                continue
            sign = 1.0 if side == "minimum" else -1.0
            reach = _reach(box, row, asked, sign)
            if reach is not None:
                found.append(Reach(row.limit, "minimum" if side == "minimum" else "maximum", asked, reach[0]))
    return tuple(found)


def _reach(box: _Box, row: Row, asked: float, sign: float) -> tuple[float | None] | None:
    """The nearest value to what is asked, in a tuple; None where it is reached."""
    scale = float(np.abs(row.numerator).max(initial=0.0))
    if row.divisor is not None:
        scale = max(scale, abs(asked) * float(np.abs(row.divisor).max(initial=0.0)))
    value = asked
    for step in range(_STEPS):
        aim = sign * row.numerator if row.divisor is None else sign * (row.numerator - value * row.divisor)
        x = box.greatest(aim)
        if x is None and (step == 0 or row.divisor is None):  # no end: whatever is asked is reached
            return None
        if x is None and row.divisor is not None:
            found = extreme_quotient(box.arrays, row.numerator, row.divisor, -sign)
            return None if found is None else (found.value,)
        assert x is not None
        short = (sign * asked if row.divisor is None else 0.0) - float(aim @ x)
        if step == 0 and short <= 1e-9 * (scale or 1.0) * max(1.0, float(np.abs(x).max(initial=0.0))):
            return None
        per = 1.0 if row.divisor is None else float(row.divisor @ x)
        if per <= 0.0:
            return (None,)
        nearer = float(row.numerator @ x) / per
        if row.divisor is None or abs(nearer - value) <= _SETTLED * max(abs(nearer), abs(value)):
            return (nearer,)
        value = nearer
    return (value,)


class _Box:
    """The column bounds and the balance. With one balance of positive coefficients an optimum is found by filling
    columns in the order of their worth; otherwise by the solver."""

    def __init__(self, program: Program) -> None:
        self.arrays: Arrays = expand(program)
        rows = self.arrays
        self._plain = rows.inequalities == 0 and rows.b.size <= 1 and bool((rows.a > 0).all())
        self._warm: Warm | None = None

    def greatest(self, aim: Array) -> Array | None:
        """A mix with the greatest aim . x; None where there is no mix or no end."""
        if not self._plain:
            if self._warm is None:
                self._warm = Warm(self.arrays, -aim)
            self._warm.set_cost(-aim)
            return self._warm.x() if self._warm.solve() == "optimal" else None
        lower, upper = self.arrays.lower, self.arrays.upper
        if not self.arrays.b.size:
            if ((aim > 0) & np.isinf(upper)).any() or ((aim < 0) & np.isinf(lower)).any():
                return None
            return np.where(aim > 0, upper, np.where(aim < 0, lower, np.where(np.isinf(lower), 0.0, lower)))
        a, total = self.arrays.a[0], float(self.arrays.b[0])
        left = total - float(a @ lower)
        if left < -1e-12 * abs(total):
            return None
        order = np.argsort(-aim / a, kind="stable")
        room = (a * (upper - lower))[order]
        before = np.concatenate(([0.0], np.cumsum(room)[:-1]))
        taken = np.clip(left - before, 0.0, room)
        if taken.sum() < left - 1e-12 * abs(total):
            return None
        x: Array = lower.copy()
        x[order] += taken / a[order]
        return x
