"""Practical minima, counts and whole amounts, against trying every choice with an independent solver."""

from __future__ import annotations

import dataclasses
import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.optimise.certificate import check
from blendapp.optimise.program import Bound, Count, Program, Row
from blendapp.optimise.solve import solve
from tests.optimise import glpk, made


def by_trying_all(program: Program) -> float | None:
    """The optimum over every choice of used columns."""
    best = None
    least = np.zeros(program.size) if program.least_if_used is None else program.least_if_used
    marked = sorted({int(j) for j in least.nonzero()[0]} | {j for c in program.counts for j in c.columns})
    for used in itertools.product((False, True), repeat=len(marked)):
        chosen = dict(zip(marked, used, strict=True))
        if any(sum(chosen[j] for j in count.columns) > count.most for count in program.counts):
            continue
        lower, upper = program.lower.copy(), program.upper.copy()
        for j, on in chosen.items():
            if on:
                lower[j] = max(lower[j], least[j])
            else:
                upper[j] = min(upper[j], 0.0)
        if (lower > upper).any():
            continue
        plain = dataclasses.replace(program, lower=lower, upper=upper, least_if_used=None, least_limit=None, counts=())
        cost = glpk.optimum(plain)[1]
        if cost is not None and (best is None or cost < best):
            best = cost
    return best


@settings(max_examples=40, deadline=None, derandomize=True)
@given(
    seed=st.integers(0, 10**6),
    columns=st.integers(3, 7),
    limits=st.integers(1, 5),
    ration=st.booleans(),
    practical=st.booleans(),
    most=st.integers(1, 6),
)
def test_the_best_choice_is_the_best_of_all(
    seed: int, columns: int, limits: int, ration: bool, practical: bool, most: int
) -> None:
    random = np.random.default_rng(seed)
    base = made.program(seed, columns, limits, ration)
    size = 12.0 if ration else 1.0
    least = np.where(random.random(columns) < 0.5, random.uniform(0.01, 0.3, columns), 0.0) * size
    program = dataclasses.replace(
        base,
        least_if_used=least if practical else None,
        least_limit=np.arange(100, 100 + columns) if practical else None,
        counts=(Count(tuple(range(columns)), most, 99),),
    )
    solution = solve(program)
    best = by_trying_all(program)
    if best is None:
        assert solution.status == "infeasible"
        return
    assert solution.status == "optimal"
    check(program, solution)
    assert solution.objective == pytest.approx(best, rel=1e-7)
    assert solution.x is not None
    count = solution.limits[99]
    assert count.value == (solution.x > 1e-9).sum()
    assert (count.binding == "maximum") == (count.value == most)
    assert count.unique is None
    assert count.price is None


def trace() -> Program:
    """A trace ingredient that is needed in a small amount, but cannot be weighed below 1 %."""
    return Program(
        np.array([200.0, 900.0, 400.0]),
        np.zeros(3),
        np.ones(3),
        (Row(np.ones(3), 1.0, 1.0), Row(np.array([0.0, 40.0, 4.0]), 0.1, None, limit=0)),
        least_if_used=np.array([0.0, 0.01, 0.0]),
        least_limit=np.array([-1, 1, -1]),
    )


def test_a_practical_minimum_binds_when_its_ingredient_is_used() -> None:
    program = trace()
    solution = solve(program)
    assert solution.given
    assert solution.x is not None
    assert solution.x == pytest.approx([0.975, 0.0, 0.025], abs=1e-12)
    assert solution.limits[1] == (0.0, None, True, 0.0)
    taken = dataclasses.replace(program, cost=np.array([200.0, 500.0, 400.0]))
    solution = solve(taken)
    assert solution.x == pytest.approx([0.99, 0.01, 0.0], abs=1e-12)
    assert solution.limits[1].binding == "minimum"
    assert solution.limits[1].price == pytest.approx(300.0)


def test_prices_given_the_choice_are_not_the_noughts_of_the_integer_solve() -> None:
    program = trace()
    solution = solve(program)
    assert solution.limits[0].price == pytest.approx(50.0)
    assert solution.priced is not None
    check(solution.priced, dataclasses.replace(solution, priced=solution.priced))


def test_a_practical_minimum_above_the_greatest_amount_leaves_its_column_out() -> None:
    program = dataclasses.replace(trace(), bounds=(Bound(1, None, 0.005, 2),))
    solution = solve(program)
    assert solution.x is not None
    assert solution.x[1] == 0.0


def test_a_practical_minimum_without_an_upper_end_gets_one_from_the_other_limits() -> None:
    program = Program(
        np.array([1.0, 3.0]),
        np.zeros(2),
        np.full(2, np.inf),
        (Row(np.array([1.0, 2.0]), 10.0, 10.0, limit=0),),
        least_if_used=np.array([11.0, 2.0]),
        least_limit=np.array([1, 2]),
    )
    solution = solve(program)
    assert solution.x == pytest.approx([0.0, 5.0], abs=1e-12)


def test_whole_amounts_are_whole() -> None:
    program = Program(
        np.array([3.0, 4.0]),
        np.zeros(2),
        np.full(2, 50.0),
        (Row(np.array([2.0, 3.0]), 12.5, None, limit=0),),
        whole=np.array([True, True]),
    )
    solution = solve(program)
    assert solution.x is not None
    assert (solution.x == np.round(solution.x)).all()
    assert solution.objective == pytest.approx(18.0)
    check(program, solution)


def test_a_mixed_integer_program_that_falls_for_ever_is_unbounded() -> None:
    program = Program(np.array([-1.0, 3.0]), np.zeros(2), np.full(2, np.inf), (), least_if_used=np.array([0.5, 0.5]))
    assert solve(program).status == "unbounded"


def test_a_search_cut_short_says_so_and_shows_its_gap() -> None:
    random = np.random.default_rng(5)
    n, m = 60, 25
    hidden = random.dirichlet(np.full(n, 0.5))
    content = random.random((m, n))
    rows = [Row(np.ones(n), 1.0, 1.0)]
    rows += [
        Row(content[i], float(content[i] @ hidden) * 0.95, float(content[i] @ hidden) * 1.05, limit=i) for i in range(m)
    ]
    program = Program(
        random.uniform(100, 900, n), np.zeros(n), np.ones(n), tuple(rows), counts=(Count(tuple(range(n)), 14, m),)
    )
    solution = solve(program, time_limit_s=0.4)
    assert solution.status in ("stopped", "optimal", "infeasible")
    if solution.status == "stopped" and solution.x is not None:
        assert solution.gap is not None
        assert solution.gap > 0
        check(program, solution)
    if solution.x is None:
        assert solution.objective is None
        assert not solution.limits


def test_nothing_is_printed_on_standard_output(capfd: pytest.CaptureFixture[str]) -> None:
    solve(trace())
    assert capfd.readouterr().out == ""
