"""Answers kept over changes of prices are what solving afresh gives."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.optimise.certificate import check
from blendapp.optimise.kept import Kept
from blendapp.optimise.program import Program
from blendapp.optimise.solve import solve
from blendapp.optimise.ties import settle
from tests.optimise import made


@settings(max_examples=60, deadline=None, derandomize=True)
@given(program=made.programs(), seed=st.integers(0, 10**6), share=st.sampled_from([0.001, 0.02, 0.3]))
def test_after_any_change_of_prices_the_cost_is_that_of_a_fresh_solve(
    program: Program, seed: int, share: float
) -> None:
    random = np.random.default_rng(seed)
    solution = settle(solve(program), random.random(program.size))
    if solution.x is None:
        return
    kept = Kept(solution)
    cost = program.cost.copy()
    before = solution.x
    for _ in range(4):
        cost = cost * (1 + share * random.choice((-1.0, 0.0, 1.0), cost.size))
        fresh = solve(dataclasses.replace(program, cost=cost))
        held = kept.holds(cost)
        found = kept.reprice(cost)
        assert found.objective == pytest.approx(fresh.objective, rel=1e-9)
        assert found.as_before == pytest.approx(cost @ before, rel=1e-12)
        assert found.as_before >= found.objective - 1e-9 * abs(found.objective)
        if held:
            assert found.stays
        if found.stays:
            assert found.x == pytest.approx(before, abs=1e-6 * max(1.0, np.abs(before).max()))
        whole = kept.solution()
        assert whole.program is not None
        assert (whole.program.cost == cost).all()
        check(whole.program, whole)
        before = found.x


def test_small_changes_keep_the_mix_without_a_solve() -> None:
    program = made.program(7, 10, 5)
    kept = Kept(solve(program))
    assert kept.holds(program.cost * 1.0000001)
    assert kept.reprice(program.cost * 2.0).stays


def test_a_price_beyond_its_range_does_not() -> None:
    program = made.program(7, 10, 5)
    solution = solve(program)
    assert solution.x is not None
    kept = Kept(solution)
    cost = program.cost.copy()
    cost[int(solution.x.argmax())] *= 10.0
    assert not kept.holds(cost)
    found = kept.reprice(cost)
    assert not found.stays
    assert found.objective < found.as_before


def test_no_answer_cannot_be_kept() -> None:
    program = dataclasses.replace(made.program(7, 10, 5), upper=np.full(10, 0.01))
    with pytest.raises(ValueError, match="linear program"):
        Kept(solve(program))
