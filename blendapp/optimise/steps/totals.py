"""Which totals whole steps can make: exactly, by marking every reachable sum as one bit of a whole number."""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from typing import NamedTuple

import numpy as np

from blendapp.optimise.program import Array
from blendapp.optimise.steps.problem import Order, Placed, exact

# Sums further apart than this many of the finest common step are not marked one by one (8 MB).
_MOST_BITS = 1 << 26
# Where not all lines can be marked together: bits of those that are, combinations of their sums, and how much finer
# than the finest step of such lines their common measure may be.
_MOST_LISTED = 1 << 24
_MOST_COMBINED = 1 << 21
_FINER = 100
_DUST_KG = 1e-9


def nearest_totals(order: Order, placed: Sequence[Placed]) -> list[Fraction] | None:
    """The reachable totals in kg nearest to the batch: one, two equally near, or none inside the order's ends.

    None where there are too many sums to mark. Exact otherwise: no other total is as near.
    """
    common = common_measure(placed)
    marked = _marked(placed, common)
    if marked is None:
        return None
    base, marks = marked
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


def _marked(placed: Sequence[Placed], common: Fraction, most_bits: int = _MOST_BITS) -> tuple[int, int] | None:
    """Every sum of lines: the least of those that are never absent, and a bit for each multiple of the common measure
    above it. None where there are more than may be marked."""
    base = 0
    spread: list[tuple[int, int, int, bool]] = []  # per line: size of a step, lo, hi, and whether 0 too
    for p in placed:
        size = int(p.step / common)
        absent = p.absent and p.lo > 0
        if not absent:
            base += p.lo * size
        spread.append((size, 0 if not absent else p.lo, p.hi - p.lo if not absent else p.hi, absent))
    if sum(size * hi for size, _lo, hi, _absent in spread) > most_bits:
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
    return base, marks


class Mixed(NamedTuple):
    """total: in kg, None where none lies between the ends. steps: a batch of that total. whole: whether every
    combination was looked at: then no total is nearer by more than the rounding of floats."""

    total: Fraction | None
    steps: tuple[int, ...] | None
    whole: bool


def nearest_mixed(order: Order, placed: Sequence[Placed]) -> Mixed | None:
    """A total near the batch, where steps in different units (pounds, kilograms, litres times a density) have no common
    measure that could be marked: lines whose steps divide each other are marked together, their sums combined.

    None where even the sums of one kind are too many.
    """
    found = [(kind, _sums([placed[j] for j in kind])) for kind in _kinds(placed)]
    listed = sorted(((kind, sums) for kind, sums in found if sums is not None), key=lambda one: len(one[1]))
    if len(listed) < len(found):
        return None
    few, many = [sums for _kind, sums in listed[:-1]], listed[-1][1]
    whole = math.prod(map(len, few)) <= _MOST_COMBINED
    while math.prod(map(len, few)) > _MOST_COMBINED:
        longest = max(range(len(few)), key=lambda k: len(few[k]))
        few[longest] = few[longest][len(few[longest]) // 4 : -(len(few[longest]) // 4)]
    combined = np.zeros(1)
    for sums in few:
        combined = (combined[:, None] + sums[None, :]).ravel()
    wanted = float(order.batch_kg)
    least = -math.inf if order.least_total_kg is None else order.least_total_kg
    greatest = math.inf if order.greatest_total_kg is None else order.greatest_total_kg
    low, high = min(max(wanted, least), greatest), max(min(wanted, greatest), least)
    best: tuple[float, int, int] | None = None
    for place in (
        np.searchsorted(many, low - combined + _DUST_KG, side="right") - 1,
        np.searchsorted(many, high - combined - _DUST_KG, side="left"),
    ):
        inside = (place >= 0) & (place < len(many))
        totals = combined + many[np.clip(place, 0, len(many) - 1)]
        inside &= (totals >= least - _DUST_KG) & (totals <= greatest + _DUST_KG)
        if inside.any():
            at = int(np.where(inside, np.abs(totals - wanted), np.inf).argmin())
            best = min(filter(None, (best, (abs(float(totals[at]) - wanted), at, int(place[at])))))
    if best is None:
        return Mixed(None, None, whole)
    chosen = [int(at) for at in np.unravel_index(best[1], [len(sums) for sums in few])] if few else []
    chosen.append(best[2])
    steps = [0] * len(placed)
    for (kind, _all), sums, at in zip(listed, [*few, many], chosen, strict=True):
        for j, n in zip(kind, steps_to([placed[j] for j in kind], float(sums[at])), strict=True):
            steps[j] = n
    return Mixed(sum((p.step * n for p, n in zip(placed, steps, strict=True)), Fraction(0)), tuple(steps), whole)


def steps_to(placed: Sequence[Placed], total_kg: float) -> list[int]:
    """Steps of lines that can be marked, which come to a total that they can make, each near its share."""
    common = common_measure(placed)
    sizes = [int(p.step / common) for p in placed]
    reach = [1]
    for p, size in zip(placed, sizes, strict=True):
        before = reach[-1]
        if p.absent and p.lo > 0:
            reach.append(before | _spread(before << (p.lo * size), size, p.hi - p.lo))
        else:
            reach.append(_spread(before, size, p.hi - p.lo))
    rest = round(total_kg / float(common)) - sum(
        p.lo * size for p, size in zip(placed, sizes, strict=True) if not (p.absent and p.lo > 0)
    )
    steps = [0] * len(placed)
    for j in reversed(range(len(placed))):
        p, base = placed[j], 0 if placed[j].absent and placed[j].lo > 0 else placed[j].lo
        marks = reach[j].to_bytes(reach[j].bit_length() // 8 + 1, "little")
        for n in sorted(p.choices, key=lambda n: abs(n * p.step - p.share)):
            left = rest - (n - base) * sizes[j]
            if 0 <= left < 8 * len(marks) and marks[left >> 3] >> (left & 7) & 1:
                steps[j], rest = n, left
                break
    return steps


def _kinds(placed: Sequence[Placed]) -> list[list[int]]:
    """Lines, by place, whose steps have a common measure that is not much finer than the finest of them."""
    kinds: list[list[int]] = []
    for j in sorted(range(len(placed)), key=lambda j: placed[j].step):
        for kind in kinds:
            together = common_measure([placed[k] for k in [*kind, j]])
            if together * _FINER >= placed[kind[0]].step:
                kind.append(j)
                break
        else:
            kinds.append([j])
    return kinds


def _sums(placed: Sequence[Placed]) -> Array | None:
    """Every sum of some lines in kg, ascending."""
    common = common_measure(placed)
    marked = _marked(placed, common, _MOST_LISTED)
    if marked is None:
        return None
    base, marks = marked
    bits = np.unpackbits(
        np.frombuffer(marks.to_bytes(marks.bit_length() // 8 + 1, "little"), dtype=np.uint8), bitorder="little"
    )
    return np.asarray((np.flatnonzero(bits) + base) * float(common), dtype=np.float64)


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
