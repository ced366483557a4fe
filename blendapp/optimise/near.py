"""Near-optimal ranges: how little and how much of each column the mixes hold that cost at most a little more."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from blendapp.optimise.linear import FailedSolve
from blendapp.optimise.program import Array
from blendapp.optimise.solution import Solution
from blendapp.optimise.warm import Warm

_SEEN = 1e-9
_PRICED_OUT = 1e-9
_AT_ONCE = 10  # columns brought in together when an outcome can still gain


@dataclass(frozen=True, eq=False)
class Near:
    """low, high: shape (n,), NaN where not asked yet when it was stopped. dearest: the cost that no mix passed.
    complete: whether it ran to its end."""

    low: Array
    high: Array
    dearest: float
    complete: bool


def near_optimal(solution: Solution, tolerance_percent: float = 0.5, go_on: Callable[[], bool] | None = None) -> Near:
    """Least and greatest amount of each column over all mixes within z + tolerance |z|, all limits held.

    With practical or count limits: for the chosen columns. go_on is asked between solves and stops the work by
    saying False. Raises ValueError where there is no answer or the tolerance is below nought, FailedSolve where
    the solver gives no clear status.
    """
    if not tolerance_percent >= 0:
        raise ValueError("a near-optimal tolerance below nought")
    if solution.arrays is None or solution.x is None or solution.objective is None:
        raise ValueError("only an answer has near-optimal mixes")
    x, arrays, objective = solution.x, solution.arrays, solution.objective
    dearest = objective + tolerance_percent / 100.0 * abs(objective)
    low, high = np.full(x.size, np.nan), np.full(x.size, np.nan)
    least, most = x.copy(), x.copy()  # the extremes among the mixes seen
    sifted = _Sifted(solution, dearest)
    size = max(1.0, float(np.abs(x).max(initial=0.0)))
    for sign, ends, seen, bound in ((-1.0, high, most, arrays.upper), (1.0, low, least, arrays.lower)):
        for j in np.argsort(-x, kind="stable").tolist():
            if abs(seen[j] - bound[j]) <= _SEEN * size:  # a mix seen already reaches the column's own bound
                ends[j] = bound[j]
                continue
            if go_on is not None and not go_on():
                return Near(low, high, dearest, False)
            mix = sifted.extreme(j, sign)
            if mix is None:
                ends[j] = -sign * np.inf
                continue
            np.minimum(least, mix, out=least)
            np.maximum(most, mix, out=most)
            ends[j] = (min(mix[j], x[j]) if sign > 0 else max(mix[j], x[j])) + 0.0
    return Near(low, high, dearest, True)


class _Sifted:
    """The near-optimal mixes as a program in few columns: those in use and the cheapest to bring in. Others come in
    as deviations from x when they price out, and leave again, so that every solve starts from the optimum's basis."""

    def __init__(self, solution: Solution, dearest: float) -> None:
        assert solution.arrays is not None
        assert solution.x is not None
        assert solution.face is not None
        assert solution.lower_price is not None
        assert solution.upper_price is not None
        arrays, x, inside = solution.arrays, solution.x, solution.face.inside
        peak = float(np.abs(arrays.cost).max(initial=0.0)) or 1.0
        scale = 2.0 ** -float(np.frexp(peak)[1])
        self._a = np.vstack((-scale * arrays.cost, arrays.a))  # the cost may rise to dearest: one more inequality
        price = np.where(inside, -1.0, solution.lower_price - solution.upper_price)
        keep = int(inside.sum()) + max(20, x.size // 8)
        self._kept = np.sort(np.argsort(price, kind="stable")[:keep])
        rest = np.ones(x.size, dtype=bool)
        rest[self._kept] = False
        self._rest = rest
        self._x, self._lower, self._upper = x, arrays.lower, arrays.upper
        self._at_lower = x <= arrays.lower + solution.face.tolerance
        self._at_upper = x >= arrays.upper - solution.face.tolerance
        part = dataclasses.replace(
            arrays,
            a=self._a[:, self._kept],
            b=np.append(-scale * dearest, arrays.b) - self._a[:, rest] @ x[rest],
            inequalities=arrays.inequalities + 1,
            cost=arrays.cost[self._kept],
            lower=arrays.lower[self._kept],
            upper=arrays.upper[self._kept],
        )
        self._warm = Warm(part)
        self._warm.solve()
        self._basis = self._warm.basis()

    def extreme(self, j: int, sign: float) -> Array | None:
        """A mix with the least (sign 1) or greatest (sign -1) amount of column j; None where it has no end."""
        cost = np.zeros(self._x.size)
        cost[j] = sign
        kept = self._kept.size
        self._warm.set_basis(self._basis)
        self._warm.set_cost(cost[self._kept])
        extra: list[int] = []
        new = [j] if self._rest[j] else []
        mix: Array | None = None
        while True:
            if new:
                extra += new
                self._warm.add_columns(
                    self._a[:, new], cost[new], self._lower[new] - self._x[new], self._upper[new] - self._x[new]
                )
            verdict = self._warm.solve()
            if verdict not in ("optimal", "unbounded"):
                self._warm.forget()
                verdict = self._warm.solve()
            if verdict == "unbounded":
                break
            if verdict != "optimal":
                raise FailedSolve(f"a near-optimal mix was not found: {verdict}")
            reduced = cost - self._warm.duals() @ self._a
            gain = np.where(self._at_lower, -reduced, 0.0)
            gain = np.where(self._at_upper, np.maximum(gain, reduced), gain)
            gain[self._kept] = 0.0
            gain[extra] = 0.0
            new = [int(i) for i in np.argsort(-gain)[:_AT_ONCE] if gain[i] > _PRICED_OUT]
            new = [i for i in new if self._lower[i] < self._upper[i]]
            if not new:
                found = self._warm.x()
                mix = self._x.copy()
                mix[self._kept] = found[:kept]
                mix[extra] += found[kept:]
                break
        if extra:
            self._warm.delete_columns(kept, kept + len(extra))
        return mix
