"""Where everything on a rail stands: values on an axis, an axis on pixels. No Qt, no state."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import Enum


class End(Enum):
    """What a hand can hold on a rail: an end of the permitted stretch, or the mark of a price."""

    MINIMUM = "minimum"
    MAXIMUM = "maximum"
    MARK = "mark"


@dataclass(frozen=True)
class RailState:
    """One limit, inclusion or price as a rail shows it; all values in the displayed unit.

    minimum, maximum: the permitted stretch, None where open. mark: the answer (of a price: today's), None where
    there is none. room: what all the other limits leave, either side None where open; None where not known.
    working: ends that hold the answer. conflict: ends that cannot be met together. held: what a hand may move.
    tag: what a working end costs, in words. decimals: of the displayed value; one nudge is its last figure.
    floor, ceiling: values that no end may pass. stale: the answer is of before the last edit.
    """

    minimum: float | None = None
    maximum: float | None = None
    mark: float | None = None
    room: tuple[float | None, float | None] | None = None
    working: frozenset[End] = frozenset()
    conflict: frozenset[End] = frozenset()
    held: tuple[End, ...] = (End.MINIMUM, End.MAXIMUM)
    tag: str = ""
    decimals: int = 2
    floor: float | None = None
    ceiling: float | None = None
    stale: bool = False

    def value(self, end: End) -> float | None:
        """The value at an end, None where it is open."""
        return {End.MINIMUM: self.minimum, End.MAXIMUM: self.maximum, End.MARK: self.mark}[end]

    def ends(self) -> tuple[End, ...]:
        """The ends that can be held now: those with a value."""
        return tuple(end for end in self.held if self.value(end) is not None)

    def moved(self, end: End, value: float) -> RailState:
        """The same rail with one end elsewhere, kept between floor and ceiling and on its own side of the other."""
        return self.with_end(end, self.kept(end, value))

    def with_end(self, end: End, value: float) -> RailState:
        """The same rail with one end elsewhere, wherever that is."""
        if end is End.MINIMUM:
            return replace(self, minimum=value)
        return replace(self, maximum=value) if end is End.MAXIMUM else replace(self, mark=value)

    def kept(self, end: End, value: float) -> float:
        """A proposed value, rounded to what is displayed and kept where the end may stand."""
        low, high = self.floor, self.ceiling
        if end is End.MINIMUM and self.maximum is not None:
            high = self.maximum if high is None else min(high, self.maximum)
        if end is End.MAXIMUM and self.minimum is not None:
            low = self.minimum if low is None else max(low, self.minimum)
        value = round(value, self.decimals)
        if high is not None:
            value = min(value, high)
        if low is not None:
            value = max(value, low)
        return value


@dataclass(frozen=True)
class Axis:
    """The stretch of values that a rail shows, low < high."""

    low: float
    high: float

    def place(self, value: float, width: float) -> float:
        """Pixels from the left end of a rail of that width; beyond the ends for values beyond the axis."""
        return (value - self.low) / (self.high - self.low) * width

    def value(self, x: float, width: float) -> float:
        """The value at a pixel."""
        return self.low + x / max(width, 1.0) * (self.high - self.low)

    def holds(self, value: float) -> bool:
        """Whether a value can be seen on the axis."""
        return self.low <= value <= self.high


def nudge_step(state: RailState, axis: Axis, *, big: bool) -> float:
    """How far one press of an arrow key moves an end: a round figure near a hundredth of the axis, ten if big.

    Never less than the last displayed figure.
    """
    span = (axis.high - axis.low) / 100.0
    exact = 10.0 ** math.floor(math.log10(span)) if span > 0 else 0.0
    return max(exact, 10.0**-state.decimals) * (10.0 if big else 1.0)


def axis_for(state: RailState, before: Axis | None = None) -> Axis:
    """The axis of a rail. The one of before stays as long as all that matters is seen on it at a fair size.

    Ends and mark decide; the room of other limits may widen the axis to at most twice their stretch.
    """
    if state.held == (End.MARK,):
        core = _finite(state.mark, state.minimum, state.maximum)
    else:
        core = _finite(state.minimum, state.maximum, state.mark)
    if not core:
        return before or Axis(0.0, 1.0)
    if before is not None and _still_fair(core, before):
        return before
    low, high = min(core), max(core)
    span = high - low
    least_span = max(0.12 * max(abs(low), abs(high)), 5 * 10.0**-state.decimals)
    if span < least_span:
        spare = (least_span - span) / 2
        low, high, span = low - spare, high + spare, least_span
    for room in _finite(*(state.room or ())):
        low, high = min(low, max(room, low - span / 2)), max(high, min(room, high + span / 2))
    span = high - low
    low -= span * (0.45 if state.minimum is None else 0.28)
    high += span * (0.45 if state.maximum is None else 0.28)
    if state.floor is not None and min(core) >= state.floor:
        low = max(low, state.floor)
    elif min(core) >= 0:
        low = max(low, 0.0)
    if state.ceiling is not None and max(core) <= state.ceiling:
        high = min(high, state.ceiling)
    if high <= low:
        high = low + max(abs(low), 1.0)
    return Axis(low, high)


def _still_fair(core: list[float], axis: Axis) -> bool:
    width = axis.high - axis.low
    seen = all(axis.holds(value) for value in core)
    return seen and (len(core) == 1 or max(core) - min(core) >= 0.08 * width or width <= 0.3 * abs(max(core)))


def _finite(*values: float | None) -> list[float]:
    return [value for value in values if value is not None and math.isfinite(value)]


def end_at(state: RailState, axis: Axis, x: float, width: float, reach: float = 9.0) -> End | None:
    """The end under a pointer, the nearer one of two; None if neither is within reach.

    Where both ends stand at one place, the side on which the pointer is decides.
    """
    near: list[tuple[float, End]] = []
    for end in state.ends():
        value = state.value(end)
        assert value is not None
        near.append((abs(axis.place(value, width) - x), end))
    near = [pair for pair in near if pair[0] <= reach]
    if not near:
        return None
    least = min(distance for distance, _end in near)
    closest = [end for distance, end in near if distance == least]
    if len(closest) > 1:
        value = state.value(closest[0])
        assert value is not None
        return closest[-1] if x >= axis.place(value, width) else closest[0]
    return closest[0]
