"""The whole batch: total, limits, deviations, cost, in this order; an answer in time that says how good it is."""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Literal, NamedTuple

from blendapp.optimise.steps.integers import Found, Integers
from blendapp.optimise.steps.problem import Order, Placed, Reason, Task, exact, place, place_fixed, task
from blendapp.optimise.steps.start import start
from blendapp.optimise.steps.totals import nearest_mixed, nearest_totals, steps_to

Aim = Literal["total", "limits", "deviation", "cost"]
# Deviations or costs closer than this (relative above one) are equal.
EQUAL = 1e-6
_GUARD = 1e-5
_MOST_GUARDED = 3
_START_SHARE = 0.2  # of the time
# Where the totals are too many to mark (pounds, kilograms and litres side by side), two that differ by less than this
# part of the finest step are equally near: no scale tells them apart.
_PLAY = Fraction(1, 10)


@dataclass(frozen=True)
class Stage:
    """What was reached for one aim, and what no batch can be below, given what the aims before it reached.

    total: kg; limits: how many are broken; deviation: sum of those relative to what is allowed; cost: of the batch.
    """

    aim: Aim
    value: float
    bound: float
    proven: bool

    @property
    def gap(self) -> float:
        """value - bound, 0 where proven."""
        return 0.0 if self.proven else max(self.value - self.bound, 0.0)


@dataclass(frozen=True)
class WholeBatch:
    """steps, kilograms: one a line, exact. placed: on which scale and within what. broken: limits, ascending.
    stages: in the order of the aims. seconds: what it took."""

    placed: tuple[Placed, ...]
    steps: tuple[int, ...]
    kilograms: tuple[Fraction, ...]
    total_kg: Fraction
    error_kg: Fraction
    broken: tuple[int, ...]
    deviation: float
    cost: float
    stages: tuple[Stage, ...]
    seconds: float

    @property
    def proven(self) -> bool:
        """Whether no batch is better in any aim."""
        return all(stage.proven for stage in self.stages)

    def stage(self, aim: Aim) -> Stage:
        """What was reached for an aim."""
        return next(stage for stage in self.stages if stage.aim == aim)


@dataclass(frozen=True)
class NoBatch:
    """No batch can be weighed; every reason."""

    reasons: tuple[Reason, ...]


def whole_batch(order: Order, time_limit_s: float = 1.5) -> WholeBatch | NoBatch:
    """Whole steps for every line of one batch.

    Hard: each line a multiple of its scale's step within its load and within max(step, tolerance x share) of its
    share, or absent where its share is no more than a step. Then, each among the best of those before: least error
    of the total, fewest limits broken (exactly, from the kilograms), least sum of deviations each over what it is
    allowed, least cost. Batches that tie in all four may differ from another solver's.
    """
    began = time.perf_counter()
    placed = _placed(order)
    if isinstance(placed, NoBatch):
        return placed
    worse = _fixed_spoils(order, placed)
    if worse is not None:
        return worse
    totals = nearest_totals(order, placed)
    if totals is not None and not totals:
        return NoBatch((Reason(None, "total"),))
    return _Search(task(order, placed), totals, began, time_limit_s).run()


def _placed(order: Order) -> tuple[Placed, ...] | NoBatch:
    if not order.lines:
        return NoBatch((Reason(None, "none"),))
    found = [place(line) if line.fixed_kg is None else place_fixed(line) for line in order.lines]
    reasons = [replace(one, line=j) for j, one in enumerate(found) if isinstance(one, Reason)]
    return NoBatch(tuple(reasons)) if reasons else tuple(one for one in found if isinstance(one, Placed))


def _fixed_spoils(order: Order, placed: Sequence[Placed]) -> NoBatch | None:
    """Where the fixed lines keep the total further from the batch than rounding explains.

    What the free lines must come to beside fixed ones is any mass, and whole steps reach it to half a step of the
    coarsest of them while that one may still give and take; to a whole step where an end of the order lies that near
    and shuts out the other side. An error up to that, or up to what the same lines unfixed leave, is shown as any
    residue is. A greater one means that the free lines are at the end of what their tolerances let them make up for.
    """
    if all(line.fixed_kg is None for line in order.lines):
        return None
    free = replace(order, lines=tuple(replace(line, fixed_kg=None) for line in order.lines))
    unfixed = _placed(free)
    if isinstance(unfixed, NoBatch):
        return None
    here, best = _nearest(order, placed), _nearest(free, unfixed)
    if here is None or best is None or best.total is None:
        return None
    if here.total is None:  # no total between the ends of the order, and without the fixed lines there is one
        open_ended = _nearest(replace(order, least_total_kg=None, greatest_total_kg=None), placed)
        return NoBatch((Reason(None, "fixed total", None if open_ended is None else open_ended.total),))
    wanted = exact(order.batch_kg)
    explained = max(abs(best.total - wanted) + max(here.play, best.play), _rounding(order, placed))
    if abs(here.total - wanted) <= explained:
        return None
    return NoBatch((Reason(None, "fixed total", here.total),))


def _rounding(order: Order, placed: Sequence[Placed]) -> Fraction:
    """How far from the batch a total may lie for the steps of the lines that are free."""
    step = max((p.step for p in placed if not p.fixed), default=Fraction(0))
    ends = (end for end in (order.least_total_kg, order.greatest_total_kg) if end is not None)
    near = any(abs(exact(end) - exact(order.batch_kg)) < step / 2 for end in ends)
    return step if near else step / 2


class _Nearest(NamedTuple):
    """The total nearest to the batch, None where none lies between the ends; play: how far another one is as near."""

    total: Fraction | None
    play: Fraction


def _nearest(order: Order, placed: Sequence[Placed]) -> _Nearest | None:
    """None where it is not known."""
    totals = nearest_totals(order, placed)
    if totals is not None:
        return _Nearest(totals[0] if totals else None, Fraction(0))
    mixed = nearest_mixed(order, placed)
    if mixed is None or (mixed.total is None and not mixed.whole):
        return None
    return _Nearest(mixed.total, _PLAY * min(p.step for p in placed))


class _Search:
    def __init__(self, task: Task, totals: list[Fraction] | None, began: float, time_limit_s: float) -> None:
        self.task, self.began, self.ends = task, began, began + time_limit_s
        self.wanted = exact(task.order.batch_kg)
        self.totals = totals
        self.play = Fraction(0)
        self.first: tuple[int, ...] | None = None  # steps that come to the nearest total
        self.best: tuple[int, ...] | None = None

    def run(self) -> WholeBatch | NoBatch:
        total = self._total()
        if isinstance(total, NoBatch):
            return total
        assert self.totals is not None
        self.near = abs(self.totals[0] - self.wanted) + self.play
        self.best = start(self.task, self.totals, _START_SHARE * self._left(), self.play)
        if not self._on_total(self.best):
            first = self.first or steps_to(self.task.placed, float(self.totals[0]))
            self.best = start(self.task, self.totals, _START_SHARE * self._left(), self.play, first)
        self.programs = Integers(self.task, self.totals, self.play)
        limits = self._limits()
        deviation = self._deviation()
        cost = self._cost()
        assert self.best is not None
        n = self.best
        broken = self.task.broken(n)
        if len(broken) < limits.value:  # a later aim came upon it
            limits = replace(limits, value=len(broken), proven=len(broken) <= limits.bound)
        error = abs(self.task.total(n) - self.wanted)
        if float(error) > total.value:
            total = replace(total, value=float(error), proven=total.proven and error <= self.near)
        return WholeBatch(
            placed=self.task.placed,
            steps=n,
            kilograms=tuple(p.step * k for p, k in zip(self.task.placed, n, strict=True)),
            total_kg=self.task.total(n),
            error_kg=error,
            broken=broken,
            deviation=float(self.task.deviation(n)),
            cost=self.task.money(n),
            stages=(total, limits, deviation, cost),
            seconds=time.perf_counter() - self.began,
        )

    def _left(self) -> float:
        return max(self.ends - time.perf_counter(), 0.0)

    def _total(self) -> Stage | NoBatch:
        """The totals that the batch may come to; by the solver where there are too many sums to mark."""
        if self.totals is not None:
            error = float(abs(self.totals[0] - self.wanted))
            return Stage("total", error, error, True)
        self.play = _PLAY * min(p.step for p in self.task.placed)
        mixed = nearest_mixed(self.task.order, self.task.placed)
        if mixed is not None and mixed.total is None and mixed.whole:
            return NoBatch((Reason(None, "total"),))
        if mixed is not None and mixed.total is not None:
            total, self.first = mixed.total, mixed.steps
            bound = float(abs(total - self.wanted)) if mixed.whole else 0.0
        else:
            found = Integers(self.task, [self.wanted]).nearest_total(0.4 * self._left())
            if found.none:
                return NoBatch((Reason(None, "total"),))
            self.first = found.steps or tuple(p.nearest for p in self.task.placed)
            total = self.task.total(self.first)
            bound = max(found.bound, 0.0)
        self.totals = [self.wanted if abs(total - self.wanted) <= self.play and self._held(self.wanted) else total]
        error = float(abs(total - self.wanted))
        return Stage("total", error, bound, error <= bound + float(self.play))

    def _held(self, total: Fraction) -> bool:
        """Whether a total lies between the ends of the order."""
        least, greatest = self.task.order.least_total_kg, self.task.order.greatest_total_kg
        return (least is None or total >= exact(least)) and (greatest is None or total <= exact(greatest))

    def _limits(self) -> Stage:
        assert self.best is not None
        fewest = self.programs.always
        here = self._broken()
        bound = float(fewest)
        if here > fewest or not self._on_total(self.best):
            bound = self._tried(lambda: self.programs.fewest_broken(0.45 * self._left()), bound)
        here = self._broken()
        return Stage("limits", here, min(bound, here), here <= bound)

    def _deviation(self) -> Stage:
        assert self.best is not None
        most = self._broken()
        least = float(self.task.deviation([p.nearest for p in self.task.placed]))
        bound = self._tried(lambda: self.programs.least_deviation(most, 0.75 * self._left()), least)
        now = float(self.task.deviation(self.best))
        return Stage("deviation", now, min(max(bound, 0.0), now), _equal(now, bound))

    def _cost(self) -> Stage:
        assert self.best is not None
        most, deviation = self._broken(), float(self.task.deviation(self.best))
        least = sum(min(c * p.lo, c * p.hi, 0.0 if p.absent else c * p.lo)
                    for c, p in zip(self.task.cost, self.task.placed, strict=True))
        bound = self._tried(lambda: self.programs.least_cost(most, deviation, self._left()), least)
        now = self.task.money(self.best)
        return Stage("cost", now, min(bound, now), _equal(now, bound))

    def _tried(self, solve: Callable[[], Found], bound: float) -> float:
        """Solve, take the steps if they are better, and return the best bound.

        The solver may take dust for holding a limit; then that limit is guarded and solved again. The bound of the
        first, unguarded program stays valid, since guarding only shuts batches out.
        """
        first = True
        for _ in range(_MOST_GUARDED):
            if self._left() <= 0.0:
                break
            found = solve()
            if found.none:
                break
            if first:
                bound, first = max(bound, found.bound), False
            if found.steps is None:
                break
            steps = self._admitted(found.steps)
            if steps is None or not self._take(steps, found):
                break
        self.programs.guard.clear()
        return bound

    def _take(self, steps: tuple[int, ...], found: Found) -> bool:
        """Keep steps that are better; whether to guard limits and solve again."""
        assert self.best is not None
        if self._key(steps) < self._key(self.best):
            self.best = steps
            return False
        cheated = set(self.task.broken(steps)) - set(self.task.broken(self.best))
        fresh = {limit for limit in cheated if limit not in self.programs.guard}
        if not found.proven or len(self.task.broken(steps)) <= self._broken() or not fresh:
            return False
        self.programs.guard.update(dict.fromkeys(fresh, _GUARD))
        return True

    def _key(self, steps: tuple[int, ...]) -> tuple[Fraction, int, float, float]:
        error = abs(self.task.total(steps) - self.wanted)
        error = error if error > self.near else Fraction(0)
        deviation = round(float(self.task.deviation(steps)) / EQUAL * 10)
        return error, len(self.task.broken(steps)), deviation, self.task.money(steps)

    def _admitted(self, steps: tuple[int, ...]) -> tuple[int, ...] | None:
        inside = all(
            p.lo <= n <= p.hi or (p.absent and n == 0) for n, p in zip(steps, self.task.placed, strict=True)
        )
        return steps if inside else None

    def _on_total(self, steps: tuple[int, ...]) -> bool:
        return abs(self.task.total(steps) - self.wanted) <= self.near and self._held(self.task.total(steps))

    def _broken(self) -> int:
        assert self.best is not None
        return len(self.task.broken(self.best))


def _equal(value: float, bound: float) -> bool:
    return value <= bound + EQUAL * max(1.0, abs(bound))
