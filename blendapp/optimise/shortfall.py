"""A program whose rows may fall short, at a price: which limits clash, and by how much.

Every verdict is checked without the solver: a "can" by its mix, a "cannot" by multipliers (Farkas) y with
y a x <= what the columns' bounds allow and y b above it.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from blendapp.optimise.arrays import Arrays, Indices
from blendapp.optimise.linear import FailedSolve
from blendapp.optimise.program import Array, Row
from blendapp.optimise.warm import DUAL, PRIMAL, Verdict, Warm

_HOLDS = 1e-9
_PRICED = 1e-9


class Elastic:
    """The rows of some arrays, each that serves a limit with columns for its shortfall, kept warm. Limits can be
    dropped (their rows do not count) and restored, opened (their rows may fall short) and closed."""

    def __init__(self, arrays: Arrays) -> None:
        self.arrays = arrays
        m, n = arrays.a.shape
        k = arrays.inequalities
        self._n = n
        owners = [arrays.program.rows[int(i)].limit for i in arrays.row]
        self._rows: dict[int, list[int]] = {}
        for row, owner in enumerate(owners):
            if owner is not None:
                self._rows.setdefault(owner, []).append(row)
        self.limits = tuple(sorted(self._rows))
        down = np.array([row for row, owner in enumerate(owners) if owner is not None], dtype=np.int64)
        up = down[down >= k]
        self._served: Indices = np.concatenate((down, up))  # the row of each shortfall column
        extra = self._served.size
        turn = np.concatenate((np.ones(down.size), -np.ones(up.size)))
        wide = np.zeros((m, n + extra))
        wide[:, :n] = arrays.a
        wide[self._served, n + np.arange(extra)] = turn
        self._columns: dict[int, list[int]] = {}
        for column, row in enumerate(self._served.tolist()):
            owner = owners[row]
            assert owner is not None
            self._columns.setdefault(owner, []).append(n + column)
        self._price = np.concatenate((np.zeros(n), np.ones(extra)))
        self._warm = Warm(
            dataclasses.replace(
                arrays,
                a=wide,
                cost=self._price,
                lower=np.concatenate((arrays.lower, np.zeros(extra))),
                upper=np.concatenate((arrays.upper, np.full(extra, np.inf))),
            ),
            None,
            DUAL,
        )

    def solve(self) -> Verdict:
        """Solve for the least priced shortfall, as things are set."""
        return self._warm.solve()

    def x(self) -> Array:
        """The mix of the last solve, shape (n,), within its bounds."""
        return np.clip(self._warm.x()[: self._n], self.arrays.lower, self.arrays.upper)

    def row(self, limit: int) -> Row:
        """The row of a limit."""
        return self.arrays.program.rows[int(self.arrays.row[self._rows[limit][0]])]

    def drop(self, limit: int) -> None:
        """Let the rows of a limit not count."""
        for row in self._rows[limit]:
            self._warm.set_row(row, -np.inf, np.inf)

    def restore(self, limit: int) -> None:
        """Let the rows of a limit count again."""
        for row in self._rows[limit]:
            end = float(self.arrays.b[row])
            self._warm.set_row(row, end, np.inf if row < self.arrays.inequalities else end)

    def open(self, limit: int | None = None) -> None:
        """Let a limit, or every one, fall short."""
        self._set(limit, np.inf)

    def close(self, limit: int | None = None) -> None:
        """Let a limit, or every one, not fall short."""
        self._set(limit, 0.0)

    def _set(self, limit: int | None, end: float) -> None:
        for one in self.limits if limit is None else (limit,):
            for column in self._columns[one]:
                self._warm.set_column(column, 0.0, end)

    def weigh(self, weight: Array) -> None:
        """Price the shortfall of each row, shape (m,)."""
        scaled = weight[self._served]
        self._price = np.concatenate((np.zeros(self._n), scaled / float(scaled.max(initial=0.0))))
        self._warm.set_strategy(PRIMAL)
        self._warm.set_cost(self._price)

    def aim(self, cost: Array | None) -> Verdict:
        """Solve for another cost of the mix, shape (n,), shortfalls free; None goes back to their prices."""
        if cost is None:
            self._warm.set_cost(self._price)
            self._warm.set_strategy(DUAL)
            return "unclear"
        self._warm.set_strategy(PRIMAL)
        self._warm.set_cost(np.concatenate((cost, np.zeros(self._served.size))))
        return self._warm.solve()

    def missed(self, x: Array) -> Indices:
        """The rows that a mix does not meet."""
        return _shortfall(self.arrays, x).nonzero()[0]

    def meets(self, x: Array, limits: Sequence[int] | None = None) -> bool:
        """Whether a mix meets the balance and these limits, by default all."""
        short = _shortfall(self.arrays, x)
        if limits is not None:
            counts: NDArray[np.bool_] = np.ones(short.size, dtype=bool)
            for limit in set(self.limits) - set(limits):
                counts[self._rows[limit]] = False
            short = short[counts]
        return not short.any()


@dataclass(frozen=True, eq=False)
class Clash:
    """limits: few that cannot hold together. witnesses: of some of them, a mix that meets all the others of them."""

    limits: tuple[int, ...]
    witnesses: dict[int, Array]


def clashing(arrays: Arrays) -> Clash | None:
    """Limits that cannot hold together, few of them; None where all rows can be met, no limits where the balance and
    the columns' own bounds clash. Raises FailedSolve where the solver gives no clear status.

    The largest shortfall of any limit's scaled row is made as small as can be: one column for all of them.
    """
    k = arrays.inequalities
    owners = [arrays.program.rows[int(i)].limit for i in arrays.row]
    served = np.array([owner is not None for owner in owners], dtype=np.float64)
    equal = np.arange(arrays.b.size) >= k
    split = (equal & (served > 0)).nonzero()[0]  # an equality may be missed either way: two inequalities
    first = np.concatenate((np.arange(k), split, split)).astype(np.int64)
    turn = np.concatenate((np.ones(k + split.size), -np.ones(split.size)))
    last = (equal & (served == 0)).nonzero()[0]
    order = np.concatenate((first, last))
    signs = np.concatenate((turn, np.ones(last.size)))
    warm = Warm(
        dataclasses.replace(
            arrays,
            a=np.hstack((arrays.a[order] * signs[:, None], served[order][:, None])),
            b=arrays.b[order] * signs,
            inequalities=first.size,
            cost=np.append(np.zeros(arrays.cost.size), 1.0),
            lower=np.append(arrays.lower, 0.0),
            upper=np.append(arrays.upper, np.inf),
        ),
        None,
        DUAL,
    )
    verdict = warm.solve()
    if verdict == "infeasible":
        return Clash((), {})
    if verdict != "optimal":
        raise FailedSolve("the least shortfall was not found")
    x = np.clip(warm.x()[:-1], arrays.lower, arrays.upper)
    if not _shortfall(arrays, x).any():
        return None
    price = np.abs(warm.duals())
    rows = (price > _PRICED * float(price.max(initial=0.0))).nonzero()[0]
    limits = [owners[int(order[r])] for r in rows]
    return Clash(
        tuple(sorted({limit for limit in limits if limit is not None})),
        _witnesses(arrays, x, float(warm.x()[-1]), rows, limits, order, signs),
    )


def _witnesses(
    arrays: Arrays, x: Array, largest: float, rows: Indices, limits: list[int | None], order: Indices, signs: Array
) -> dict[int, Array]:
    """Mixes that meet all clashing rows but one, by linear algebra: at x every one of them is missed by the same.

    With M the free columns of those rows and of the balance, and the column of the common shortfall, column i of its
    inverse says how to heap the whole shortfall on row i. A mix that leaves its bounds is left out.
    """
    kept = [r for r, limit in zip(rows.tolist(), limits, strict=True) if limit is not None]
    owner = [limit for limit in limits if limit is not None]
    balance = [r for r in range(order.size) if arrays.program.rows[int(arrays.row[order[r]])].limit is None]
    tolerance = 1e-9 * max(1.0, float(np.abs(x).max(initial=0.0)))
    free = ((x > arrays.lower + tolerance) & (x < arrays.upper - tolerance)).nonzero()[0]
    used = np.array(kept + balance, dtype=np.int64)
    served = np.concatenate((np.ones(len(kept)), np.zeros(len(balance))))
    matrix = np.hstack((arrays.a[np.ix_(order[used], free)] * signs[used][:, None], served[:, None]))
    if matrix.shape[0] != matrix.shape[1] or len(set(owner)) < len(owner):
        return {}
    try:
        inverse = np.linalg.inv(matrix)
    except np.linalg.LinAlgError:
        return {}
    found: dict[int, Array] = {}
    for i, limit in enumerate(owner):
        share = float(inverse[-1, i])
        if abs(share) <= _PRICED:
            continue
        mix = x.copy()
        mix[free] -= largest / share * inverse[:-1, i]
        if ((mix >= arrays.lower - tolerance) & (mix <= arrays.upper + tolerance)).all():
            found[limit] = np.clip(mix, arrays.lower, arrays.upper)
    return found


@dataclass(frozen=True, eq=False)
class Shortfall:
    """feasible: whether all rows can be met. x: the mix that does, or falls short least."""

    feasible: bool
    x: Array


def least_shortfall(arrays: Arrays) -> Shortfall:
    """Whether all rows can be met, by a fresh solve, and checked either way. Raises FailedSolve where neither a mix nor
    multipliers prove it."""
    m, n = arrays.a.shape
    k = arrays.inequalities
    wide = np.hstack((arrays.a, np.eye(m), -np.eye(m)[:, k:]))
    extra = wide.shape[1] - n
    warm = Warm(
        dataclasses.replace(
            arrays,
            a=wide,
            cost=np.concatenate((np.zeros(n), np.ones(extra))),
            lower=np.concatenate((arrays.lower, np.zeros(extra))),
            upper=np.concatenate((arrays.upper, np.full(extra, np.inf))),
        ),
        None,
        DUAL,
    )
    if warm.solve() != "optimal":
        raise FailedSolve("the least shortfall was not found")
    x = np.clip(warm.x()[:n], arrays.lower, arrays.upper)
    if not _shortfall(arrays, x).any():
        return Shortfall(True, x)
    y = warm.duals()
    y[:k] = np.maximum(y[:k], 0.0)
    y[np.abs(y) <= _PRICED * float(np.abs(y).max(initial=0.0))] = 0.0
    if not _proves(arrays, y):
        raise FailedSolve("that the limits clash is not proven")
    return Shortfall(False, x)


def _shortfall(arrays: Arrays, x: Array) -> Array:
    """By how much each scaled row is missed, 0 within the tolerance; shape (m,)."""
    slack = arrays.a @ x - arrays.b
    missed = np.where(np.arange(slack.size) < arrays.inequalities, np.maximum(-slack, 0.0), np.abs(slack))
    missed[missed <= 3 * _HOLDS * max(1.0, float(np.abs(x).max(initial=0.0)))] = 0.0
    return missed


def _proves(arrays: Arrays, y: Array) -> bool:
    """Whether multipliers prove that no mix meets the rows: y b exceeds y a x for every x within its bounds."""
    total = y @ arrays.a
    total[np.abs(total) <= 1e-12 * float(np.abs(y).max(initial=0.0))] = 0.0
    with np.errstate(invalid="ignore"):
        most = np.where(total > 0.0, total * arrays.upper, np.where(total < 0.0, total * arrays.lower, 0.0))
    return bool(y @ arrays.b > most.sum())
