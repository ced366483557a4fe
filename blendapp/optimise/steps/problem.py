"""What is to be weighed in whole steps: lines, the scales that may weigh them, and the limits they are held to.

Numbers only. Masses that people type are decimals, so they are taken as the decimals they print as, and everything
that decides whether a batch is allowed is worked out in fractions.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from fractions import Fraction
from typing import Literal, NamedTuple

from blendapp.optimise.program import Row

# A limit is broken beyond this share of its bound: unit factors such as 1/0.45359237 are no decimals.
CLOSE = Fraction(1, 10**9)
# A share at the very edge of what a step or a tolerance allows may lie this share of a step outside it.
_EDGE = Fraction(1, 10**9)


def exact(value: float) -> Fraction:
    """The decimal of 15 digits that a float prints as: 0.467 for 46.7 x 0.01."""
    return Fraction(Decimal(f"{value:.15g}"))


@dataclass(frozen=True)
class Load:
    """One scale as a line meets it: loads are multiples of step_kg (> 0) between least_kg and greatest_kg.

    tolerance: fraction of the share by which the load may differ from it; one step is always allowed.
    """

    step_kg: float
    least_kg: float | None = None
    greatest_kg: float | None = None
    tolerance: float = 0.02


@dataclass(frozen=True)
class Line:
    """share_kg (> 0): the exact share of the batch. loads: the line's own scale first, then others in the order in
    which they are to be tried; see place. fixed_kg: set by a person. must_stay: the line may not be left out."""

    share_kg: float
    loads: tuple[Load, ...]
    cost_per_kg: float = 0.0
    fixed_kg: float | None = None
    must_stay: bool = False


@dataclass(frozen=True)
class LeastIfUsed:
    """A limit that a line is absent or holds at least `least`, in the amounts of the rows; limit as in Row."""

    line: int
    least: float
    limit: int


@dataclass(frozen=True)
class Order:
    """One batch. rows: limits with numerator and divisor of shape (lines,), in amounts: kilograms / total x amount.

    amount: what the whole batch stands for in the rows: 1 where amounts are fractions. least_total_kg,
    greatest_total_kg: between which the total must lie.
    """

    batch_kg: float
    lines: tuple[Line, ...]
    rows: tuple[Row, ...] = ()
    least_if_used: tuple[LeastIfUsed, ...] = ()
    amount: float = 1.0
    least_total_kg: float | None = None
    greatest_total_kg: float | None = None


Why = Literal[
    "small", "large", "between", "step", "fixed step", "fixed load", "fixed tolerance", "fixed total", "total", "none"
]


@dataclass(frozen=True)
class Reason:
    """Why no batch can be weighed.

    line: index, None for the whole batch. why: the share is too small or too large for every scale, or lies between
    two of their loads; a step is not above 0; a fixed mass is no multiple of a step, outside a load, or too far from
    the share of a line that must stay; the fixed lines keep the total further from the batch than rounding explains,
    or no total lies where it must ("total"); "none": there is no line. total_kg: the total nearest to the batch, where
    one exists.
    """

    line: int | None
    why: Why
    total_kg: Fraction | None = None


class Placed(NamedTuple):
    """A line on its scale: whole steps from lo to hi, or 0 where absent; allowed: greatest deviation in kg."""

    load: int
    step: Fraction
    share: Fraction
    allowed: Fraction
    lo: int
    hi: int
    absent: bool
    fixed: bool = False

    @property
    def nearest(self) -> int:
        """The admissible number of steps nearest to the share; the smaller of two that are equally near."""
        near = math.ceil(self.share / self.step - Fraction(1, 2))
        best = min(max(near, self.lo), self.hi)
        if self.absent and self.share < abs(best * self.step - self.share):
            return 0
        return best

    @property
    def choices(self) -> list[int]:
        """Every admissible number of steps."""
        found = list(range(self.lo, self.hi + 1))
        return [0, *found] if self.absent and self.lo > 0 else found


def place(line: Line) -> Placed | Reason:
    """The line on the scale that serves it best; the reason's line is left for the caller to set.

    Its own scale (the first) unless the share is too small for it: less than a step or the least load, and no load
    within the tolerance proper. Then the first with a load within the tolerance proper; then the first for which it is
    not too small; and last, unless the line must stay, the first that can hold it at all, absent perhaps.
    """
    if any(not load.step_kg > 0 for load in line.loads):
        return Reason(None, "step")
    tries = [(rank, index, placed) for index, load in enumerate(line.loads) for rank, placed in _on(index, load, line)]
    if line.must_stay:
        tries = [one for one in tries if one[0] <= _NOT_SMALL]
    if not tries:
        return Reason(None, _why_not(line))
    return min(tries, key=lambda one: one[:2])[2]


_OWN, _CLOSE_ENOUGH, _NOT_SMALL, _AT_ALL = range(4)


def _on(index: int, load: Load, line: Line) -> list[tuple[int, Placed]]:
    """The line on one scale and how well that serves it; nothing where no load is within what is allowed."""
    step, share = exact(load.step_kg), Fraction(line.share_kg)
    proper = exact(load.tolerance) * share
    allowed = max(step, proper)
    edge = _EDGE * step
    least, greatest = _ends(load, step)
    lo = max(math.ceil((share - allowed - edge) / step), least, 1)
    hi = math.floor((share + allowed + edge) / step)
    if greatest is not None:
        hi = min(hi, greatest)
    if lo > hi:
        return []
    placed = Placed(index, step, share, allowed, lo, hi, share <= step + edge and not line.must_stay)
    small = share < step - edge or (load.least_kg is not None and share < exact(load.least_kg))
    close = min(abs(n * step - share) for n in (lo, hi, placed.nearest) if n) <= proper
    if index == 0 and (close or not small):
        return [(_OWN, placed)]
    return [(_CLOSE_ENOUGH if close else _AT_ALL if small else _NOT_SMALL, placed)]


def _ends(load: Load, step: Fraction) -> tuple[int, int | None]:
    least = 1 if load.least_kg is None else math.ceil(exact(load.least_kg) / step)
    greatest = None if load.greatest_kg is None else math.floor(exact(load.greatest_kg) / step)
    return least, greatest


def _why_not(line: Line) -> Why:
    share = line.share_kg
    if all(share < max(load.step_kg, load.least_kg or 0.0) for load in line.loads):
        return "small"
    if all(load.greatest_kg is not None and share > load.greatest_kg for load in line.loads):
        return "large"
    return "between"


def place_fixed(line: Line) -> Placed | Reason:
    """The line at its fixed mass, on the first scale of which that is a load; 0 is absent."""
    assert line.fixed_kg is not None
    if any(not load.step_kg > 0 for load in line.loads):
        return Reason(None, "step")
    mass = exact(line.fixed_kg)
    whole = False
    for index, load in enumerate(line.loads):
        step = exact(load.step_kg)
        if mass < 0 or mass % step:
            continue
        whole = True
        n = int(mass / step)
        least, greatest = _ends(load, step)
        if n and (n < least or (greatest is not None and n > greatest)):
            continue
        share = Fraction(line.share_kg)
        allowed = max(step, exact(load.tolerance) * share)
        if line.must_stay and (n == 0 or abs(mass - share) > allowed + _EDGE * step):
            return Reason(None, "fixed tolerance")
        return Placed(index, step, share, allowed, n, n, False, fixed=True)
    return Reason(None, "fixed load" if whole else "fixed step")


@dataclass(frozen=True)
class HeldSide:
    """One side of a limit over whole numbers of steps n: it holds where sum(terms n) >= 0, all in whole numbers.

    divisor: terms of what the limit is per, None where that is the mix; at a sum of 0 the limit says nothing. if_used:
    the line that must be there for the limit to say anything.
    """

    limit: int
    terms: tuple[int, ...]
    divisor: tuple[int, ...] | None = None
    if_used: int | None = None

    def holds(self, steps: Sequence[int]) -> bool:
        """Whether the side holds, exactly."""
        if self.if_used is not None and steps[self.if_used] == 0:
            return True
        total = sum(a * n for a, n in zip(self.terms, steps, strict=True))
        if total >= 0 and self.divisor is None:
            return True
        if self.divisor is None:
            return False
        per = sum(a * n for a, n in zip(self.divisor, steps, strict=True))
        return per == 0 or (total >= 0) == (per > 0) or total == 0


@dataclass(frozen=True)
class Task:
    """An order whose lines all stand on scales. sides: see HeldSide. cost: shape (lines,), money a step."""

    order: Order
    placed: tuple[Placed, ...]
    sides: tuple[HeldSide, ...]
    cost: tuple[float, ...] = field(default=())

    def broken(self, steps: Sequence[int]) -> tuple[int, ...]:
        """Limits that do not hold, exactly, each once, ascending."""
        return tuple(sorted({side.limit for side in self.sides if not side.holds(steps)}))

    def total(self, steps: Sequence[int]) -> Fraction:
        """Of the batch in kg."""
        return sum((p.step * n for p, n in zip(self.placed, steps, strict=True)), Fraction(0))

    def deviation(self, steps: Sequence[int]) -> Fraction:
        """Sum of deviations from the shares, each divided by what it is allowed."""
        return sum(
            (abs(p.step * n - p.share) / p.allowed for p, n in zip(self.placed, steps, strict=True)), Fraction(0)
        )

    def money(self, steps: Sequence[int]) -> float:
        """Cost of the batch."""
        return math.fsum(c * n for c, n in zip(self.cost, steps, strict=True))


def task(order: Order, placed: Sequence[Placed]) -> Task:
    """The order with its limits as whole-number sides over steps."""
    steps = [p.step for p in placed]
    sides = []
    for row in order.rows:
        numerator = [exact(float(a)) for a in row.numerator]
        divisor = None if row.divisor is None else [exact(float(a)) for a in row.divisor]
        for bound, sign in ((row.minimum, 1), (row.maximum, -1)):
            if bound is not None and math.isfinite(bound):
                sides.append(_side(numerator, divisor, bound, sign, row.limit, steps, order))
    for least in order.least_if_used:
        unit = [Fraction(int(j == least.line)) for j in range(len(placed))]
        sides.append(_side(unit, None, least.least, 1, least.limit, steps, order, least.line))
    cost = tuple(line.cost_per_kg * float(step) for line, step in zip(order.lines, steps, strict=True))
    return Task(order, tuple(placed), tuple(sides), cost)


def _side(
    numerator: Sequence[Fraction], divisor: Sequence[Fraction] | None, bound: float, sign: int, limit: int | None,
    steps: Sequence[Fraction], order: Order, if_used: int | None = None,
) -> HeldSide:
    """sign (numerator . x - bound divisor . x) >= 0 with the bound loosened by CLOSE of itself."""
    end = exact(bound)
    end -= sign * CLOSE * abs(end)
    if divisor is None:
        amount = exact(order.amount)
        terms = [sign * (a * amount - end) for a in numerator]
    else:
        terms = [sign * (a - end * b) for a, b in zip(numerator, divisor, strict=True)]
    whole = _whole([t * s for t, s in zip(terms, steps, strict=True)])
    per = None if divisor is None else _whole([b * s for b, s in zip(divisor, steps, strict=True)])
    return HeldSide(-1 if limit is None else limit, whole, per, if_used)


def _whole(terms: Sequence[Fraction]) -> tuple[int, ...]:
    """The same terms as whole numbers, multiplied by their least common denominator."""
    by = math.lcm(*(t.denominator for t in terms)) if terms else 1
    return tuple(int(t * by) for t in terms)
