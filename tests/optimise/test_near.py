"""Near-optimal ranges against a program of their own for each end."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.optimise.near import near_optimal
from blendapp.optimise.program import Program, Row
from blendapp.optimise.solve import solve
from tests.benchmarks.feedlike import mix
from tests.optimise import glpk, made


def end(program: Program, dearest: float, j: int, sign: float) -> float:
    """The least (sign 1) or greatest (sign -1) amount of a column by the independent solver."""
    cost = np.zeros(program.size)
    cost[j] = sign
    status, value = glpk.optimum(
        dataclasses.replace(program, cost=cost, rows=(*program.rows, Row(program.cost, None, dearest)))
    )
    return -sign * np.inf if status == "unbounded" else sign * (np.nan if value is None else value)


@settings(max_examples=60, deadline=None, derandomize=True)
@given(program=made.programs(), tolerance=st.sampled_from([0.0, 0.5, 5.0]))
def test_each_end_is_the_extreme_of_a_program_of_its_own(program: Program, tolerance: float) -> None:
    solution = solve(program)
    if solution.objective is None:
        return
    found = near_optimal(solution, tolerance)
    assert found.complete
    slack = 1e-9 * abs(solution.objective)  # at nought per cent the two solvers' tolerances must not decide
    room = 3e-6 * max(1.0, float(np.abs(solution.x).max()))
    for j in range(program.size):
        for value, sign in ((found.low[j], 1.0), (found.high[j], -1.0)):
            outer = end(program, found.dearest + slack, j, sign)
            if np.isinf(outer):
                assert value == outer
                continue
            assert value == pytest.approx(outer, abs=room if tolerance else 1e-2 * room / 3e-6), (j, sign)


def test_columns_left_out_of_the_small_program_come_in_where_they_matter() -> None:
    for seed in range(3):
        program = mix(60, 15, seed)
        solution = solve(program)
        found = near_optimal(solution, 2.0)
        for j in range(0, 60, 7):
            assert found.high[j] == pytest.approx(end(program, found.dearest, j, -1.0), abs=1e-7)
            assert found.low[j] == pytest.approx(end(program, found.dearest, j, 1.0), abs=1e-7)


def test_the_answer_lies_in_its_own_ranges() -> None:
    solution = solve(made.program(4, 12, 6))
    found = near_optimal(solution)
    assert (found.low <= solution.x).all()
    assert (found.high >= solution.x).all()


def test_a_stopped_run_says_so_and_leaves_the_rest_unknown() -> None:
    solution = solve(made.program(4, 12, 6))
    turns = iter([True] * 3 + [False] * 100)
    found = near_optimal(solution, 0.5, lambda: next(turns))
    assert not found.complete
    assert np.isnan(found.low).any()


def test_a_negative_tolerance_is_refused() -> None:
    with pytest.raises(ValueError, match="below nought"):
        near_optimal(solve(made.program(4, 12, 6)), -0.1)


def test_a_range_without_end_is_endless() -> None:
    program = Program(
        np.array([1.0, 0.0]), np.zeros(2), np.full(2, np.inf), (Row(np.array([1.0, 0.0]), 2.0, None, limit=0),)
    )
    found = near_optimal(solve(program))
    assert found.high[1] == np.inf
    assert found.high[0] == pytest.approx(2.01)
