"""Made-up programs for the timings: shaped like feed, always solvable, each from a seed."""

from __future__ import annotations

import numpy as np

from blendapp.optimise.program import Bound, Program, Row


def mix(columns: int, limits: int, seed: int) -> Program:
    """A mix of `columns` ingredients under `limits` limits besides its sum, solvable by construction.

    Composition is dense. Most limits are minima or maxima with room around a hidden mix, one in six has both sides,
    one in eight multiplies amounts (per dry matter), and a fifth of the columns has an inclusion limit.
    """
    random = np.random.default_rng(seed)
    used = random.choice(columns, size=max(4, limits // 2), replace=False)
    hidden = np.zeros(columns)
    hidden[used] = random.dirichlet(np.full(used.size, 0.7))
    price = random.uniform(120.0, 900.0, columns)
    dry = random.uniform(0.85, 0.95, columns)
    rows = [Row(np.ones(columns), 1.0, 1.0)]
    for i in range(limits):
        content = random.gamma(2.0, 4.0, columns) * (random.random(columns) < 0.9)
        content += price * random.uniform(0.0, 0.02)  # dear ingredients tend to hold more
        divisor = dry if random.random() < 1 / 8 else None
        numerator = content if divisor is None else content * dry
        value = float(numerator @ hidden) / (1.0 if divisor is None else float(divisor @ hidden))
        room = random.uniform(0.005, 0.08)
        kind = random.random()
        low = value * (1 - room) if kind < 0.65 or kind > 0.83 else None
        high = value * (1 + room) if kind >= 0.65 else None
        rows.append(Row(numerator, low, high, divisor, limit=i))
    bounds = []
    for k, j in enumerate(random.choice(columns, size=columns // 5, replace=False)):
        bounds.append(Bound(int(j), None, float(max(hidden[j] * 1.2, 0.03)), limit=limits + k))
    return Program(price, np.zeros(columns), np.ones(columns), tuple(rows), tuple(bounds))
