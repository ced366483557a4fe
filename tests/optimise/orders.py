"""Orders made from a seed: a mix that is the answer of a made-up formula, on the scales of a made-up mill."""

from __future__ import annotations

import numpy as np

from blendapp.optimise.program import Array, Row
from blendapp.optimise.steps.problem import LeastIfUsed, Line, Load, Order

BIG = Load(5.0, 20.0, 2000.0)
MIDDLE = Load(1.0, 5.0, 300.0)
SMALL = Load(0.1, 0.5, 60.0)
HAND = Load(0.001, 0.005, 6.0, tolerance=0.01)
SCALES = (BIG, MIDDLE, SMALL, HAND)


def order(
    seed: int, lines: int = 25, limits: int = 20, binding: int = 12, batch_kg: float | None = None, decimals: int = 2
) -> Order:
    """A batch of a few tonnes: a third large lines, then middling and micro ones, each on the coarsest fitting scale.

    Of the limits, `binding` stand at the very value of the mix (as at an optimum) and the others have room; one in
    six has both sides, one in twenty is an equality, one in six is a ratio and one in ten bounds a single line.
    """
    random = np.random.default_rng(seed)
    shares = np.concatenate(
        (
            random.uniform(3.0, 30.0, max(2, lines // 3)),
            random.uniform(0.2, 3.0, lines // 3),
            10 ** random.uniform(-2.3, -0.7, lines - lines // 3 - max(2, lines // 3)),
        )
    )[:lines]
    shares /= shares.sum()
    mass = float(random.choice([500, 1000, 1825, 2000, 3000])) if batch_kg is None else batch_kg
    price = np.round(random.uniform(150.0, 3000.0, lines), 2)
    rows = [limit(random, shares, i, tight=i < binding, decimals=decimals) for i in range(limits)]
    least = []
    if lines > 6 and random.random() < 0.5:
        j = int(random.integers(lines))
        least.append(LeastIfUsed(j, float(shares[j] * random.uniform(0.8, 1.0)), limits))
    made = []
    for share, money in zip((shares * mass).tolist(), price.tolist(), strict=True):
        loads = [load for load in SCALES if load.greatest_kg is None or share <= load.greatest_kg]
        own = next((k for k, load in enumerate(loads) if share >= (load.least_kg or 0.0)), 0)
        made.append(Line(share, (loads[own], *loads[:own], *loads[own + 1 :]), money / 1000))
    return Order(mass, tuple(made), tuple(rows), tuple(least))


def limit(random: np.random.Generator, shares: Array, index: int, tight: bool, decimals: int = 2) -> Row:
    """A limit that the shares meet: at its bound where tight, else with up to 5 % of room."""
    n = shares.size
    style = random.random()
    if style < 0.1:
        numerator = np.zeros(n)
        numerator[random.integers(n)] = 1.0
    else:
        numerator = np.round(random.gamma(1.5, 8.0, n) * (random.random(n) < 0.85), decimals) + 0.0
        numerator[0] += 0.5
    divisor = np.round(random.gamma(3.0, 2.0, n), decimals) + 0.1 if 0.1 <= style < 0.27 else None
    value = float(numerator @ shares) / (1.0 if divisor is None else float(divisor @ shares))
    room = 0.0 if tight else float(random.uniform(0.0, 0.05))
    side = random.random()
    if side < 0.05:
        return Row(numerator, value, value, divisor, index)
    low = value * (1 - room) if side < 0.6 or side > 0.83 else None
    high = value * (1 + (room if low is None else random.uniform(0.0, 0.05))) if side >= 0.6 else None
    return Row(numerator, low, high, divisor, index)
