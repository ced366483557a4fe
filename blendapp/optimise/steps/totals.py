"""Which totals whole steps can make: exactly, by marking every reachable sum as one bit of a whole number."""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction

from blendapp.optimise.steps.problem import Order, Placed, exact

# Sums further apart than this many of the finest common step are not marked one by one (8 MB).
_MOST_BITS = 1 << 26


def nearest_totals(order: Order, placed: Sequence[Placed]) -> list[Fraction] | None:
    """The reachable totals in kg nearest to the batch: one, two equally near, or none inside the order's ends.

    None where there are too many sums to mark. Exact otherwise: no other total is as near.
    """
    common = common_measure(placed)
    base = 0
    spread: list[tuple[int, int, int, bool]] = []  # per line: size of a step, lo, hi, and whether 0 too
    for p in placed:
        size = int(p.step / common)
        absent = p.absent and p.lo > 0
        if not absent:
            base += p.lo * size
        spread.append((size, 0 if not absent else p.lo, p.hi - p.lo if not absent else p.hi, absent))
    if sum(size * hi for size, _lo, hi, _absent in spread) > _MOST_BITS:
        return None
    # Lines with the same step and no gap are one longer line.
    merged: dict[int, int] = {}
    for size, _lo, hi, absent in spread:
        if not absent:
            merged[size] = merged.get(size, 0) + hi
    marks = 1
    for size, hi in sorted(merged.items()):
        marks = _spread(marks, size, hi)
    for size, lo, hi, absent in spread:
        if absent:
            marks |= _spread(marks << (lo * size), size, hi - lo)
    least = -math.inf if order.least_total_kg is None else math.ceil(exact(order.least_total_kg) / common)
    greatest = math.inf if order.greatest_total_kg is None else math.floor(exact(order.greatest_total_kg) / common)
    wanted = exact(order.batch_kg) / common
    found = []
    below = _at_most(marks, math.floor(min(wanted, greatest)) - base)
    if below is not None and below + base >= least:
        found.append(below + base)
    above = _at_least(marks, math.ceil(max(wanted, least)) - base)
    if above is not None and above + base <= greatest:
        found.append(above + base)
    error = min((abs(total - wanted) for total in found), default=None)
    return [total * common for total in sorted(set(found)) if abs(total - wanted) == error]


def common_measure(placed: Sequence[Placed]) -> Fraction:
    """The greatest mass in kg of which every step is a whole multiple."""
    steps = [p.step for p in placed]
    by = math.lcm(*(s.denominator for s in steps))
    return Fraction(math.gcd(*(int(s * by) for s in steps)), by)


def _spread(marks: int, size: int, most: int) -> int:
    """marks with 0 to most times size added."""
    count = 1
    while count * 2 <= most + 1:
        marks |= marks << (count * size)
        count *= 2
    return marks | marks << ((most + 1 - count) * size)


def _at_most(marks: int, place: int) -> int | None:
    """The highest mark at or below a place."""
    if place < 0:
        return None
    low = marks & ((1 << (place + 1)) - 1)
    return low.bit_length() - 1 if low else None


def _at_least(marks: int, place: int) -> int | None:
    """The lowest mark at or above a place."""
    place = max(place, 0)
    high = marks >> place
    return place + (high & -high).bit_length() - 1 if high else None
