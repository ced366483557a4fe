"""A whole batch checked from the order alone, and GLPK (not HiGHS) asked for one that is better."""

from __future__ import annotations

import math
from fractions import Fraction

import swiglpk as glpk

from blendapp.optimise.steps.problem import Order, exact
from blendapp.optimise.steps.search import WholeBatch

_SLACK = Fraction(1, 10**9)


def broken_limits(order: Order, kilograms: tuple[Fraction, ...]) -> tuple[int, ...]:
    """The limits that do not hold at kilograms, each by its quotient, in fractions."""
    total = sum(kilograms)
    amounts = [kg * exact(order.amount) / total for kg in kilograms]
    found = set()
    for row in order.rows:
        top = sum(exact(float(a)) * x for a, x in zip(row.numerator, amounts, strict=True))
        per = Fraction(1)
        if row.divisor is not None:
            per = sum((exact(float(a)) * x for a, x in zip(row.divisor, amounts, strict=True)), Fraction(0))
        if per == 0 or row.limit is None:
            continue
        low, high = (None if end is None else exact(end) for end in (row.minimum, row.maximum))
        if low is not None and top / per < low - _SLACK * abs(low):
            found.add(row.limit)
        if high is not None and top / per > high + _SLACK * abs(high):
            found.add(row.limit)
    for one in order.least_if_used:
        if 0 < amounts[one.line] < exact(one.least) * (1 - _SLACK):
            found.add(one.limit)
    return tuple(sorted(found))


def recheck(order: Order, found: WholeBatch) -> None:
    """Every hard rule in whole numbers of steps, the total, the deviations and every limit from the kilograms."""
    deviation = 0.0
    for line, placed, n, kg in zip(order.lines, found.placed, found.steps, found.kilograms, strict=True):
        load = line.loads[placed.load]
        step, share = exact(load.step_kg), Fraction(line.share_kg)
        assert n >= 0
        assert kg == n * step
        allowed = max(step, exact(load.tolerance) * share)
        if line.fixed_kg is None:
            assert abs(kg - share) <= allowed + step * _SLACK
        else:
            assert kg == exact(line.fixed_kg)
        if n:
            assert load.least_kg is None or kg >= exact(load.least_kg)
            assert load.greatest_kg is None or kg <= exact(load.greatest_kg)
        deviation += float(abs(kg - share) / allowed)
    assert found.total_kg == sum(found.kilograms)
    assert found.error_kg == abs(found.total_kg - exact(order.batch_kg))
    assert abs(found.deviation - deviation) <= 1e-9 * max(1.0, deviation)
    assert found.broken == broken_limits(order, found.kilograms)
    cost = sum(float(kg) * line.cost_per_kg for kg, line in zip(found.kilograms, order.lines, strict=True))
    assert abs(found.cost - cost) <= 1e-9 * max(1.0, abs(cost))


def check_none_better(order: Order, found: WholeBatch, time_limit_s: float = 20.0) -> list[str]:
    """Fails if GLPK finds a batch with a smaller error of the total, or as good a total and fewer limits broken.

    Returns what it proved: "total", "limits", "not proven" where its time was up.
    """
    proved = []
    if found.error_kg and found.stage("total").proven:
        proved.append(_search(order, found, None, time_limit_s) or "total")
    if found.broken and found.stage("limits").proven:
        proved.append(_search(order, found, len(found.broken) - 1, time_limit_s) or "limits")
    return proved


def _search(order: Order, found: WholeBatch, most: int | None, time_limit_s: float) -> str | None:
    """A batch with a nearer total (most None), or as near and at most so many limits broken: None where GLPK proves
    that there is none, "not proven" where its time was up."""
    solver = _Glpk()
    try:
        steps = [p.step for p in found.placed]
        near = [round(p.share / p.step) for p in found.placed]
        columns, spans = [], []
        for line, p, m in zip(order.lines, found.placed, near, strict=True):
            load = line.loads[p.load]
            allowed = max(p.step, exact(load.tolerance) * p.share) + p.step * _SLACK
            low, high = -((allowed - p.share) // p.step), (p.share + allowed) // p.step
            if load.least_kg is not None and low > 0:
                low = max(low, -(-exact(load.least_kg) // p.step))
            if load.greatest_kg is not None:
                high = min(high, exact(load.greatest_kg) // p.step)
            spans.append((max(int(low), 0) - m, int(high) - m))
            columns.append(solver.whole(*spans[-1]))
        # Totals are multiples of the common measure of the steps, counted here from the nearest steps.
        common = Fraction(math.gcd(*(int(s * 10**9) for s in steps)), 10**9)
        at = sum((s * m for s, m in zip(steps, near, strict=True)), Fraction(0))
        low = math.ceil((exact(order.batch_kg) - found.error_kg - at) / common)
        high = math.floor((exact(order.batch_kg) + found.error_kg - at) / common)
        if most is None:
            low += at + low * common == exact(order.batch_kg) - found.error_kg
            high -= at + high * common == exact(order.batch_kg) + found.error_kg
            if low > high:
                return None
        solver.row(columns, [float(s / common) for s in steps], low, high)
        if most is not None:
            marks: dict[int, int] = {}
            for limit, terms in _sides(order, steps):
                size = max((abs(t) for t in terms), default=Fraction(1)) or Fraction(1)
                scaled = [float(t / size) for t in terms]
                value = float(sum((t * m for t, m in zip(terms, near, strict=True)), Fraction(0)) / size)
                worst = value + sum(min(t * a, t * b) for t, (a, b) in zip(scaled, spans, strict=True))
                if worst >= 0:
                    continue
                if limit not in marks:
                    marks[limit] = solver.whole(0, 1)
                solver.row([*columns, marks[limit]], [*scaled, -worst], -value, None)
            solver.row(list(marks.values()), [1.0] * len(marks), None, float(most))
        answer = solver.run(time_limit_s)
        if answer is None or answer == "not proven":
            return answer
        kilograms = tuple(s * (m + solver.value(j)) for s, m, j in zip(steps, near, columns, strict=True))
        error = abs(sum(kilograms) - exact(order.batch_kg))
        better = error < found.error_kg if most is None else error <= found.error_kg
        fewer = most is None or len(broken_limits(order, kilograms)) <= most
        assert not (better and fewer), f"a better batch exists: {[float(kg) for kg in kilograms]}"
        return "not proven"  # it took dust for holding
    finally:
        solver.close()


def _sides(order: Order, steps: list[Fraction]) -> list[tuple[int, list[Fraction]]]:
    """sum(terms steps) >= 0 for each side of each limit, loosened as the rule says; practical ones left out."""
    found = []
    for row in order.rows:
        per = [Fraction(1)] * len(steps) if row.divisor is None else [exact(float(a)) for a in row.divisor]
        amount = exact(order.amount) if row.divisor is None else Fraction(1)
        for bound, sign in ((row.minimum, 1), (row.maximum, -1)):
            if bound is not None and row.limit is not None:
                end = exact(bound) - sign * _SLACK * abs(exact(bound))
                terms = [
                    sign * (exact(float(a)) * amount - end * b) * s
                    for a, b, s in zip(row.numerator, per, steps, strict=True)
                ]
                found.append((row.limit, terms))
    return found


class _Glpk:
    """A pure feasibility problem in whole numbers."""

    def __init__(self) -> None:
        glpk.glp_term_out(glpk.GLP_OFF)
        self.problem = glpk.glp_create_prob()

    def close(self) -> None:
        glpk.glp_delete_prob(self.problem)

    def whole(self, low: int, high: int) -> int:
        j = int(glpk.glp_add_cols(self.problem, 1))
        glpk.glp_set_col_kind(self.problem, j, glpk.GLP_IV)
        glpk.glp_set_col_bnds(self.problem, j, glpk.GLP_FX if low == high else glpk.GLP_DB, low, high)
        return j

    def row(self, columns: list[int], values: list[float], low: float | None, high: float | None) -> None:
        i = glpk.glp_add_rows(self.problem, 1)
        index, value = glpk.intArray(len(columns) + 1), glpk.doubleArray(len(columns) + 1)
        used = 0
        for j, v in zip(columns, values, strict=True):
            if v:
                used += 1
                index[used], value[used] = j, v
        glpk.glp_set_mat_row(self.problem, i, used, index, value)
        kind = glpk.GLP_UP if low is None else (glpk.GLP_LO if high is None else glpk.GLP_DB)
        if low is not None and low == high:
            kind = glpk.GLP_FX
        glpk.glp_set_row_bnds(self.problem, i, kind, low or 0.0, high or 0.0)

    def run(self, time_limit_s: float) -> str | None:
        """ "found", None where there is none, or "not proven"."""
        options = glpk.glp_iocp()
        glpk.glp_init_iocp(options)
        options.presolve, options.msg_lev = glpk.GLP_ON, glpk.GLP_MSG_OFF
        options.tol_int, options.tol_obj = 1e-8, 1e-9
        options.tm_lim = int(time_limit_s * 1000)
        ended = glpk.glp_intopt(self.problem, options)
        if ended in (glpk.GLP_ENOPFS, glpk.GLP_ENODFS):
            return None
        status = glpk.glp_mip_status(self.problem)
        if ended == 0 and status == glpk.GLP_NOFEAS:
            return None
        return "found" if status in (glpk.GLP_OPT, glpk.GLP_FEAS) else "not proven"

    def value(self, j: int) -> int:
        return round(glpk.glp_mip_col_val(self.problem, j))
