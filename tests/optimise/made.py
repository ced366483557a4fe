"""Programs made from a seed, for property tests: general ones, and degenerate ones by construction."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
from hypothesis import strategies as st

from blendapp.optimise.program import Array, Bound, Program, Row
from blendapp.optimise.solve import solve


def program(seed: int, columns: int, limits: int, ration: bool = False) -> Program:
    """A feasible program around a hidden mix: a blend, or a ration without a sum; every kind of linear row and
    bound, among them rows with divisors, both-sided ones and equalities."""
    random = np.random.default_rng(seed)
    hidden = random.dirichlet(np.full(columns, 0.6)) * (12.0 if ration else 1.0)
    hidden[hidden < 0.01] = 0.0
    if not ration:
        hidden /= hidden.sum()
    price = np.round(random.uniform(0.1, 1.5, columns) * (1.0 if ration else 1000.0), 3)
    dry = np.round(random.uniform(0.3, 0.95, columns), 3)
    rows = [] if ration else [Row(np.ones(columns), 1.0, 1.0)]
    for i in range(limits):
        content = np.round(random.gamma(1.5, 5.0, columns) * (random.random(columns) < 0.8), 3)
        content *= 10.0 ** random.integers(-2, 3)
        other = np.round(random.gamma(2.0, 3.0, columns), 3) + 0.1
        style = random.random()
        divisor = None if style < 0.6 else (dry if style < 0.8 else other)
        numerator = content * dry if divisor is dry else content
        value = float(numerator @ hidden) / (1.0 if divisor is None else float(divisor @ hidden))
        room = random.uniform(0.0, 0.15)
        side = random.random()
        low = value * (1 - room) if side < 0.55 or side > 0.8 else None
        high = value * (1 + room) if side >= 0.55 else None
        if side > 0.95:
            low = high = value
        rows.append(Row(numerator, low, high, divisor, limit=i))
    bounds = []
    for j in range(columns):
        style = random.random()
        if style < 0.15:
            bounds.append(Bound(j, None, float(hidden[j] * 1.1 + 0.02), limits + len(bounds)))
        elif style < 0.25:
            bounds.append(Bound(j, float(hidden[j] * 0.8), None, limits + len(bounds)))
        elif style < 0.32:
            bounds.append(Bound(j, float(hidden[j] * 0.9), float(hidden[j] * 1.1), limits + len(bounds)))
    upper = np.full(columns, np.inf if ration else 1.0)
    return Program(price, np.zeros(columns), upper, tuple(rows), tuple(bounds))


def spoilt(base: Program, seed: int) -> Program:
    """The same program made degenerate: bounds moved exactly onto the values of its answer, a row doubled in other
    units, a limit of a column at its amount, a twin of a column, a price tied so that a column costs nothing to
    bring in."""
    random = np.random.default_rng(seed)
    answer = solve(base)
    if answer.x is None:
        return base
    x = answer.x
    rows = list(base.rows)
    bounds = list(base.bounds)
    cost = base.cost.copy()
    fresh = max([r.limit for r in rows if r.limit is not None] + [b.limit for b in bounds] + [-1]) + 1
    if random.random() < 0.7:
        for i, row in enumerate(rows):
            if row.limit is None or random.random() < 0.5:
                continue
            per = 1.0 if row.divisor is None else float(row.divisor @ x)
            if per == 0.0:
                continue
            value = float(row.numerator @ x) / per
            if row.minimum is not None and row.maximum is None:
                rows[i] = dataclasses.replace(row, minimum=value)
            elif row.maximum is not None and row.minimum is None:
                rows[i] = dataclasses.replace(row, maximum=value)
    if random.random() < 0.5:
        served = [row for row in rows if row.limit is not None]
        if served:
            row = served[int(random.integers(len(served)))]
            rows.append(
                Row(
                    row.numerator * 3.0,
                    None if row.minimum is None else row.minimum * 3.0,
                    None if row.maximum is None else row.maximum * 3.0,
                    row.divisor,
                    fresh,
                )
            )
            fresh += 1
    if random.random() < 0.5:
        j = int(random.integers(base.size))
        if random.random() < 0.5:
            bounds.append(Bound(j, float(x[j]), None, fresh))
        else:
            bounds.append(Bound(j, None, float(x[j]), fresh))
        fresh += 1
    if random.random() < 0.4 and answer.lower_price is not None:
        j = int(random.integers(base.size))
        cost[j] -= answer.lower_price[j]  # reduced cost becomes nought
    made = dataclasses.replace(base, cost=cost, rows=tuple(rows), bounds=tuple(bounds))
    return with_twin(made, int(random.integers(base.size))) if random.random() < 0.3 else made


def with_twin(base: Program, j: int) -> Program:
    """The program with one more column, equal to column j in everything but the limits that are column bounds."""

    def more(vector: Array) -> Array:
        return np.append(vector, vector[j])

    rows = tuple(
        dataclasses.replace(
            row, numerator=more(row.numerator), divisor=None if row.divisor is None else more(row.divisor)
        )
        for row in base.rows
    )
    return dataclasses.replace(base, cost=more(base.cost), lower=more(base.lower), upper=more(base.upper), rows=rows)


def moved(base: Program, limit: int, side: str, step: float) -> Program:
    """The program with one bound of one limit moved by step ("both": minimum and maximum together)."""

    def shift(one: Any) -> Any:
        if one.limit != limit:
            return one
        low, high = one.minimum, one.maximum
        if side in ("minimum", "both"):
            low += step
        if side in ("maximum", "both"):
            high = low if side == "both" and one.minimum == one.maximum else high + step
        return dataclasses.replace(one, minimum=low, maximum=high)

    return dataclasses.replace(
        base, rows=tuple(shift(row) for row in base.rows), bounds=tuple(shift(bound) for bound in base.bounds)
    )


@st.composite
def programs(draw: st.DrawFn, degenerate: bool | None = None) -> Program:
    """General and degenerate programs of up to 14 columns."""
    base = program(
        seed=draw(st.integers(0, 10**6)),
        columns=draw(st.integers(2, 14)),
        limits=draw(st.integers(0, 9)),
        ration=draw(st.booleans()),
    )
    spoil = draw(st.booleans()) if degenerate is None else degenerate
    return spoilt(base, draw(st.integers(0, 10**6))) if spoil else base
